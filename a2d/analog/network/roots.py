"""Poles, zeros and gain of a pencil, each root found from a shift of about its own size.

A root r shows in the reduced matrix at the shift σ as the eigenvalue -1/(r - σ), known to a rounding error of the
largest one; so one shift serves the roots of its own decade only. A root at infinity shows as 0 and one at zero as
1/σ, and several of them blur into a disc around that: outside the decade too, and how many there are is known
beforehand (`degree`), so that none of them is ever told from a finite root by its size.
"""

from __future__ import annotations

import itertools
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from a2d.analog.network.degree import Degree, pole_degree, zero_degree
from a2d.analog.network.pencil import Pencil, Reduced, reduce
from a2d.arrays import BoolArray, ComplexArray, FloatArray
from a2d.errors import NetworkError

_MIDDLE_RAD_S = 6000.0  # about 1 kHz
# Steps between shifts, and the decades around the middle that they cover: what most circuits need, what any does, and
# small steps, so that many roots at infinity blur to outside of each.
_LADDERS = ((10.0, -4, 6), (10.0, -16, 13), (1.6, -9, 13))
_OFFSETS = (1.0, 1.37, 0.71, 1.93)  # a root on the border of two steps may be counted twice or not at all
# Ranges in decades around the middle, narrow ones first: far out, the rounding errors of roots at zero and at infinity
# look like roots.
_RANGES = sorted(itertools.product((-5, -7, -10, -17), (7, 10, 14)), key=lambda ends: ends[1] - ends[0])
_WIDEST = (-10, 14)
_LARGEST = 700.0  # exp of it is within the range of a double, 1.8e308
_NONE = np.zeros(0, dtype=np.complex128)
_SINGULAR = "the network's equations have no unique solution (look for parts that leave a voltage or current open)"


@dataclass(frozen=True, eq=False)
class ZeroPole:
    """H(s) = gain·Π(s - zeros)/Π(s - poles), rad/s; roots at zero are exact, conjugates come in pairs."""

    zeros: ComplexArray
    poles: ComplexArray
    gain: float

    def response(self, f_hz: FloatArray) -> ComplexArray:
        """H(j2πf) at [F] (Hz)."""
        s = 2j * np.pi * np.asarray(f_hz)[..., np.newaxis]
        zeros, poles = s - self.zeros, s - self.poles
        size = min(len(self.zeros), len(self.poles))
        paired = np.prod(zeros[..., :size] / poles[..., :size], axis=-1)
        with np.errstate(divide="ignore"):  # a zero that is met: its logarithm is -inf, and exp(-inf) = 0
            rest = np.log(zeros[..., size:]).sum(axis=-1) - np.log(poles[..., size:]).sum(axis=-1)
            return np.asarray(np.sign(self.gain) * paired * np.exp(np.log(np.abs(self.gain)) + rest))


def zero_pole(pencil: Pencil) -> ZeroPole:
    """Poles, zeros and gain of one pencil, those that cancel still included.

    Raises
    ------
    NetworkError
        The equations have no unique solution, the output is zero, or the roots cannot be told apart.
    """
    of_poles, of_zeros = pole_degree(pencil), zero_degree(pencil)
    if of_poles is None:
        raise NetworkError(_SINGULAR)
    if of_zeros is None:
        raise NetworkError("the output stays at zero whatever the input does")
    (poles, zeros), shifts, h = _search(pencil, (of_poles, of_zeros))
    return _with_gain(poles, zeros, of_poles, of_zeros, shifts, h)


def poles_of(pencil: Pencil) -> ComplexArray:
    """The finite poles of one pencil, rad/s, those at zero included.

    Raises
    ------
    NetworkError
        The equations have no unique solution, or the poles cannot be told apart.
    """
    degree = pole_degree(pencil)
    if degree is None:
        raise NetworkError(_SINGULAR)
    (poles,), *_ = _search(pencil, (degree,))
    return _at_zero(poles, degree)


def _search(pencil: Pencil, degrees: Sequence[Degree]) -> tuple[list[ComplexArray], FloatArray, FloatArray]:
    """The poles, and the zeros where `degrees` has two, with the shifts that they were found from and H there."""
    counts = [degree.elsewhere for degree in degrees]
    wide: list[tuple[int, ...]] = []
    for (step, low, high), offset in itertools.product(_LADDERS, _OFFSETS):
        rungs = np.arange(round(low / np.log10(step)), round(high / np.log10(step)) + 1)
        shifts, seen = _seen_from(pencil, offset * _MIDDLE_RAD_S * step**rungs, zeros=len(counts) == 2)
        matrices = (seen.poles, seen.zeros())[: len(counts)]
        everything = [_within(m, shifts, step) if n else _NONE for m, n in zip(matrices, counts, strict=True)]
        found = [_so_many(roots, count) for roots, count in zip(everything, counts, strict=True)]
        if all(roots is not None for roots in found):
            return [roots for roots in found if roots is not None], shifts, seen.h
        if (step, low, high) == _LADDERS[1]:
            wide.append(tuple(len(_ranged(roots, _WIDEST)) for roots in everything))
    if len(set(wide)) == 1 and all(k <= n for k, n in zip(wide[0], counts, strict=True)):
        # The rest is beyond 10¹⁶ Hz; the caller's check against the network finds out if it is not.
        return [_ranged(roots, _WIDEST) for roots in everything], shifts, seen.h
    seen_of = ", ".join(f"{k} of {n}" for k, n in zip(wide[-1], counts, strict=True))
    raise NetworkError(
        f"the roots cannot be told apart in double precision ({seen_of} found; look for values far out of range)"
    )


def _so_many(roots: ComplexArray, count: int) -> ComplexArray | None:
    """The roots of the narrowest range that holds as many as there are; None when there is none."""
    return next((part for ends in _RANGES if len(part := _ranged(roots, ends)) == count), None)


def _ranged(roots: ComplexArray, ends: tuple[int, int]) -> ComplexArray:
    decades = np.log10(np.abs(roots) / _MIDDLE_RAD_S)
    return roots[(decades >= ends[0]) & (decades < ends[1])]


def _seen_from(pencil: Pencil, shifts: FloatArray, zeros: bool) -> tuple[FloatArray, Reduced]:
    """The pencil from each shift; shifts at which it is singular, or H is zero if `zeros` matter, are left out."""
    try:
        seen = reduce(pencil, shifts)
    except np.linalg.LinAlgError:
        shifts = np.array([s for s in shifts if _solvable(pencil, s)])
        seen = reduce(pencil, shifts)
    good: BoolArray = np.asarray(np.isfinite(seen.poles).all(axis=(-2, -1)))
    if zeros:
        good = np.asarray(good & np.isfinite(seen.zeros()).all(axis=(-2, -1)))
    return shifts[good], seen[good]


def _solvable(pencil: Pencil, shift: float) -> bool:
    try:
        reduce(pencil, np.asarray(shift))
    except np.linalg.LinAlgError:
        return False
    return True


def _within(matrices: FloatArray, shifts: FloatArray, step: float) -> ComplexArray:
    """The roots that lie within half a step of their own shift; conjugates made exact."""
    eigenvalues = np.linalg.eigvals(matrices).astype(np.complex128)
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        roots = shifts[:, np.newaxis] - 1.0 / eigenvalues
        size = np.abs(roots) / shifts[:, np.newaxis]
    found = roots[(size >= step**-0.5) & (size < step**0.5)]
    upper = found[found.imag > 0.0]
    return np.concatenate([found[found.imag == 0.0], upper, upper.conj()])


def _with_gain(
    poles: ComplexArray, zeros: ComplexArray, of_poles: Degree, of_zeros: Degree, shifts: FloatArray, h: FloatArray
) -> ZeroPole:
    """The gain that H has at the shifts, where it is real; the median of those near the middle.

    The factors are taken relative to the shift, (s - root)/s, so that none of their products leaves the range.
    """
    order = (of_zeros.total - of_poles.total) * np.log(shifts)
    near = np.abs(np.log10(shifts / _MIDDLE_RAD_S)) < 3.0

    def log_product(roots: ComplexArray) -> ComplexArray:
        return np.asarray(np.log(1.0 - roots / shifts[:, np.newaxis]).sum(axis=-1))

    exponent = np.log(h.astype(np.complex128)) + log_product(poles) - log_product(zeros) - order
    exponent = exponent[near] if near.any() else exponent
    if np.median(exponent.real) > _LARGEST:
        raise NetworkError(f"the network's order, {of_poles.total}, is too high for its frequencies (split it in two)")
    gain = float(np.median(np.exp(exponent).real))
    return ZeroPole(_at_zero(zeros, of_zeros), _at_zero(poles, of_poles), gain)


def _at_zero(roots: ComplexArray, degree: Degree) -> ComplexArray:
    return np.concatenate([np.zeros(degree.at_zero, dtype=np.complex128), roots])
