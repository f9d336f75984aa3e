"""Test signals: sines, exponential sweep with sync markers, impulse, pink noise.

Levels are in dBFS as AES17 has it: 0 dBFS is a sine whose peaks reach full scale. The level of sines, sweep and
impulse is that of their peak; the level of noise is its RMS value against that of a full-scale sine. Full-scale test
signals can damage hearing and loudspeakers: the level is -20 dBFS unless it is asked for.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from a2d import checks
from a2d.arrays import FloatArray
from a2d.errors import ParameterError
from a2d.listening.sweep import FADE_SECONDS, SweepPlan, faded

SAFE_LEVEL_DBFS = -20.0
PAUSE_SECONDS = 0.25
IMPULSE_AT_SECONDS = 0.1
PINK_LOW_HZ = 10.0


@dataclass(frozen=True)
class SignalSettings:
    """What a test signal is made from.

    Parameters
    ----------
    sample_rate_hz
        Hz.
    level_dbfs
        dBFS, at most 0.
    seconds
        Length of the sweep, the noise, the impulse's record, or of each sine.
    frequencies_hz
        Hz, the sines.
    seed
        Of the noise: the same seed gives the same samples.
    """

    sample_rate_hz: float
    level_dbfs: float = SAFE_LEVEL_DBFS
    seconds: float = 10.0
    frequencies_hz: Sequence[float] = (100.0, 1_000.0, 10_000.0)
    seed: int = 1

    def __post_init__(self) -> None:
        checks.between("sample rate", self.sample_rate_hz, 1_000.0, 1_000_000.0, "Hz")
        checks.between("level", self.level_dbfs, -140.0, 0.0, "dBFS")
        checks.between("seconds", self.seconds, 0.1, 600.0, "s")
        checks.whole("seed", self.seed, 0, 2**63 - 1)

    @property
    def amplitude(self) -> float:
        """Peak of a sine at the level."""
        return float(10.0 ** (self.level_dbfs / 20.0))

    @property
    def frames(self) -> int:
        return round(self.seconds * self.sample_rate_hz)


def sine_spans(settings: SignalSettings) -> list[tuple[int, int]]:
    """First sample and one past the last of each sine in `sines`."""
    step = settings.frames + round(PAUSE_SECONDS * settings.sample_rate_hz)
    return [(k * step, k * step + settings.frames) for k in range(len(settings.frequencies_hz))]


def sines(settings: SignalSettings) -> FloatArray:
    """One sine after the other, sin(2πfn/fs) with n from its own start, faded at both ends, with pauses between."""
    if not settings.frequencies_hz:
        raise ParameterError("sines need at least one frequency (0 given)")
    for f in settings.frequencies_hz:
        checks.below_half_rate("a sine's frequency", f, settings.sample_rate_hz)
    spans = sine_spans(settings)
    out = np.zeros(spans[-1][1])
    n = np.arange(settings.frames)
    for (start, stop), f in zip(spans, settings.frequencies_hz, strict=True):
        tone = settings.amplitude * np.sin(2.0 * np.pi * (f / settings.sample_rate_hz) * n)
        out[start:stop] = faded(tone, settings.sample_rate_hz, FADE_SECONDS)
    return out


def sweep(settings: SignalSettings) -> FloatArray:
    """The measuring signal of `SweepPlan`: marker, exponential sweep, marker."""
    return SweepPlan(settings.sample_rate_hz, settings.seconds, settings.level_dbfs).signal()


def impulse(settings: SignalSettings) -> FloatArray:
    """One sample, 0.1 s from the start or half-way in a shorter record."""
    out = np.zeros(settings.frames)
    at = round(min(IMPULSE_AT_SECONDS, settings.seconds / 2.0) * settings.sample_rate_hz)
    out[at] = settings.amplitude
    return out


def pink(settings: SignalSettings) -> FloatArray:
    """Gaussian noise of equal power an octave from 10 Hz to half the rate, faded at both ends.

    White noise whose spectrum is multiplied by 1/sqrt(f), so that the slope is exact and not an approximation by a
    filter; the RMS value is set before the ends are faded.
    """
    white = np.random.default_rng(settings.seed).standard_normal(settings.frames)
    spectrum = np.fft.rfft(white)
    f = np.fft.rfftfreq(settings.frames, 1.0 / settings.sample_rate_hz)
    shape = np.where(f >= PINK_LOW_HZ, 1.0 / np.sqrt(np.maximum(f, PINK_LOW_HZ)), 0.0)
    noise = np.fft.irfft(spectrum * shape, settings.frames)
    rms = settings.amplitude / np.sqrt(2.0)
    return faded(noise * (rms / np.sqrt(np.mean(noise**2))), settings.sample_rate_hz, FADE_SECONDS)


SIGNALS: dict[str, Callable[[SignalSettings], FloatArray]] = {
    "sines": sines,
    "sweep": sweep,
    "impulse": impulse,
    "pink": pink,
}
