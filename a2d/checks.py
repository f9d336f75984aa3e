"""One validator for each sort of number, called at the boundary; messages give name, value and allowed range."""

from __future__ import annotations

import math

import numpy as np

from a2d.arrays import ArrayLike, FloatArray
from a2d.errors import ParameterError


def finite(name: str, value: ArrayLike) -> FloatArray:
    """`value` as float64, or an error when any element is no real number, NaN or infinite."""
    try:
        if np.iscomplexobj(value):
            raise TypeError
        array = np.asarray(value, dtype=np.float64)
    except (TypeError, ValueError):
        raise ParameterError(f"{name} is not a real number or an array of them ({value!r})") from None
    if not np.all(np.isfinite(array)):
        raise ParameterError(f"{name} is not a finite number ({_shown(array)})")
    return array


def positive(name: str, value: ArrayLike, unit: str = "") -> FloatArray:
    """`value` as float64, or an error when any element is not above zero."""
    array = finite(name, value)
    if np.any(array <= 0.0):
        raise ParameterError(f"{name} must be above zero ({_shown(array)}{_spaced(unit)})")
    return array


def between(name: str, value: ArrayLike, low: float, high: float, unit: str = "") -> FloatArray:
    """`value` as float64, or an error when any element is outside `low` to `high`, both included."""
    array = finite(name, value)
    outside = (array < low) | (array > high)
    if np.any(outside):
        worst = _shown(array if array.ndim == 0 else array[outside])
        raise ParameterError(f"{name} must lie from {low:g} to {high:g}{_spaced(unit)} ({worst}{_spaced(unit)})")
    return array


def whole(name: str, value: int, low: int, high: int) -> int:
    """`value`, or an error when it is not a whole number from `low` to `high`."""
    if isinstance(value, bool) or not isinstance(value, (int, np.integer)) or not low <= value <= high:
        raise ParameterError(f"{name} must be a whole number from {low} to {high} ({value!r})")
    return int(value)


def below_half_rate(name: str, frequency_hz: ArrayLike, sample_rate_hz: ArrayLike, remedy: str = "") -> None:
    """Refuse frequencies at or above half the sample rate; the message ends with what can be done."""
    frequency, rate = np.broadcast_arrays(positive(name, frequency_hz, "Hz"), positive("sample rate", sample_rate_hz))
    bad = frequency >= rate / 2.0
    if np.any(bad):
        first = tuple(np.argwhere(bad)[0])
        raise ParameterError(
            f"{name} must lie below half the sample rate "
            f"({frequency[first]:g} Hz at {rate[first]:g} Hz, allowed below {rate[first] / 2:g} Hz)"
            + (f"; {remedy}" if remedy else "")
        )


def _shown(array: FloatArray) -> str:
    if array.ndim == 0:
        return f"{float(array):g}"
    bad = array[~np.isfinite(array)]
    value = float(bad[0]) if bad.size else float(array.min())
    return f"{value:g} in an array" if math.isfinite(value) else f"{value}"


def _spaced(unit: str) -> str:
    return f" {unit}" if unit else ""
