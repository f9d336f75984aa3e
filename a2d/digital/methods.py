"""The conversion methods by name, all with one signature.

    method(b, a, sample_rate_hz, match_hz, band_hz) -> sos

`b`, `a` [..., 3]; `sample_rate_hz`, `match_hz` [...] and `band_hz` [..., 2] broadcast against their leading axes;
`sos` [..., 6]. A method that has no solution for a section raises `ConversionError` and names another method.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import TypeAlias

from a2d.arrays import FloatArray
from a2d.digital.bilinear import bilinear
from a2d.digital.magnitude_matched import magnitude_matched
from a2d.digital.minimax import minimax

Method: TypeAlias = Callable[[FloatArray, FloatArray, FloatArray, FloatArray, FloatArray], FloatArray]

METHODS: dict[str, Method] = {"bilinear": bilinear, "magnitude_matched": magnitude_matched, "minimax": minimax}

EXACT_AT_MATCH = frozenset({"bilinear", "magnitude_matched"})
"""The methods that are exact at the match frequency, which therefore has to lie below half the sample rate."""
