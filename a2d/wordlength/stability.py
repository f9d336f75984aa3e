"""Whether rounded sections are stable, and by how much."""

from __future__ import annotations

import numpy as np

from a2d.arrays import BoolArray, FloatArray


def is_stable(values: FloatArray, structure: str) -> BoolArray:
    """Whether all poles lie inside the unit circle; `values` [..., 5] of the structure -> [...].

    |a2| < 1 and |a1| < 1 + a2 (the stability triangle, e.g. Jackson, Digital Filters and Signal Processing, section
    4.6), written in each structure's own values, which are exact here: no rounding can turn the verdict.
    """
    a1, a2 = values[..., 3], values[..., 4]
    if structure == "delta":
        return (a2 > 0.0) & (a2 < a1) & (4.0 - 2.0 * a1 + a2 > 0.0) & (a1 - a2 < 2.0)
    return (np.abs(a2) < 1.0) & (np.abs(a1) < 1.0 + a2)


def margin_to_circle(sos: FloatArray) -> FloatArray:
    """1 - |p| of the outermost pole of each section `sos` [..., 6]; not above zero when it is unstable. Shape [...].

    For a complex pair |p|² = a2, and 1 - sqrt(a2) = (1 - a2)/(1 + sqrt(a2)) loses no digits close to the circle; for
    real poles |p| = (|a1| + sqrt(a1² - 4·a2))/2.
    """
    a1, a2 = sos[..., 4], sos[..., 5]
    under_root = a1 * a1 - 4.0 * a2
    pair = (1.0 - a2) / (1.0 + np.sqrt(np.maximum(a2, 0.0)))
    single = 1.0 - 0.5 * (np.abs(a1) + np.sqrt(np.maximum(under_root, 0.0)))
    return np.where(under_root < 0.0, pair, single)
