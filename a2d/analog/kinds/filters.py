"""Gain, low-, high-, all- and band-pass, notch: first and second order.

Each function takes frequencies in Hz, Q as the pole Q and gain in dB, all broadcasting to [...], and returns
`Sections` with one section. s is normalised to w0 = 2π·f0.
"""

from __future__ import annotations

import numpy as np

from a2d import checks
from a2d.analog.sections import Sections, amplitude, single
from a2d.arrays import ArrayLike, FloatArray


def gain(gain_db: ArrayLike = 0.0) -> Sections:
    """H(s) = G. A plain gain, without any frequency response."""
    return single((0.0, 0.0, amplitude(gain_db)), (0.0, 0.0, 1.0), np.asarray(1000.0))


def lowpass(f0: ArrayLike, q: ArrayLike | None = None, gain_db: ArrayLike = 0.0) -> Sections:
    """H(s) = G/(s² + s/Q + 1); first order, without q: H(s) = G/(s + 1)."""
    g, f = amplitude(gain_db), frequency(f0)
    if q is None:
        return single((0.0, 0.0, g), (0.0, 1.0, 1.0), f)
    return single((0.0, 0.0, g), (1.0, 1.0 / pole_q(q), 1.0), f)


def highpass(f0: ArrayLike, q: ArrayLike | None = None, gain_db: ArrayLike = 0.0) -> Sections:
    """H(s) = G·s²/(s² + s/Q + 1); first order, without q: H(s) = G·s/(s + 1)."""
    g, f = amplitude(gain_db), frequency(f0)
    if q is None:
        return single((0.0, g, 0.0), (0.0, 1.0, 1.0), f)
    return single((g, 0.0, 0.0), (1.0, 1.0 / pole_q(q), 1.0), f)


def allpass(f0: ArrayLike, q: ArrayLike | None = None, gain_db: ArrayLike = 0.0) -> Sections:
    """H(s) = G·(s² - s/Q + 1)/(s² + s/Q + 1); first order, without q: H(s) = G·(1 - s)/(1 + s)."""
    g, f = amplitude(gain_db), frequency(f0)
    if q is None:
        return single((0.0, -g, g), (0.0, 1.0, 1.0), f)
    damping = 1.0 / pole_q(q)
    return single((g, -g * damping, g), (1.0, damping, 1.0), f)


def bandpass(f0: ArrayLike, q: ArrayLike, gain_db: ArrayLike = 0.0) -> Sections:
    """H(s) = H0·(s/Q)/(s² + s/Q + 1): the peak is H0 (the gain) at any Q."""
    damping = 1.0 / pole_q(q)
    return single((0.0, amplitude(gain_db) * damping, 0.0), (1.0, damping, 1.0), frequency(f0))


def bandpass_constant_skirt(f0: ArrayLike, q: ArrayLike, gain_db: ArrayLike = 0.0) -> Sections:
    """H(s) = G·s/(s² + s/Q + 1): the skirts stay in place as Q changes; the peak is G·Q."""
    return single((0.0, amplitude(gain_db), 0.0), (1.0, 1.0 / pole_q(q), 1.0), frequency(f0))


def notch(f0: ArrayLike, q: ArrayLike, gain_db: ArrayLike = 0.0) -> Sections:
    """H(s) = G·(s² + 1)/(s² + s/Q + 1): nothing passes at f0."""
    g = amplitude(gain_db)
    return single((g, 0.0, g), (1.0, 1.0 / pole_q(q), 1.0), frequency(f0))


def frequency(f0: ArrayLike) -> FloatArray:
    """A checked f0, Hz."""
    return checks.positive("f0", f0, "Hz")


def pole_q(q: ArrayLike) -> FloatArray:
    """A checked Q."""
    return checks.positive("q", q)
