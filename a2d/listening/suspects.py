"""What else a device might be: the twin of another rate, of another channel, or nothing at all."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import replace

import numpy as np

from a2d.arrays import ComplexArray, FloatArray
from a2d.digital.twin import Twin
from a2d.listening.markers import USUAL_RATES_HZ

BYPASSED = "bypassed: no filter at all"
SWAPPED = "swapped channels"


def wrong_rates(twins: Mapping[float, Twin], device_rate_hz: float, f_hz: FloatArray) -> dict[str, ComplexArray]:
    """Responses at `f_hz` [F] of coefficients made for other rates when they run at `device_rate_hz`."""
    return {
        f"wrong rate: coefficients made for {rate:g} Hz": replace(twin, sample_rate_hz=device_rate_hz).response(f_hz)
        for rate, twin in twins.items()
        if rate != device_rate_hz
    }


def rates_to_try(stated: Iterable[float]) -> tuple[float, ...]:
    """The design's rates and the usual ones."""
    return tuple(dict.fromkeys([*stated, *USUAL_RATES_HZ]))


def bypassed(f_hz: FloatArray) -> dict[str, ComplexArray]:
    """A flat response."""
    return {BYPASSED: np.ones(f_hz.size, dtype=np.complex128)}
