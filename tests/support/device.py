"""A simulated device under test: what a measuring signal becomes on its way through."""

from __future__ import annotations

import numpy as np
from scipy import signal

DELAY_S = 0.10477
NOISE_DBFS = -80.0


def device(
    played: np.ndarray,
    sos: np.ndarray,
    rate: float,
    *,
    delay_s: float = DELAY_S,
    gain: float = 0.5,
    corner_hz: float = 1.0,
    noise_dbfs: float = NOISE_DBFS,
    second_harmonic: float = 1e-3,
    amplitude: float = 0.1,
    clip_at: float = np.inf,
    seed: int = 0,
) -> np.ndarray:
    """`played` [n] through x + k·x², sections `sos`, a coupling high-pass, delay, gain, clipping and white noise.

    `second_harmonic` is that of a sine of `amplitude`: k·a²/2 over a. Noise is in dB against a full-scale sine's RMS.
    """
    x = np.concatenate([played, np.zeros(int((delay_s + 0.4) * rate))])
    x = x + (2.0 * second_harmonic / amplitude) * x**2
    x = signal.sosfilt(sos, x)
    n = 2 ** int(np.ceil(np.log2(2 * x.size)))
    f = np.fft.rfftfreq(n, 1 / rate)
    with np.errstate(divide="ignore"):
        path = gain * np.exp(-2j * np.pi * f * delay_s) * (1 / (1 + corner_hz / (1j * np.where(f > 0, f, 1e-30))))
    y = np.fft.irfft(np.fft.rfft(x, n) * path, n)[: x.size]
    noise = np.random.default_rng(seed).standard_normal(x.size) * 10 ** (noise_dbfs / 20) / np.sqrt(2)
    return np.clip(y + noise, -clip_at, clip_at)
