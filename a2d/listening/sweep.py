"""The measuring signal: an exponential sine sweep between two sync markers.

The sweep is A. Farina's (Simultaneous measurement of impulse response and distortion with a swept-sine technique,
AES 108th Convention, 2000): x(t) = sin(2π·f1·T/R·(e^{tR/T} - 1)), R = ln(f2/f1). After deconvolution the N-th harmonic
stands T·ln(N)/R before the linear response.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from a2d import checks
from a2d.arrays import FloatArray

FADE_SECONDS = 0.02
SILENCE_SECONDS = 0.5  # before the first marker, between marker and sweep, and after the last marker
MARKER_SECONDS = 0.1
MARKER_HZ = (6_000.0, 300.0)  # downwards, so that the rising sweep does not resemble it
TAIL_SECONDS = 1.0  # after the sweep: room for latency and for the device to ring out
LOW_HZ = 10.0
HIGH_FRACTION = 0.485  # of the sample rate: room for edges beyond 20 kHz at 44.1 kHz


def faded(samples: FloatArray, sample_rate_hz: float, seconds: float) -> FloatArray:
    """`samples` [N] with raised-cosine ends of `seconds`, or of half the length where that is shorter."""
    n = min(round(seconds * sample_rate_hz), samples.size // 2)
    ramp = 0.5 - 0.5 * np.cos(np.pi * (np.arange(n) + 0.5) / max(n, 1))
    out = samples.copy()
    out[:n] *= ramp
    out[samples.size - n :] *= ramp[::-1]
    return out


@dataclass(frozen=True)
class SweepPlan:
    """Where everything stands in the measuring signal.

    Parameters
    ----------
    sample_rate_hz
        Hz.
    seconds
        T, the length of the sweep.
    level_dbfs
        Peak of sweep and markers, dBFS.
    """

    sample_rate_hz: float
    seconds: float = 10.0
    level_dbfs: float = -20.0

    def __post_init__(self) -> None:
        checks.between("sample rate", self.sample_rate_hz, 8_000.0, 1_000_000.0, "Hz")
        checks.between("sweep length", self.seconds, 1.0, 120.0, "s")
        checks.between("level", self.level_dbfs, -140.0, 0.0, "dBFS")

    @property
    def low_hz(self) -> float:
        return LOW_HZ

    @property
    def high_hz(self) -> float:
        return HIGH_FRACTION * self.sample_rate_hz

    @property
    def log_span(self) -> float:
        """R = ln(f2/f1)."""
        return float(np.log(self.high_hz / self.low_hz))

    @property
    def amplitude(self) -> float:
        return float(10.0 ** (self.level_dbfs / 20.0))

    def frames(self, seconds: float) -> int:
        return round(seconds * self.sample_rate_hz)

    @property
    def first_marker(self) -> int:
        """Sample at which the first marker starts."""
        return self.frames(SILENCE_SECONDS)

    @property
    def start(self) -> int:
        """Sample at which the sweep starts."""
        return self.first_marker + self.frames(MARKER_SECONDS) + self.frames(SILENCE_SECONDS)

    @property
    def stop(self) -> int:
        """One past the sweep's last sample."""
        return self.start + self.frames(self.seconds)

    @property
    def second_marker(self) -> int:
        return self.stop + self.frames(TAIL_SECONDS)

    @property
    def total(self) -> int:
        return self.second_marker + self.frames(MARKER_SECONDS) + self.frames(SILENCE_SECONDS)

    def sweep(self) -> FloatArray:
        """The sweep alone, faded at both ends."""
        t = np.arange(self.frames(self.seconds)) / self.sample_rate_hz
        scale = self.seconds / self.log_span
        phase = 2.0 * np.pi * self.low_hz * scale * np.expm1(t / scale)
        return self.amplitude * faded(np.sin(phase), self.sample_rate_hz, FADE_SECONDS)

    def frequency_at(self, t: FloatArray) -> FloatArray:
        """The sweep's frequency `t` seconds after its start, Hz."""
        return np.asarray(self.low_hz * np.exp(t * self.log_span / self.seconds))

    def lead_of_harmonic(self, order: int) -> float:
        """T·ln(N)/R: seconds by which the N-th harmonic's response stands before the linear one."""
        return float(self.seconds * np.log(order) / self.log_span)

    def marker(self) -> FloatArray:
        """A short exponential sweep downwards under a Hann window."""
        n = self.frames(MARKER_SECONDS)
        t = (np.arange(n) + 0.5) / self.sample_rate_hz
        high, low = MARKER_HZ
        high = min(high, 0.4 * self.sample_rate_hz)
        rate = np.log(low / high) / MARKER_SECONDS
        phase = 2.0 * np.pi * high * np.expm1(rate * t) / rate
        return np.asarray(self.amplitude * np.sin(phase) * np.sin(np.pi * t / MARKER_SECONDS) ** 2)

    def signal(self) -> FloatArray:
        """The whole signal, shape [total]."""
        out = np.zeros(self.total)
        marker = self.marker()
        for at in (self.first_marker, self.second_marker):
            out[at : at + marker.size] = marker
        out[self.start : self.stop] = self.sweep()
        return out
