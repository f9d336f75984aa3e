"""Poles, zeros and a gain to real second-order sections, with near poles and zeros together."""

from __future__ import annotations

import numpy as np

from a2d.analog.sections import Sections, natural_frequency_hz
from a2d.arrays import ComplexArray, FloatArray
from a2d.errors import ParameterError

_NEXT_GROUP = float(np.log(3.0))
_CONJUGATE_TOLERANCE = 1e-6  # of |root|: eigenvalue solvers give conjugates to some 1e-15, double roots to 1e-8


def sections_of_roots(zeros: ComplexArray, poles: ComplexArray, gain: float) -> Sections:
    """Sections of gain·Π(s - z)/Π(s - p).

    Parameters
    ----------
    zeros, poles
        In rad/s, complex ones in conjugate pairs; at most as many zeros as poles.
    gain
        The factor before the products, any sign.

    Raises
    ------
    ParameterError
        More zeros than poles, or a complex root without its conjugate.

    Notes
    -----
    Pole pairs are taken from the highest Q down and each takes the zeros nearest to it, so that no section has a gain
    far from its neighbours'. Each section is scaled to a peak of the same order of magnitude as 1 and the factor that
    is left goes to the first.
    """
    if len(zeros) > len(poles):
        raise ParameterError(f"more zeros than poles ({len(zeros)} and {len(poles)}): no section can hold them")
    pole_groups = _grouped(np.asarray(poles, dtype=np.complex128))
    zero_groups = _shared_out(pole_groups, np.asarray(zeros, dtype=np.complex128))
    if not pole_groups:
        return Sections(np.array([[0.0, 0.0, gain]]), np.array([[0.0, 0.0, 1.0]]), np.array([1000.0]))
    rows_b, rows_a, log_left, sign = [], [], np.log(abs(gain)) if gain else -np.inf, np.sign(gain)
    for group, own in zip(pole_groups, zero_groups, strict=True):
        b, a = _monic(own), _monic(group)
        reference = np.abs(group).max() or 1.0
        weight = reference ** np.array([2.0, 1.0, 0.0])
        scale_a, scale_b = np.max(np.abs(a) * weight), np.max(np.abs(b) * weight)
        rows_a.append(a / a[-1] if a[-1] else a / scale_a)
        scale_a = a[-1] if a[-1] else scale_a
        rows_b.append(b / scale_b)
        log_left += np.log(scale_b) - np.log(abs(scale_a))
        sign *= np.sign(scale_a)
    rows_b[0] = rows_b[0] * (sign * np.exp(log_left))
    stacked_b, stacked_a = np.array(rows_b), np.array(rows_a)
    return Sections(stacked_b, stacked_a, natural_frequency_hz(stacked_b, stacked_a))


def _grouped(roots: ComplexArray) -> list[ComplexArray]:
    """Conjugate pairs from the highest Q down, then real roots two by two in order of modulus."""
    tolerance = _CONJUGATE_TOLERANCE * np.abs(roots)
    real = np.sort(roots[np.abs(roots.imag) <= tolerance * 1e-3].real)
    upper = roots[roots.imag > tolerance * 1e-3]
    lower = list(roots[roots.imag < -tolerance * 1e-3])
    if len(upper) != len(lower):
        raise ParameterError(f"complex roots must come in conjugate pairs ({len(upper)} above, {len(lower)} below)")
    groups = []
    for root in sorted(upper, key=lambda r: abs(r) / max(abs(r.real), 1e-300), reverse=True):
        partner = min(lower, key=lambda r: abs(r - np.conj(root)))
        if abs(partner - np.conj(root)) > _CONJUGATE_TOLERANCE * abs(root):
            raise ParameterError(f"a complex root has no conjugate ({root:.6g})")
        lower.remove(partner)
        groups.append(np.array([root, np.conj(root)]))
    ordered = real[np.argsort(np.abs(real), kind="stable")].astype(np.complex128)
    return groups + [ordered[i : i + 2] for i in range(0, len(ordered), 2)]


def _shared_out(pole_groups: list[ComplexArray], zeros: ComplexArray) -> list[ComplexArray]:
    """For each group of poles the zeros nearest to it, pairs kept together, no group with more zeros than poles."""
    left = _grouped(zeros)
    pairs = [g for g in left if len(g) == 2 and g[0].imag != 0.0]
    singles = [r for g in left if len(g) < 2 or g[0].imag == 0.0 for r in g]
    own: list[list[complex]] = [[] for _ in pole_groups]
    for pair in pairs:
        free = [i for i, g in enumerate(pole_groups) if len(g) - len(own[i]) == 2]
        if not free:
            raise ParameterError("a pair of zeros finds no pair of poles to stand with")
        own[min(free, key=lambda i: _distance(pair[0], pole_groups[i], 0))].extend(pair)
    for zero in sorted(singles, key=abs, reverse=True):
        free = [i for i, g in enumerate(pole_groups) if len(g) > len(own[i])]
        own[min(free, key=lambda i: _distance(zero, pole_groups[i], len(own[i])))].append(zero)
    return [np.array(o, dtype=np.complex128) for o in own]


def _distance(zero: complex, poles: ComplexArray, taken: int) -> float:
    """How far a real zero is from a group of poles that has `taken` zeros already.

    |log of the ratio of moduli| to the nearest pole. A zero at 0 goes to the lowest poles: both of a group's places
    when the other poles lie more than three times higher (a high-pass and a low-pass), else one each (band-passes).
    """
    moduli = np.log(np.abs(poles))
    if zero == 0.0:
        return float(moduli.max()) + taken * _NEXT_GROUP
    return float(np.min(np.abs(moduli - np.log(abs(zero)))))


def _monic(roots: ComplexArray) -> FloatArray:
    """[c2, c1, c0] of Π(s - root), real; leading zeros below order two."""
    c = np.zeros(3)
    if len(roots) == 2:
        pair = roots[0].imag != 0.0
        c[:] = 1.0, -(roots[0] + roots[1]).real, abs(roots[0]) ** 2 if pair else (roots[0] * roots[1]).real
    elif len(roots) == 1:
        c[1:] = 1.0, -roots[0].real
    else:
        c[2] = 1.0
    return c + 0.0  # -0.0 becomes 0.0
