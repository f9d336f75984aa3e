"""IEC 60098: the replay characteristic of fine-groove discs, time constants 3180, 318 and 75 µs."""

from __future__ import annotations

import numpy as np

from a2d.arrays import FloatArray

REFERENCE_HZ = 1000.0
LOW_CORNER_S = 7950e-6  # the rumble high-pass of the amendment of 1976


def replay_db(f_hz: FloatArray, *, amended: bool) -> FloatArray:
    """The replay level in dB, 0 at 1 kHz; `amended` adds the high-pass of 7950 µs."""

    def level(f: FloatArray) -> FloatArray:
        w = 2.0 * np.pi * f
        up, down = 1.0 + (318e-6 * w) ** 2, (1.0 + (3180e-6 * w) ** 2) * (1.0 + (75e-6 * w) ** 2)
        below = (LOW_CORNER_S * w) ** 2 / (1.0 + (LOW_CORNER_S * w) ** 2) if amended else 1.0
        return np.asarray(10.0 * np.log10(up / down * below))

    return np.asarray(level(f_hz) - level(np.asarray(REFERENCE_HZ)))
