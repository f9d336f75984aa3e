"""Whether a recorded sweep has its tops cut off."""

from __future__ import annotations

import numpy as np

from a2d.arrays import FloatArray
from a2d.listening.sweep import SweepPlan

FULL_SCALE = 1.0 - 2.0**-15
RUN = 4  # samples at full scale in a row
PIECE_SECONDS = 0.05
NEAR_TOP = 0.97
PARTS = 48.0  # of a period: how far the neighbours stand whose line a top is held against
CLEAR = 6.0  # the curvature of a sine over that of noise alone
FLAT = 0.6  # curvature of the tops over that of a sine
LOUD = 0.8  # of the loudest: softer pieces cannot be the clipped ones
SCAN_FROM_HZ, SCAN_TO_FRACTION = 60.0, 0.1  # of the rate: a top needs several samples


def looks_clipped(samples: FloatArray, plan: SweepPlan, latency_samples: int) -> bool:
    """Samples that stay at full scale, or tops flatter than a sine's.

    A sine of w radians a sample has x[n+1] - 2·x[n] + x[n-1] = -(2 - 2·cos w)·x[n]; a top that was cut off, before or
    in the recorder, has nothing like it. The sweep's own frequency is known at every moment.
    """
    centred = samples - np.mean(samples)  # an offset of the recorder is no flat top
    return _stays_at_full_scale(samples) or _flattest(centred, plan, latency_samples) < FLAT


def _stays_at_full_scale(samples: FloatArray) -> bool:
    high = (np.abs(samples) >= FULL_SCALE).astype(np.int64)
    return bool(np.any(np.convolve(high, np.ones(RUN, dtype=np.int64)) >= RUN))


def _flattest(samples: FloatArray, plan: SweepPlan, latency_samples: int) -> float:
    """The least curvature of tops over that of a sine, over all loud pieces of the sweep."""
    start = plan.start + latency_samples
    scanned = np.array([SCAN_FROM_HZ, SCAN_TO_FRACTION * plan.sample_rate_hz])
    times = np.log(scanned / plan.low_hz) * plan.seconds / plan.log_span
    pieces = [
        (samples[start + plan.frames(t) : start + plan.frames(t + PIECE_SECONDS)], t + PIECE_SECONDS / 2.0)
        for t in np.arange(times[0], times[1], PIECE_SECONDS)
    ]
    pieces = [(piece, t) for piece, t in pieces if piece.size >= plan.frames(PIECE_SECONDS) // 2]
    loudest = max((float(np.max(np.abs(piece))) for piece, _ in pieces), default=0.0)
    noise = float(np.std(samples[: max(plan.first_marker + latency_samples - plan.frames(0.02), 2)]))
    found = [
        _curvature(piece, float(plan.frequency_at(np.array(t))), noise, plan)
        for piece, t in pieces
        if np.max(np.abs(piece)) > LOUD * loudest
    ]
    return min(found, default=1.0)


def _curvature(piece: FloatArray, f_hz: float, noise: float, plan: SweepPlan) -> float:
    """Curvature of the flatter tops over that of a sine; 1 where noise hides it."""
    step = max(1, round(plan.sample_rate_hz / (PARTS * f_hz)))
    x = piece[step:-step]
    peak = float(np.max(np.abs(piece)))
    top = np.abs(x) > NEAR_TOP * peak
    bend = 2.0 * x - piece[2 * step :] - piece[: -2 * step]
    sine = 2.0 - 2.0 * np.cos(2.0 * np.pi * f_hz * step / plan.sample_rate_hz)
    if np.count_nonzero(top) < RUN or sine * peak < CLEAR * np.sqrt(6.0) * noise:
        return 1.0
    return float(np.quantile(bend[top] / (sine * x[top]), 0.3))
