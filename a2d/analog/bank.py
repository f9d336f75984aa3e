"""Sections in parallel with a direct path: their sum as a cascade, or kept apart.

The sum of ten second-order bands has zeros that a polynomial of order 20 would blur. They are the zeros of a pencil of
first-order equations instead, two a section, found as a network's are; the poles are the bands' own.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import NamedTuple

import numpy as np

from a2d.analog.network.degree import pole_degree
from a2d.analog.network.pencil import Pencil
from a2d.analog.network.roots import ZeroPole, zero_pole
from a2d.analog.network.sections import cancellations, cancelled, second_order_sections
from a2d.analog.network.solve import CHECK_FLOOR, CHECK_HZ
from a2d.analog.response import chain_response
from a2d.analog.sections import Sections
from a2d.arrays import ArrayLike, ComplexArray, FloatArray
from a2d.errors import NetworkError

SUM_RELATIVE = 1e-9  # the cascade against the sum of its bands, relative to the sum's largest term


@dataclass(frozen=True, eq=False)
class Bank:
    """H(s) = direct + Σ mix·H_band(s).

    Parameters
    ----------
    names
        One a band, B of them.
    bands
        The sections of each band, themselves in cascade.
    mix
        Shape [B]: the weights, either sign.
    direct
        The weight of the direct path; 0 for none.
    """

    names: tuple[str, ...]
    bands: tuple[Sections, ...]
    mix: FloatArray
    direct: float

    def response(self, f_hz: ArrayLike) -> ComplexArray:
        """H(j2πf) at [F] (Hz): the sum itself."""
        return np.asarray(self.direct + self.terms(f_hz).sum(axis=0))

    def terms(self, f_hz: ArrayLike) -> ComplexArray:
        """Each weighted band's response, shape [B, F]."""
        f = np.atleast_1d(np.asarray(f_hz, dtype=np.float64))
        each = [chain_response(band.b, band.a, f) for band in self.bands]
        return np.asarray(self.mix[:, np.newaxis] * np.array(each))


class Cascade(NamedTuple):
    """A bank's sum as second-order sections b, a [S, 3], and what cancelled on the way."""

    b: FloatArray
    a: FloatArray
    notes: tuple[str, ...]


def cascade_of(bank: Bank) -> Cascade:
    """The bank as second-order sections in cascade.

    Raises
    ------
    NetworkError
        The sum is zero or rises without end, or the cascade does not agree with it from 0.1 Hz to 1 MHz to 1e-9.
    """
    roots, gone = cancelled(sum_roots(bank))
    b, a = second_order_sections(roots)
    terms = np.abs(bank.terms(CHECK_HZ)).max(axis=0)
    error = np.abs(chain_response(b, a, CHECK_HZ) - bank.response(CHECK_HZ))
    scale = np.maximum(terms, abs(bank.direct))
    worst = int(np.argmax(error / scale))
    if not np.all(error <= SUM_RELATIVE * scale + CHECK_FLOOR * scale.max()):
        raise NetworkError(
            f"the cascade does not agree with the sum of the bands at {CHECK_HZ[worst]:.4g} Hz "
            f"({error[worst] / scale[worst]:.1e} relative, allowed {SUM_RELATIVE:g})"
        )
    return Cascade(b, a, cancellations(gone))


def sum_roots(bank: Bank) -> ZeroPole:
    """The zeros from the pencil of the sum, the poles from the bands: they are the same and known."""
    pencil = _pencil(bank)
    found = zero_pole(pencil)
    poles = np.concatenate([_roots_of(a) for band in bank.bands for a in band.a] or [np.zeros(0, dtype=complex)])
    degree = pole_degree(pencil)
    assert degree is not None
    return replace(found, poles=poles) if len(poles) == degree.total else found


def _roots_of(c: FloatArray) -> ComplexArray:
    """The roots of c2·s² + c1·s + c0, without cancellation."""
    if c[0] == 0.0:
        return np.array([-c[2] / c[1]] if c[1] else [], dtype=complex)
    half, constant = c[1] / c[0] / 2.0, c[2] / c[0]
    discriminant = half * half - constant
    if discriminant < 0.0:
        root = complex(-half, np.sqrt(-discriminant))
        return np.array([root, root.conjugate()])
    large = -half - np.copysign(np.sqrt(discriminant), half)
    return np.array([large, constant / large if large else 0.0], dtype=complex)


class _Equations:
    """First-order equations under construction, for `Pencil`."""

    def __init__(self) -> None:
        self.rows: list[int] = []
        self.columns: list[int] = []
        self.values: list[float] = []
        self.reactances: list[tuple[int, int, float]] = []
        self.size = 0

    def unknown(self) -> int:
        self.size += 1
        return self.size - 1

    def add(self, row: int, terms: dict[int, float]) -> None:
        for column, value in terms.items():
            self.rows.append(row)
            self.columns.append(column)
            self.values.append(float(value))

    def pencil(self, source: int, out: int) -> Pencil:
        g = np.zeros((self.size, self.size))
        np.add.at(g, (np.array(self.rows), np.array(self.columns)), self.values)
        u, v = np.zeros((2, self.size, len(self.reactances)))
        for k, (row, column, _) in enumerate(self.reactances):
            u[row, k], v[column, k] = 1.0, 1.0
        e, sum_of = np.zeros((2, self.size))
        e[source], sum_of[out] = 1.0, 1.0
        c = np.array([value for *_, value in self.reactances])
        return Pencil(g, u, v, c, e, sum_of, (self.rows, self.columns, self.values))


def _pencil(bank: Bank) -> Pencil:
    """The sum as equations: input, each band's sections, and the output that adds them up."""
    equations = _Equations()
    source = equations.unknown()
    equations.add(source, {source: 1.0})
    total: dict[int, float] = {source: -bank.direct}
    for band, mix in zip(bank.bands, bank.mix, strict=True):
        signal = source
        for b, a in zip(band.b, band.a, strict=True):
            signal = _section(equations, signal, b, a)
        total[signal] = total.get(signal, 0.0) - mix
    out = equations.unknown()
    equations.add(out, {**total, out: 1.0})
    return equations.pencil(source, out)


def _section(equations: _Equations, source: int, b: FloatArray, a: FloatArray) -> int:
    """One section driven by the unknown `source`; the unknown that is its output.

    With the states x = u/a and x' = (s/w)·x the output is b0·x + (b1·w)·x' + (b2·w)·s·x'.
    """
    w = float(np.sqrt(abs(a[2] / a[0]))) if a[0] and a[2] else float(abs(a[2] / a[1])) if a[1] and a[2] else 1.0
    x = equations.unknown()
    equations.add(x, {x: a[2], source: -1.0})
    y = equations.unknown()
    equations.add(y, {y: 1.0, x: -b[2]})
    if a[0] or b[0]:
        slope = equations.unknown()
        equations.add(slope, {slope: -1.0})
        equations.reactances += [(slope, x, 1.0 / w), (x, slope, a[0] * w)]
        equations.add(x, {slope: a[1] * w})
        equations.add(y, {slope: -b[1] * w})
        equations.reactances.append((y, slope, -b[0] * w))
    else:
        equations.reactances += [(x, x, a[1]), (y, x, -b[1])]
    return y


def scaled_bank(bank: Bank, factor: float) -> Bank:
    """The bank with a factor on the whole."""
    return replace(bank, mix=bank.mix * factor, direct=bank.direct * factor)
