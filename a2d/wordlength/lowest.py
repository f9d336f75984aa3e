"""The lowest f0 that a number format and structure carry at a sample rate."""

from __future__ import annotations

import numpy as np

from a2d.arrays import FloatArray
from a2d.digital.bilinear import bilinear
from a2d.errors import RoundingError
from a2d.wordlength.deviation import deviation_db
from a2d.wordlength.formats import Number
from a2d.wordlength.rounding import round_nearest
from a2d.wordlength.stability import is_stable

LOWEST_HZ, HIGHEST_HZ = 1.0, 12_000.0
STEPS_AN_OCTAVE = 6
# gain in dB and Q of the bells that a format has to carry at an f0: a narrow boost, a broad one, a narrow cut
BELLS = ((12.0, 4.0), (6.0, 0.7), (-12.0, 4.0))


def lowest_f0_hz(number: Number, structure: str, rate_hz: float, allowed_db: float = 0.1) -> float:
    """The lowest f0 in Hz from which upwards every bell in `BELLS` is off by at most `allowed_db`.

    Parameters
    ----------
    number, structure
        The format, each coefficient rounded to nearest, and the structure.
    rate_hz
        Hz.
    allowed_db
        The largest level change that rounding may make, from half of f0 upwards.

    Returns
    -------
    Hz, a step of 1/`STEPS_AN_OCTAVE` octave; `LOWEST_HZ` when nothing was found to fail, infinite when all fail.
    """
    octaves = np.log2(min(HIGHEST_HZ, 0.4 * rate_hz) / LOWEST_HZ)
    grid = LOWEST_HZ * 2.0 ** (np.arange(int(octaves * STEPS_AN_OCTAVE) + 1) / STEPS_AN_OCTAVE)
    lowest = np.inf
    for f0 in grid[::-1]:
        if any(
            _error_db(_bell(f0, q, gain, rate_hz), number, structure, rate_hz, f0) > allowed_db for gain, q in BELLS
        ):
            break
        lowest = float(f0)
    return lowest


def _bell(f0_hz: float, q: float, gain_db: float, rate_hz: float) -> FloatArray:
    """(s² + s·A·w0/Q + w0²)/(s² + s·w0/(A·Q) + w0²), A = 10^(gain/40) (W3C Audio EQ Cookbook), shape [1, 6]."""
    w, root = 2.0 * np.pi * f0_hz, 10.0 ** (gain_db / 40.0)
    b, a = np.array([[1.0, root * w / q, w * w]]), np.array([[1.0, w / (root * q), w * w]])
    return bilinear(b, a, np.asarray(rate_hz), np.array([f0_hz]), np.array([f0_hz, rate_hz / 2.0]))


def _error_db(sos: FloatArray, number: Number, structure: str, rate_hz: float, f0_hz: float) -> float:
    try:
        rounded = round_nearest(sos, number, structure, move_gain=False)
    except RoundingError:
        return float(np.inf)
    if not np.all(is_stable(rounded.values, structure)):
        return float(np.inf)
    return deviation_db(sos, rounded.sos, rate_hz, (0.5 * f0_hz, 0.45 * rate_hz))
