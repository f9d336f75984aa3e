"""The fewest positions whose linear interpolation stays within an error, and where they have to stand."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from a2d.arrays import FloatArray
from a2d.digital.response import chain_response
from a2d.errors import ParameterError

_POINTS = 160  # frequencies; the table found is judged afterwards with a finer search
_SAMPLES = 7  # places looked at inside a cell


@dataclass(frozen=True, eq=False)
class Dense:
    """Twins close together along one control, at one rate, for several settings of the other controls.

    Attributes
    ----------
    sos
        Shape [C, D, T, 6]: C settings of the others, D travels.
    level_db
        Shape [C, D, F].
    f_hz
        Shape [F].
    rate_hz
        Hz.
    """

    sos: FloatArray
    level_db: FloatArray
    f_hz: FloatArray
    rate_hz: float

    @classmethod
    def of(cls, sos: FloatArray, exact: FloatArray, band_hz: FloatArray, rate_hz: float) -> Dense:
        """The table's twins with the levels that exact ones have over the band; [C, D, T, 6] each."""
        f = np.geomspace(band_hz[0], band_hz[1], _POINTS)
        return cls(sos, _level_db(exact, f, rate_hz), f, rate_hz)

    def cell_error_db(self, scales: FloatArray, first: int, last: int) -> float:
        """The largest error when everything between the travels `first` and `last` is interpolated."""
        inside = np.unique(np.linspace(first, last, _SAMPLES + 2).round().astype(np.int64))[1:-1]
        if len(inside) == 0:
            return 0.0
        part = ((scales[inside] - scales[first]) / (scales[last] - scales[first]))[:, np.newaxis, np.newaxis]
        low, high = self.sos[:, first, np.newaxis], self.sos[:, last, np.newaxis]
        level = _level_db(low + (high - low) * part, self.f_hz, self.rate_hz)
        return float(np.max(np.abs(level - self.level_db[:, inside])))


def _level_db(sos: FloatArray, f_hz: FloatArray, rate_hz: float) -> FloatArray:
    return np.asarray(20.0 * np.log10(np.maximum(np.abs(chain_response(sos, f_hz, rate_hz)), 1e-300)))


def smallest_travels(dense: list[list[Dense]], scales: FloatArray, limit_db: float) -> list[int]:
    """Indices into the D travels: each cell reaches as far as its error allows.

    Parameters
    ----------
    dense
        For each rate one `Dense` an entry of the design; the errors of the entries add.
    scales
        Shape [D]: the control's scale at the travels.
    limit_db
        dB.

    Notes
    -----
    A cell inside another has the smaller error, so taking the furthest reach each time gives the fewest cells.

    Raises
    ------
    ParameterError
        Even neighbouring travels are too far apart.
    """
    chosen = [0]
    while chosen[-1] < len(scales) - 1:
        reach = _reach(dense, scales, chosen[-1], limit_db)
        if reach <= chosen[-1]:
            raise ParameterError(
                f"no table of up to {len(scales)} positions keeps the error of interpolation below {limit_db:g} dB "
                f"(near {scales[chosen[-1]]:.6g}; allow more, or end the travel before it)"
            )
        chosen.append(reach)
    return chosen


def _reach(dense: list[list[Dense]], scales: FloatArray, first: int, limit_db: float) -> int:
    """The furthest travel to which the error stays within the limit, by doubling and halving."""

    def fits(last: int) -> bool:
        return max(sum(d.cell_error_db(scales, first, last) for d in rate) for rate in dense) <= limit_db

    top = len(scales) - 1
    good, step = first + 1, 1
    while good < top and fits(min(good + step, top)):
        good = min(good + step, top)
        step *= 2
    bad = min(good + step, top + 1)
    while bad - good > 1:
        middle = (good + bad) // 2
        good, bad = (middle, bad) if fits(middle) else (good, middle)
    return good
