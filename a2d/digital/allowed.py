"""What the error of a twin may be, as the methods that choose and fit see it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from a2d.arrays import FloatArray


@dataclass(frozen=True, eq=False)
class Allowed:
    """Limits of the error twin minus analog on a grid.

    Parameters
    ----------
    f_hz
        Shape [G], Hz, rising.
    lower_db, upper_db
        Shape [G]: the magnitude error lies between; infinite where there is no limit.
    phase_deg, group_delay_us
        The largest modulus of the other errors; None where there is no limit.
    """

    f_hz: FloatArray
    lower_db: FloatArray
    upper_db: FloatArray
    phase_deg: float | None = None
    group_delay_us: float | None = None

    def share(self, magnitude_db: FloatArray, phase_deg: FloatArray, group_delay_us: FloatArray) -> FloatArray:
        """How much of what is allowed the errors [..., G] take, at their worst; at most 1 is within; shape [...]."""
        shares = [np.max(_of_interval(magnitude_db, self.lower_db, self.upper_db), axis=-1)]
        for error, limit in ((phase_deg, self.phase_deg), (group_delay_us, self.group_delay_us)):
            if limit is not None:
                shares.append(np.max(np.abs(error), axis=-1) / max(limit, 1e-30))
        return np.asarray(np.max(shares, axis=0))

    @property
    def tightest_db(self) -> float:
        """The smallest magnitude limit on the grid; infinite where there is none."""
        return float(np.min(np.minimum(self.upper_db, -self.lower_db)))

    @property
    def weight(self) -> FloatArray:
        """Factors on the magnitude error that make every limit `tightest_db`, with their frequencies: shape [2, G]."""
        nearest = np.minimum(self.upper_db, -self.lower_db)
        if not np.any(np.isfinite(nearest) & (nearest > 0.0)):
            return np.stack([self.f_hz, np.ones_like(self.f_hz)])
        with np.errstate(divide="ignore", invalid="ignore"):
            factor = np.where(np.isfinite(nearest) & (nearest > 0.0), self.tightest_db / nearest, LEAST_WEIGHT)
        return np.stack([self.f_hz, np.clip(factor, LEAST_WEIGHT, 1.0)])


LEAST_WEIGHT = 1e-3
"""The weight of an error where there is no limit."""


def _of_interval(error: FloatArray, lower: FloatArray, upper: FloatArray) -> FloatArray:
    """0 in the middle of an interval, 1 at its ends, more beyond; an end at infinity is 1 dB past the other's half."""
    low = np.where(np.isfinite(lower), lower, np.minimum(upper, 0.0) - 1e3)
    high = np.where(np.isfinite(upper), upper, np.maximum(lower, 0.0) + 1e3)
    low, high = np.where(np.isfinite(low), low, -1e3), np.where(np.isfinite(high), high, 1e3)
    half = np.maximum(0.5 * (high - low), 1e-30)
    return np.asarray(np.abs(error - 0.5 * (high + low)) / half)


def even(f_hz: FloatArray, limit_db: float) -> Allowed:
    """The same limit in dB, either way, at every frequency of `f_hz` [G]."""
    limit = np.full_like(f_hz, limit_db)
    return Allowed(f_hz, -limit, limit)
