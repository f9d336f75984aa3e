"""How near to the best a section is: its alternations, and what no section of its shape can do better than."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from a2d.analog import response as analog
from a2d.arrays import BoolArray, FloatArray
from a2d.digital import response as digital
from a2d.digital.rational.exchange import alternation
from a2d.digital.rational.setting import Setting, axis_tangent, free_zeros, frequencies
from a2d.digital.shapes import Shape, shape_of

FINER = 8
"""Points of the certificate's grid for one of the fit's."""
NEPER_DB = 20.0 / np.log(10.0)
KEPT = 1e-9
"""How near, in v, a zero has to be to where the analog section has it for it to count as kept."""


@dataclass(frozen=True)
class Certificate:
    """What is proved of one section.

    Attributes
    ----------
    quantity, unit
        `magnitude`, `dB`; `phase`, `deg` for an all-pass section.
    band_hz
        Where the error was looked at, Hz.
    worst, at_hz
        The error of largest modulus, with its sign, and where.
    alternations
        Extrema of alternating sign that are at least as large as `bound`.
    needed
        Alternations that prove a bound: one more than the section has free numbers.
    bound
        No section with the same zeros at 0 Hz and on the axis has a smaller largest error in the band (de la Vallée
        Poussin); 0 where the error alternates too seldom to tell.
    """

    quantity: str
    unit: str
    band_hz: tuple[float, float]
    worst: float
    at_hz: float
    alternations: int
    needed: int
    bound: float

    @property
    def gap(self) -> float | None:
        """By what part the error lies above the bound; None where nothing is proved."""
        return abs(self.worst) / self.bound - 1.0 if self.bound > 0.0 else None


def certify(
    sos: FloatArray, b: FloatArray, a: FloatArray, sample_rate_hz: float, band_hz: FloatArray
) -> tuple[Certificate, ...]:
    """The certificate of each section `sos` [S, 6], by whatever method it was made, against `b`, `a` [S, 3].

    A section that resonates below the band is looked at from half its lowest root's frequency on, as it is fitted.
    """
    shape = shape_of(b, a)
    rate = np.full(len(b), float(sample_rate_hz))
    every = Setting(shape, rate, np.broadcast_to(np.asarray(band_hz), (len(b), 2)), 2, 2)
    f_hz = _clear_of_zeros(_finer(frequencies(every)), shape)
    in_phase = shape.allpass
    error = _errors(sos, b, a, rate, f_hz, in_phase)
    needed, silent = _needed(sos, shape, rate), _silent_at_half_rate(sos, shape, rate)
    return tuple(_one(error[s], f_hz[s], bool(in_phase[s]), int(needed[s]), bool(silent[s])) for s in range(len(b)))


def _one(error: FloatArray, f_hz: FloatArray, in_phase: bool, needed: int, silent: bool) -> Certificate:
    worst = int(np.argmax(np.abs(error)))
    count, bound = _proof(error, needed, silent)
    band = (float(f_hz[0]), float(f_hz[-1]))
    quantity, unit = ("phase", "deg") if in_phase else ("magnitude", "dB")
    return Certificate(quantity, unit, band, _summit(error, worst), float(f_hz[worst]), count, needed, bound)


def _proof(error: FloatArray, needed: int, silent: bool) -> tuple[int, float]:
    """Alternations and the bound that they give.

    A twin with a zero at z = -1 can nowhere be lower than there, so half the rate counts as an extremum with the sign
    of too little: with one alternation less, the last of them of too much, no other ratio does better either.
    """
    seen = alternation(error[np.newaxis], needed)
    count, bound = int(seen.extrema[0]), float(seen.bound[0])
    if bound == 0.0 and silent:
        seen = alternation(error[np.newaxis], needed - 1)
        if seen.bound[0] > 0.0 and error[seen.points[0, -1]] > 0.0:
            return int(seen.extrema[0]) + 1, float(seen.bound[0])
    return count, bound


def _summit(error: FloatArray, at: int) -> float:
    """The extremum near grid point `at`, by the parabola through it and its neighbours, no smaller than there."""
    if at in (0, len(error) - 1):
        return float(error[at])
    left, middle, right = error[at - 1 : at + 2]
    bend = left - 2.0 * middle + right
    rise = -((right - left) ** 2) / (8.0 * bend) if bend * middle < 0.0 else 0.0
    return float(middle + np.clip(rise, -0.1 * abs(middle), 0.1 * abs(middle)))


def _errors(
    sos: FloatArray, b: FloatArray, a: FloatArray, rate: FloatArray, f_hz: FloatArray, in_phase: BoolArray
) -> FloatArray:
    """Magnitude error in dB, or phase error in degrees where `in_phase` [S]; shape [S, G]."""
    ratio = digital.section_response(sos, f_hz, rate) / analog.section_response(b, a, f_hz)
    with np.errstate(divide="ignore"):
        magnitude = NEPER_DB * np.log(np.maximum(np.abs(ratio), 1e-300))
    return np.where(in_phase[:, np.newaxis], np.degrees(np.unwrap(np.angle(ratio), axis=-1)), magnitude)


def _finer(f_hz: FloatArray) -> FloatArray:
    part = np.arange(FINER) / FINER
    between = f_hz[:, :-1, np.newaxis] + np.diff(f_hz, axis=1)[..., np.newaxis] * part
    return np.concatenate([between.reshape(len(f_hz), -1), f_hz[:, -1:]], axis=1)


def _clear_of_zeros(f_hz: FloatArray, shape: Shape) -> FloatArray:
    """The grid with points on a zero on the axis moved off it, where the ratio of two zeros says nothing."""
    lead = np.where(shape.b[:, 0] == 0.0, 1.0, shape.b[:, 0])
    zero = np.where(shape.notch, np.sqrt(np.abs(shape.b[:, 2] / lead)) / (2.0 * np.pi), -1.0)[:, np.newaxis]
    return np.where(np.abs(f_hz - zero) < 1e-5 * np.abs(zero), zero * (1.0 + 1e-5), f_hz)


def _needed(sos: FloatArray, shape: Shape, rate: FloatArray) -> FloatArray:
    """Alternations that prove a bound for each section, shape [S]."""
    poles = np.where(shape.second_order, 2, np.where(shape.first_order, 1, 0))
    zeros = np.where(_keeps_zeros(sos, shape, rate), free_zeros(shape, rate), poles)
    return np.asarray(np.where(shape.allpass, poles + 1, zeros + poles + 2))


def _silent_at_half_rate(sos: FloatArray, shape: Shape, rate: FloatArray) -> BoolArray:
    """Whether the twin has a zero at z = -1 that it was free to put elsewhere, shape [S]."""
    d = np.where(shape.second_order[:, np.newaxis], sos[:, :3], sos[:, :3] * np.array([1.0, 1.0, 0.0]))
    there = np.abs(d[:, 0] - d[:, 1] + d[:, 2]) <= 4.0 * np.finfo(float).eps * np.abs(d).sum(axis=1)
    return np.asarray(there & (free_zeros(shape, rate) > 0) & ~shape.allpass)


def _keeps_zeros(sos: FloatArray, shape: Shape, rate: FloatArray) -> BoolArray:
    """Whether the twin has the zeros at 0 Hz and on the axis where the analog section has them, shape [S]."""
    d = sos[:, :3]
    size = np.abs(d).max(axis=1)
    v2, v1, v0 = (d[:, 0] - d[:, 1] + d[:, 2]) / 4.0, (d[:, 0] - d[:, 2]) / 2.0, d.sum(axis=1) / 4.0
    at_zero = np.where(shape.b[:, 2] != 0.0, 0, np.where(shape.b[:, 1] != 0.0, 1, 2))
    first = (at_zero < 1) | (np.abs(v0) <= KEPT * size)
    second = (at_zero < 2) | ~shape.second_order | (np.abs(v1) <= KEPT * size)
    tau = axis_tangent(shape, rate)
    pair = shape.notch & np.isfinite(tau)
    place = np.where(pair, np.abs(v0 - np.where(pair, tau, 0.0) * v2), 0.0)
    return np.asarray(first & second & (~pair | ((place <= KEPT * size) & (np.abs(v1) <= KEPT * size))))
