"""How a potentiometer's track is divided at each position of its shaft."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from a2d.arrays import FloatArray
from a2d.design.network import Potentiometer


def track_fraction(pot: Potentiometer, position: FloatArray) -> FloatArray:
    """The part of the track between the first end and the wiper, 0 to 1, at `position` [...] (0 to 1)."""
    return TAPERS[pot.taper](pot, position)


def _linear(pot: Potentiometer, position: FloatArray) -> FloatArray:
    del pot
    return position


def _logarithmic(pot: Potentiometer, position: FloatArray) -> FloatArray:
    """(k^p - 1)/(k - 1); at p = 1/2 that is 1/(1 + sqrt(k)), so k = (1/mid - 1)².

    Both are expm1 of a logarithm, so that the end of the track is exactly 1: a rounding error more would leave a
    resistance below zero between wiper and end.
    """
    log_ratio = 2.0 * np.log(1.0 / _mid(pot) - 1.0)
    return np.asarray(np.expm1(position * log_ratio) / np.expm1(log_ratio))


def _two_slope(pot: Potentiometer, position: FloatArray) -> FloatArray:
    return np.asarray(np.interp(position, [0.0, 0.5, 1.0], [0.0, _mid(pot), 1.0]))


def _table(pot: Potentiometer, position: FloatArray) -> FloatArray:
    points = np.asarray(pot.table, dtype=np.float64)
    return np.asarray(np.interp(position, points[:, 0], points[:, 1]))


def _mid(pot: Potentiometer) -> float:
    assert pot.mid is not None  # the struct's own check
    return float(pot.mid)


# The logarithmic law with mid above 1/2 is its own mirror image: 1 - f(1 - p) with 1 - mid in place of mid.
TAPERS: dict[str, Callable[[Potentiometer, FloatArray], FloatArray]] = {
    "linear": _linear,
    "logarithmic": _logarithmic,
    "reverse_logarithmic": _logarithmic,
    "two_slope": _two_slope,
    "table": _table,
}
