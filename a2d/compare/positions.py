"""Worst errors at many positions of a control at once.

The same figures as `a2d.compare.errors.compare` gives for one twin, with less work a position: what a control does not
move is evaluated once, and only the highest local maxima are searched between grid points.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import TypeAlias

import numpy as np

from a2d.analog.response import phase_slope, polynomial
from a2d.arrays import ComplexArray, FloatArray, IntArray
from a2d.compare.curves import FLOOR_DB
from a2d.compare.grid import around_narrow

_Curves: TypeAlias = tuple[ComplexArray, FloatArray]

MAGNITUDE, PHASE, GROUP_DELAY = range(3)
QUANTITIES = ("magnitude", "phase", "group_delay")
_BLOCK = 1 << 16  # values of one curve array at a time: what stays in a processor's cache
_POINTS = 256  # over the band, logarithmic; 2.7 % apart over three decades
_FOLDED = 150.0  # degrees
_PEAKS, _ZOOM_POINTS, _ZOOMS = 2, 9, 4


@dataclass(frozen=True, eq=False)
class Piece:
    """Sections in cascade that take M different values over the N positions.

    Parameters
    ----------
    reference
        Shape [M, S, 6]: b and a side by side, coefficients of s², s, 1; or a digital cascade as `candidate` is.
    candidate
        Shape [M, T, 6]: digital sections.
    index
        Shape [N]: which of the M each position has.
    """

    reference: FloatArray
    candidate: FloatArray
    index: IntArray


@dataclass(frozen=True, eq=False)
class PositionErrors:
    """Worst errors of N positions over a band, signed, and where they lie.

    Attributes
    ----------
    band_hz
        Shape [2].
    worst, at_hz
        Shape [3, N]: magnitude in dB, phase in degrees, group delay in µs; and the frequencies in Hz.
    """

    band_hz: FloatArray
    worst: FloatArray
    at_hz: FloatArray

    def worst_position(self, quantity: int = MAGNITUDE) -> int:
        """The flat index of the position whose error is largest."""
        return int(np.argmax(np.abs(self.worst[quantity])))


def position_errors(
    pieces: Sequence[Piece],
    band_hz: FloatArray,
    rate_hz: float,
    reference_rate_hz: float | None = None,
    *,
    magnitude_only: bool = False,
) -> PositionErrors:
    """Candidate minus reference at N positions.

    Parameters
    ----------
    pieces
        What runs in cascade.
    band_hz
        Shape [2], Hz.
    rate_hz
        The candidates' sample rate, Hz.
    reference_rate_hz
        That of digital references; None when they are analog.
    magnitude_only
        Leave phase and group delay out: zeros.
    """
    rates = (reference_rate_hz, rate_hz)
    f = _common_grid(pieces, band_hz, rates)
    curves = [
        tuple(_curves(c, f, r, not magnitude_only) for c, r in zip((p.reference, p.candidate), rates, strict=True))
        for p in pieces
    ]
    count = len(pieces[0].index)
    worst, at_hz = np.zeros((2, 3, count))
    for rows in _blocks(count, len(f)):
        found = [_product([(c[side], p.index[rows]) for c, p in zip(curves, pieces, strict=True)]) for side in (0, 1)]
        floor = np.abs(found[0][0]).max(axis=-1, keepdims=True) * 10.0 ** (-FLOOR_DB / 20.0)
        values = _errors(found[0], found[1], floor, magnitude_only)
        if not magnitude_only:
            values[PHASE] = np.unwrap(values[PHASE], period=360.0, axis=-1)
        own = _Block([(p.reference[p.index[rows]], p.candidate[p.index[rows]]) for p in pieces], rates, floor)
        for quantity in range(1 if magnitude_only else 3):
            worst[quantity, rows], at_hz[quantity, rows] = _refined(own, f, values[quantity], quantity)
    return PositionErrors(band_hz, worst, at_hz)


def position_levels_db(
    pieces: Sequence[Piece], f_hz: FloatArray, rate_hz: float, rows: IntArray
) -> tuple[FloatArray, FloatArray]:
    """Levels of analog reference and digital candidate in dB at the positions `rows` [R]; [R, F] each."""
    sides = []
    for side, rate in (("reference", None), ("candidate", rate_hz)):
        curves = [(_curves(getattr(p, side), f_hz, rate, False), p.index[rows]) for p in pieces]
        sides.append(20.0 * np.log10(np.maximum(np.abs(_product(curves)[0]), 1e-300)))
    return sides[0], sides[1]


@dataclass(frozen=True, eq=False)
class _Block:
    """Reference and candidate [n, S, 6] of every piece at some positions, to look between the grid's points."""

    pieces: list[tuple[FloatArray, FloatArray]]
    rates: tuple[float | None, float]
    floor: FloatArray

    def errors(self, f_hz: FloatArray, quantity: int) -> FloatArray:
        """One of the errors [n, F] at frequencies [n, F] of each position's own."""
        sides = []
        for side, rate in enumerate(self.rates):
            each = [_curves(piece[side], f_hz, rate, quantity == GROUP_DELAY) for piece in self.pieces]
            sides.append(_product([(curve, np.arange(len(f_hz))) for curve in each]))
        return np.asarray(_errors(sides[0], sides[1], self.floor, quantity == MAGNITUDE)[quantity])


def _common_grid(pieces: Sequence[Piece], band_hz: FloatArray, rates: tuple[float | None, float | None]) -> FloatArray:
    """Frequencies for all positions, with more of them around narrow sections of reference and candidate."""
    even = np.geomspace(band_hz[0], band_hz[1], _POINTS)
    sides = [(p.reference, rates[0]) for p in pieces] + [(p.candidate, rates[1]) for p in pieces]
    extra = [around_narrow(sections[..., k : k + 3], rate) for sections, rate in sides for k in (0, 3)]
    points = np.concatenate([even, *extra])
    return np.unique(points[(points >= band_hz[0]) & (points <= band_hz[1])])


def _blocks(count: int, points: int) -> Iterator[slice]:
    step = max(1, _BLOCK // points)
    return (slice(start, min(start + step, count)) for start in range(0, count, step))


def _product(curves: list[tuple[_Curves, IntArray]]) -> _Curves:
    """Response and group delay of the cascade, [n, F]: curves [M, F] and which of them each position has."""
    (h, delay), index = curves[0]
    h, delay = h[index], delay[index]
    for (more_h, more_delay), index in curves[1:]:
        h = h * more_h[index]
        delay = delay + more_delay[index]
    return h, delay


def _curves(c: FloatArray, f_hz: FloatArray, rate_hz: float | None, delay: bool) -> _Curves:
    """Response [M, F] and, where asked for, group delay in µs of cascades [M, S, 6]: analog ones without a rate."""
    return _analog(c[..., :3], c[..., 3:], f_hz, delay) if rate_hz is None else _digital(c, f_hz, rate_hz, delay)


def _analog(b: FloatArray, a: FloatArray, f_hz: FloatArray, wanted: bool) -> _Curves:
    """H(j2πf) [M, F] of `b`, `a` [M, S, 3] at `f_hz` [F] or [M, F], and the group delay in µs."""
    w = 2.0 * np.pi * f_hz
    shape = np.broadcast_shapes((len(b), 1), w.shape)
    h, delay = np.ones(shape, dtype=np.complex128), np.zeros(shape)
    for s in range(b.shape[1]):
        h *= polynomial(b[:, s], w) / polynomial(a[:, s], w)
        if wanted:
            delay += phase_slope(a[:, s], w) - phase_slope(b[:, s], w)
    return h, 1e6 * delay


def _digital(sos: FloatArray, f_hz: FloatArray, sample_rate_hz: float, wanted: bool) -> _Curves:
    """H(e^{jw}) [M, F] of `sos` [M, T, 6], and the group delay in µs.

    Both polynomials are turned by e^{jw}, which their ratio does not notice.
    """
    w = 2.0 * np.pi * f_hz / sample_rate_hz
    trig = (2.0 * np.sin(0.5 * w) ** 2, np.sin(w), np.cos(w))
    shape = np.broadcast_shapes((len(sos), 1), w.shape)
    h, delay = np.ones(shape, dtype=np.complex128), np.zeros(shape)
    for s in range(sos.shape[1]):
        b, a = (_turned(c, trig) for c in (sos[:, s, :3], sos[:, s, 3:]))
        h *= b / a
        if wanted:
            delay += _turned_slope(sos[:, s, 3:], a, trig) - _turned_slope(sos[:, s, :3], b, trig)
    return h, delay * (1e6 / sample_rate_hz)


def _turned(c: FloatArray, trig: tuple[FloatArray, FloatArray, FloatArray]) -> ComplexArray:
    """e^{jw}·C(e^{jw}) = R + jX: R = C(1) - (c0 + c2)·2·sin²(w/2), X = (c0 - c2)·sin w."""
    squared, sine, _ = trig
    total, plus, minus = (v[:, np.newaxis] for v in (c.sum(axis=-1), c[:, 0] + c[:, 2], c[:, 0] - c[:, 2]))
    value = np.empty(np.broadcast_shapes(total.shape, squared.shape), dtype=np.complex128)
    value.real, value.imag = total - plus * squared, minus * sine
    return value


def _turned_slope(c: FloatArray, value: ComplexArray, trig: tuple[FloatArray, FloatArray, FloatArray]) -> FloatArray:
    """d(arg)/dw of `_turned`."""
    _, sine, cosine = trig
    plus, minus = (v[:, np.newaxis] for v in (c[:, 0] + c[:, 2], c[:, 0] - c[:, 2]))
    power = value.real**2 + value.imag**2
    slope = value.real * (minus * cosine) + value.imag * (plus * sine)
    return np.divide(slope, power, out=np.zeros_like(power), where=power > 0.0)


def _errors(reference: _Curves, candidate: _Curves, floor: FloatArray, magnitude_only: bool) -> FloatArray:
    """Magnitude in dB, phase in degrees, group delay in µs, [3, n, F]; near-zero responses as in `error_curves`."""
    (h_a, delay_a), (h_d, delay_d) = reference, candidate
    size_a, size_d = np.abs(h_a), np.abs(h_d)
    magnitude = 20.0 * np.log10(np.maximum(size_d, floor) / np.maximum(size_a, floor))
    if magnitude_only:
        return magnitude[np.newaxis]
    out = np.stack([magnitude, np.degrees(np.angle(h_d * np.conj(h_a))), delay_d - delay_a])
    out[PHASE:, (size_a <= floor) | (size_d <= floor)] = 0.0
    return out


def _refined(own: _Block, f: FloatArray, values: FloatArray, quantity: int) -> tuple[FloatArray, FloatArray]:
    """The largest of each row of `values` [n, F] with its sign, between the grid points too, and its frequency."""
    modulus = np.abs(values)
    inner = np.pad(modulus, [(0, 0), (1, 1)], constant_values=-1.0)
    is_peak = (modulus >= inner[:, :-2]) & (modulus >= inner[:, 2:])
    ranked = np.argpartition(np.where(is_peak, modulus, -1.0), -_PEAKS, axis=-1)[:, -_PEAKS:]
    low, high = f[np.maximum(ranked - 1, 0)], f[np.minimum(ranked + 1, len(f) - 1)]
    steps = np.linspace(0.0, 1.0, _ZOOM_POINTS)
    large = float(modulus.max()) > _FOLDED  # phase is known to 360 degrees alone: continued from the grid's
    for _ in range(_ZOOMS):
        at = low[..., np.newaxis] + (high - low)[..., np.newaxis] * steps
        found = own.errors(at.reshape(len(at), -1), quantity).reshape(at.shape)
        if quantity == PHASE and large:
            near = np.stack([np.interp(row, f, value) for row, value in zip(at, values, strict=True)])
            found = found + 360.0 * np.round((near - found) / 360.0)
        best = np.argmax(np.abs(found), axis=-1)[..., np.newaxis]
        value, where = (np.take_along_axis(x, best, -1)[..., 0] for x in (found, at))
        step = (high - low) / (_ZOOM_POINTS - 1)
        low, high = np.maximum(low, where - step), np.minimum(high, where + step)
    winner = np.argmax(np.abs(value), axis=-1)[:, np.newaxis]
    return np.take_along_axis(value, winner, -1)[:, 0], np.take_along_axis(where, winner, -1)[:, 0]
