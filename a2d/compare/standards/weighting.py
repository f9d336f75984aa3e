"""IEC 61672-1:2013: frequency weightings A and C, Annex E, and the acceptance limits of Table 3."""

from __future__ import annotations

import numpy as np

from a2d.arrays import FloatArray

REFERENCE_HZ = 1000.0
_LOW, _HIGH, _A = 10.0**1.5, 10.0**3.9, 10.0**2.45

# Class 1 upper, class 1 lower, class 2 upper, class 2 lower, dB, at the exact frequencies 1000·10^(0.1·(n - 30)) from
# 10 Hz to 20 kHz (Table 3).
_LIMITS = """
3.0 -inf 5.0 -inf   2.5 -inf 5.0 -inf   2.0 -4.0 5.0 -inf   2.0 -2.0 3.0 -3.0   2.0 -1.5 3.0 -3.0   1.5 -1.5 3.0 -3.0
1.0 -1.0 2.0 -2.0   1.0 -1.0 2.0 -2.0   1.0 -1.0 2.0 -2.0   1.0 -1.0 2.0 -2.0   1.0 -1.0 1.5 -1.5   1.0 -1.0 1.5 -1.5
1.0 -1.0 1.5 -1.5   1.0 -1.0 1.5 -1.5   1.0 -1.0 1.5 -1.5   1.0 -1.0 1.5 -1.5   1.0 -1.0 1.5 -1.5   1.0 -1.0 1.5 -1.5
1.0 -1.0 1.5 -1.5   1.0 -1.0 1.5 -1.5   0.7 -0.7 1.0 -1.0   1.0 -1.0 1.5 -1.5   1.0 -1.0 2.0 -2.0   1.0 -1.0 2.0 -2.0
1.0 -1.0 2.5 -2.5   1.0 -1.0 2.5 -2.5   1.0 -1.0 3.0 -3.0   1.5 -1.5 3.5 -3.5   1.5 -2.0 4.5 -4.5   1.5 -2.5 5.0 -5.0
2.0 -3.0 5.0 -inf   2.0 -5.0 5.0 -inf   2.5 -16.0 5.0 -inf  3.0 -inf 5.0 -inf
"""
TABLE = np.array(_LIMITS.split(), dtype=np.float64).reshape(-1, 4)
EXACT_HZ = REFERENCE_HZ * 10.0 ** (0.1 * np.arange(-20, len(TABLE) - 20))


def corner_frequencies() -> tuple[float, float, float, float]:
    """f1 to f4 in Hz, from fL = 10^1.5 Hz, fH = 10^3.9 Hz, fA = 10^2.45 Hz and D² = 1/2 (Annex E)."""
    d, reference = np.sqrt(0.5), REFERENCE_HZ**2
    c = _LOW**2 * _HIGH**2
    b = (reference + c / reference - d * (_LOW**2 + _HIGH**2)) / (1.0 - d)
    root = np.sqrt(b * b - 4.0 * c)
    f1, f4 = np.sqrt((-b - root) / 2.0), np.sqrt((-b + root) / 2.0)
    return float(f1), float((3.0 - 5.0**0.5) / 2.0 * _A), float((3.0 + 5.0**0.5) / 2.0 * _A), float(f4)


def a_weighting_db(f_hz: FloatArray) -> FloatArray:
    """The A weighting in dB, 0 at 1 kHz (Annex E)."""
    f1, f2, f3, f4 = corner_frequencies()

    def level(f: FloatArray) -> FloatArray:
        return (
            40.0 * np.log10(f * f * f4)
            - 20.0 * np.log10((f * f + f1 * f1) * (f * f + f4 * f4))
            - 10.0 * np.log10((f * f + f2 * f2) * (f * f + f3 * f3))
        )

    return np.asarray(level(f_hz) - level(np.asarray(REFERENCE_HZ)))


def c_weighting_db(f_hz: FloatArray) -> FloatArray:
    """The C weighting in dB, 0 at 1 kHz (Annex E)."""
    f1, _, _, f4 = corner_frequencies()

    def level(f: FloatArray) -> FloatArray:
        return np.asarray(40.0 * np.log10(f * f4) - 20.0 * np.log10((f * f + f1 * f1) * (f * f + f4 * f4)))

    return np.asarray(level(f_hz) - level(np.asarray(REFERENCE_HZ)))


def acceptance_limits(f_hz: FloatArray, performance_class: int) -> tuple[FloatArray, FloatArray]:
    """Lower and upper limit in dB at `f_hz`: the table's at its frequencies, the wider of two between (5.5.7).

    No limit outside 10 Hz to 20 kHz.
    """
    column = 2 * (performance_class - 1)
    position = 10.0 * np.log10(f_hz / REFERENCE_HZ) + 20.0
    nearest = np.round(position)
    on_row = np.abs(position - nearest) < 1e-6
    below = np.where(on_row, nearest, np.floor(position)).astype(np.int64)
    above = np.where(on_row, nearest, np.ceil(position)).astype(np.int64)
    inside = (below >= 0) & (above < len(TABLE))
    low, high = np.clip(below, 0, len(TABLE) - 1), np.clip(above, 0, len(TABLE) - 1)
    upper = np.maximum(TABLE[low, column], TABLE[high, column])
    lower = np.minimum(TABLE[low, column + 1], TABLE[high, column + 1])
    return np.where(inside, lower, -np.inf), np.where(inside, upper, np.inf)
