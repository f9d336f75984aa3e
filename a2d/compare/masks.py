"""Masks: limits of the twin's own response, out of standards; and tables of limits of its error."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from a2d.analog.chain import AnalogChain
from a2d.arrays import FloatArray, rising
from a2d.compare.errors import band_of
from a2d.compare.grid import frequency_grid
from a2d.compare.standards import disc_replay, fractional_octave, weighting
from a2d.compare.verdict import Breach
from a2d.design.model import Limits
from a2d.digital.allowed import Allowed
from a2d.digital.twin import Twin

Interval = tuple[FloatArray, FloatArray]

POINTS_AN_OCTAVE = 24


@dataclass(frozen=True)
class Mask:
    """Limits in dB of a response.

    Attributes
    ----------
    name, source
        As the design file calls it, and where it stands.
    goal_db
        Hz to the level that is wanted, dB.
    interval_db
        Hz to the least and greatest allowed difference from it, dB.
    range_hz
        Where there are limits.
    reference_hz
        The response counts relative to its own level here; None where it counts as it is.
    """

    name: str
    source: str
    goal_db: Callable[[FloatArray], FloatArray]
    interval_db: Callable[[FloatArray], Interval]
    range_hz: tuple[float, float]
    reference_hz: float | None


@dataclass(frozen=True)
class MaskBreach(Breach):
    """A mask or table that is broken; `limit` is the end that is passed, `worst` the difference from the goal."""

    lower: float
    upper: float

    def __str__(self) -> str:
        return (
            f"{self.what}: {self.worst:+.4g} {self.unit} at {self.at_hz:.5g} Hz "
            f"(allowed {self.lower:+.4g} to {self.upper:+.4g} {self.unit})"
        )


def _weighting(limits: Limits, name: str) -> Mask:
    curve = weighting.a_weighting_db if name.startswith("a_") else weighting.c_weighting_db
    grade = int(name[-1])
    return Mask(
        name,
        "IEC 61672-1:2013, Table 3 and Annex E",
        curve,
        lambda f: weighting.acceptance_limits(f, grade),
        (float(weighting.EXACT_HZ[0]), float(weighting.EXACT_HZ[-1])),
        weighting.REFERENCE_HZ,
    )


def _band_filter(limits: Limits, name: str) -> Mask:
    midband, bandwidth, grade = float(limits.midband or 0.0), limits.bandwidth or 1, int(name[-1])

    def interval(f: FloatArray) -> Interval:
        least, greatest = fractional_octave.attenuation_limits(f, midband, bandwidth, grade)
        return -greatest, -least

    return Mask(
        f"{name} (1/{bandwidth} octave at {midband:g} Hz)",
        "IEC 61260-1:2014, Table 1",
        np.zeros_like,
        interval,
        (midband / 20.0, midband * 20.0),
        None,
    )


def _disc(limits: Limits, name: str) -> Mask:
    tolerance = float(limits.magnitude or 0.0)
    return Mask(
        name,
        "IEC 60098",
        lambda f: disc_replay.replay_db(f, amended=name.endswith("amended")),
        lambda f: (np.full_like(f, -tolerance), np.full_like(f, tolerance)),
        (20.0, 20_000.0),
        disc_replay.REFERENCE_HZ,
    )


MASKS: dict[str, Callable[[Limits, str], Mask]] = {
    "a_weighting_class_1": _weighting,
    "a_weighting_class_2": _weighting,
    "c_weighting_class_1": _weighting,
    "c_weighting_class_2": _weighting,
    "fractional_octave_class_1": _band_filter,
    "fractional_octave_class_2": _band_filter,
    "disc_replay": _disc,
    "disc_replay_amended": _disc,
}


def mask_of(limits: Limits) -> Mask | None:
    """The mask that the limits name."""
    return None if limits.mask is None else MASKS[limits.mask](limits, limits.mask)


def mask_grid(mask: Mask, chain: AnalogChain, twin: Twin, top_hz: float) -> FloatArray:
    """Where a mask is looked at: evenly over its range up to `top_hz`, at its exact tenth-decades, near resonances."""
    low, high = mask.range_hz[0], min(mask.range_hz[1], top_hz)
    tenths = 10.0 ** (0.1 * np.arange(np.ceil(10.0 * np.log10(low)), np.floor(10.0 * np.log10(high)) + 0.5))
    centre = mask.reference_hz or np.sqrt(mask.range_hz[0] * mask.range_hz[1])
    even = np.geomspace(low, high, int(POINTS_AN_OCTAVE * np.log2(high / low)) + 2)
    points = np.concatenate([even, tenths, [centre], near_resonances(chain, twin, low, high)])
    return rising(points, low, high)


def near_resonances(chain: AnalogChain, twin: Twin, low_hz: float, high_hz: float) -> FloatArray:
    """A grid that misses no narrow section of either."""
    return frequency_grid(chain.b, chain.a, np.array([low_hz, high_hz]), twin.sos, twin.sample_rate_hz)


def judge_response(chain: AnalogChain, twin: Twin, limits: Limits | None) -> tuple[MaskBreach, ...]:
    """The mask and the table that a twin breaks: the mask by its own response, the table by its error."""
    if limits is None:
        return ()
    top = float(band_of(twin.sample_rate_hz, limits.band)[1])
    found = []
    mask = mask_of(limits)
    if mask is not None:
        f_hz = mask_grid(mask, chain, twin, top)
        found.append(_worst_breach(mask.name, f_hz, _difference(mask, twin, f_hz), mask.interval_db(f_hz)))
    if limits.table:
        f_hz = near_resonances(chain, twin, float(limits.table[0][0]), min(float(limits.table[-1][0]), top))
        error = 20.0 * np.log10(np.abs(twin.response(f_hz)) / np.abs(chain.response(f_hz)))
        found.append(_worst_breach("magnitude error against the table", f_hz, error, table_interval(limits, f_hz)))
    return tuple(breach for breach in found if breach is not None)


def _difference(mask: Mask, source: Twin | AnalogChain, f_hz: FloatArray) -> FloatArray:
    """The response less the mask's goal, dB."""
    level = _level_db(source, f_hz) - mask.goal_db(f_hz)
    if mask.reference_hz is None:
        return np.asarray(level)
    return np.asarray(level - _level_db(source, np.array([mask.reference_hz]))[0])


def _level_db(source: Twin | AnalogChain, f_hz: FloatArray) -> FloatArray:
    return np.asarray(20.0 * np.log10(np.maximum(np.abs(source.response(f_hz)), 1e-30)))


def _worst_breach(what: str, f_hz: FloatArray, value: FloatArray, interval: Interval) -> MaskBreach | None:
    """The point that lies farthest outside, if any does."""
    lower, upper = interval
    outside = np.maximum(value - upper, lower - value)
    k = int(np.argmax(outside))
    if outside[k] <= 0.0:
        return None
    low, high = float(lower[k]), float(upper[k])
    return MaskBreach(what, "dB", high if value[k] > high else low, float(value[k]), float(f_hz[k]), low, high)


def table_interval(limits: Limits, f_hz: FloatArray) -> Interval:
    """The table's lower and upper limits at `f_hz`, straight over the logarithm of frequency; none outside it."""
    rows = np.array([[float(v) for v in row] for row in limits.table])
    x, at = np.log(f_hz), np.log(rows[:, 0])
    inside = (f_hz >= rows[0, 0]) & (f_hz <= rows[-1, 0])
    lower, upper = (np.interp(x, at, rows[:, i]) for i in (1, 2))
    return np.where(inside, lower, -np.inf), np.where(inside, upper, np.inf)


def allowed_of(limits: Limits | None, chain: AnalogChain, sample_rate_hz: float) -> Allowed | None:
    """The limits as intervals of the error twin minus analog, for the methods that choose and fit; None without any.

    A mask leaves the error what the analog response has not taken of it already.
    """
    if limits is None or not (limits.magnitude or limits.phase or limits.group_delay or limits.mask or limits.table):
        return None
    band = band_of(sample_rate_hz, limits.band)
    f_hz = frequency_grid(chain.b, chain.a, band)
    lower, upper = np.full_like(f_hz, -np.inf), np.full_like(f_hz, np.inf)
    mask = mask_of(limits)
    intervals = []
    if mask is not None:
        taken, (low, high) = _difference(mask, chain, f_hz), mask.interval_db(f_hz)
        intervals.append((low - taken, high - taken))
    if limits.table:
        intervals.append(table_interval(limits, f_hz))
    if limits.magnitude is not None:
        intervals.append((np.full_like(f_hz, -limits.magnitude), np.full_like(f_hz, limits.magnitude)))
    for low, high in intervals:
        lower, upper = np.maximum(lower, low), np.minimum(upper, high)
    delay_us = None if limits.group_delay is None else 1e6 * float(limits.group_delay)
    phase = None if limits.phase is None else float(limits.phase)
    return Allowed(f_hz, lower, upper, phase, delay_us)
