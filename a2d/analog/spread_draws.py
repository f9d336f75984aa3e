"""Seeded draws of units, and what becomes of the response: bands, extremes, how far units differ from nominal."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from a2d import checks
from a2d.analog.spread import SpreadModel
from a2d.arrays import FloatArray

PERCENTILES = (5.0, 50.0, 95.0)
SIGMAS = 3.0  # standard deviations within the tolerance of a normal distribution
_BLOCK = 1000  # units at a time


@dataclass(frozen=True, eq=False)
class SpreadResult:
    """What the drawn units do.

    Attributes
    ----------
    f_hz, nominal_db
        Shape [F].
    percentiles_db
        Shape [3, F]: level at the percentiles 5, 50 and 95.
    lowest_db, highest_db
        Shape [F]: the extremes.
    unit_worst_db
        Shape [D]: for each unit the largest |difference from nominal| at any frequency.
    deviation_db
        Shape [F]: the standard deviation of the level.
    """

    f_hz: FloatArray
    nominal_db: FloatArray
    percentiles_db: FloatArray
    lowest_db: FloatArray
    highest_db: FloatArray
    unit_worst_db: FloatArray
    deviation_db: FloatArray

    def within_db(self, share: float) -> float:
        """By how much the given share (0 to 1) of the units differs from nominal at most."""
        return float(np.quantile(self.unit_worst_db, share))


def draw_factors(model: SpreadModel, units: int, seed: int) -> FloatArray:
    """Part values of `units` units relative to nominal, [D, n]; the same seed gives the same units."""
    count = checks.whole("units", units, 1, 10_000_000)
    generator = np.random.default_rng(checks.whole("seed", seed, 0, 2**63 - 1))
    firsts = {part.group: part.distribution for part in reversed(model.parts)}
    shares = np.stack([DISTRIBUTIONS[firsts[g]](generator, count) for g in range(model.groups)], axis=-1)
    groups = [part.group for part in model.parts]
    return np.asarray(1.0 + model.tolerances * shares[:, groups])


def _uniform(generator: np.random.Generator, count: int) -> FloatArray:
    return generator.uniform(-1.0, 1.0, count)


def _normal(generator: np.random.Generator, count: int) -> FloatArray:
    """The tolerance is three standard deviations; what lies beyond is drawn again, as it would be sorted out."""
    drawn = generator.standard_normal(count)
    while np.any(beyond := np.abs(drawn) > SIGMAS):
        drawn[beyond] = generator.standard_normal(int(beyond.sum()))
    return drawn / SIGMAS


DISTRIBUTIONS: dict[str, Callable[[np.random.Generator, int], FloatArray]] = {"uniform": _uniform, "normal": _normal}
"""From a generator and a number to deviations as shares of the tolerance, -1 to 1."""

_CUT = 2.0 * SIGMAS * np.exp(-0.5 * SIGMAS**2) / np.sqrt(2.0 * np.pi) / 0.9973002039367398
DEVIATIONS = {"uniform": 1.0 / np.sqrt(3.0), "normal": float(np.sqrt(1.0 - _CUT)) / SIGMAS}
"""Standard deviation of each distribution as a share of the tolerance."""


def run_spread(
    model: SpreadModel, units: int, seed: int, progress: Callable[[int], None] | None = None
) -> SpreadResult:
    """Draw units and work out what their responses do.

    Parameters
    ----------
    model
        The design's spread.
    units, seed
        How many units, and which.
    progress
        Called with the number of units done, now and then.
    """
    factors = draw_factors(model, units, seed)
    nominal = model.nominal_db()
    levels = np.empty((units, len(model.f_hz)), dtype=np.float32)  # 10,000 x 500 in 20 MB; dB to 1e-5
    unit_worst, total, squares = np.empty(units), np.zeros(len(nominal)), np.zeros(len(nominal))
    for start in range(0, units, _BLOCK):
        rows = slice(start, min(start + _BLOCK, units))
        difference = model.level_db(factors[rows]) - nominal
        levels[rows] = difference
        unit_worst[rows] = np.abs(difference).max(axis=-1)
        total += difference.sum(axis=0)
        squares += (difference**2).sum(axis=0)
        if progress is not None:
            progress(rows.stop)
    low, high = levels.min(axis=0), levels.max(axis=0)
    percentiles = _percentiles(levels)
    variance = np.maximum(squares / units - (total / units) ** 2, 0.0)
    return SpreadResult(
        f_hz=model.f_hz,
        nominal_db=nominal,
        percentiles_db=nominal + percentiles,
        lowest_db=nominal + low,
        highest_db=nominal + high,
        unit_worst_db=unit_worst,
        deviation_db=np.sqrt(variance),
    )


def _percentiles(levels: npt.NDArray[np.float32]) -> FloatArray:
    """The percentiles over the units, [3, F], interpolated between neighbouring units; `levels` is reordered."""
    places = np.array(PERCENTILES) / 100.0 * (len(levels) - 1)
    low = np.floor(places).astype(np.int64)
    high = np.minimum(low + 1, len(levels) - 1)
    columns = np.ascontiguousarray(levels.T)
    columns.partition(np.unique([*low, *high]), axis=-1)
    part = (places - low)[:, np.newaxis]
    return np.asarray(columns[:, low].T * (1.0 - part) + columns[:, high].T * part)
