"""Where the measuring signal stands in a recording: correlation with its two sync markers."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from scipy import fft, signal

from a2d.arrays import FloatArray
from a2d.errors import AudioError
from a2d.listening.sweep import SweepPlan

USUAL_RATES_HZ = (44_100.0, 48_000.0, 88_200.0, 96_000.0, 176_400.0, 192_000.0, 32_000.0)
CLEAR = 8.0  # a marker's correlation over the median of all
ALIKE = 0.4  # the weaker of the two markers over the stronger
DRIFT = 2e-3  # how far the distance of the markers may be off


@dataclass(frozen=True)
class Found:
    """The measuring signal in a recording.

    Parameters
    ----------
    latency_samples
        By how much it is late, to about a sample; a device's own phase shifts the markers.
    drift_ppm
        By how much the recorder's clock is fast against the player's.
    """

    latency_samples: int
    drift_ppm: float


def find_signal(samples: FloatArray, plan: SweepPlan) -> Found:
    """Find the two markers in `samples` [n].

    Raises
    ------
    AudioError
        No markers; markers of another sample rate; a recording that stops too early.
    """
    found = _pair(samples, plan)
    if found is None:
        for rate in USUAL_RATES_HZ:
            if rate != plan.sample_rate_hz and _pair(samples, replace(plan, sample_rate_hz=rate)) is not None:
                raise AudioError(
                    f"the signal was played for {rate:g} Hz and recorded as {plan.sample_rate_hz:g} Hz: the whole "
                    "recording runs at the wrong speed (play and record at one sample rate)"
                )
        raise AudioError(
            "the sync markers are not in the recording (record the whole sweep file, from before its start to after "
            "its end, with the same --sweep-seconds)"
        )
    first, second = found
    distance = plan.second_marker - plan.first_marker
    return Found(round(first) - plan.first_marker, ((second - first) / distance - 1.0) * 1e6)


def _pair(samples: FloatArray, plan: SweepPlan) -> tuple[float, float] | None:
    """Where both markers start, or None."""
    distance = plan.second_marker - plan.first_marker
    if samples.size < distance:
        return None
    height = _correlation(samples, plan.marker())
    strongest = int(np.argmax(height))
    limit = max(CLEAR * float(np.median(height)), ALIKE * float(height[strongest]))
    pairs = []
    for toward in (-distance, distance):
        middle, slack = strongest + toward, round(DRIFT * distance)
        low, high = max(middle - slack, 0), min(middle + slack + 1, height.size)
        if low < high and height[other := low + int(np.argmax(height[low:high]))] > limit:
            pairs.append((float(height[other]), min(strongest, other), max(strongest, other)))
    if not pairs:
        return None
    _, first, second = max(pairs)
    return _refined(height, first), _refined(height, second)


def _correlation(samples: FloatArray, marker: FloatArray) -> FloatArray:
    """The envelope of the correlation with the marker, at each possible start."""
    size = fft.next_fast_len(samples.size + marker.size)
    analytic = signal.hilbert(marker)
    whole = fft.ifft(fft.fft(samples, size) * np.conj(fft.fft(analytic, size)))
    return np.asarray(np.abs(whole[: samples.size]))


def _refined(height: FloatArray, at: int) -> float:
    """The top of the parabola through a maximum and its neighbours."""
    if not 0 < at < height.size - 1:
        return float(at)
    left, top, right = (float(v) for v in height[at - 1 : at + 2])
    bend = left - 2.0 * top + right
    return at + (0.5 * (left - right) / bend if bend < 0.0 else 0.0)
