"""From a recorded sweep to the impulse response, and from there to response, noise and harmonics.

Dividing the recording's spectrum by the sweep's gives the impulse response with the harmonics' responses before it,
the N-th by T·ln(N)/R (A. Farina, AES 108th Convention, 2000). Windows in time then take one of them each; a window
that is shorter at higher frequencies takes less of the noise.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy import fft

from a2d.arrays import ComplexArray, FloatArray
from a2d.errors import AudioError
from a2d.listening.sweep import SILENCE_SECONDS, TAIL_SECONDS, SweepPlan

BEFORE_SECONDS = 0.9 * SILENCE_SECONDS  # taken along before the sweep, after the first marker has died away
AFTER_SECONDS = 0.95 * TAIL_SECONDS
PRE_CYCLES, POST_CYCLES = 8.0, 60.0  # of the window around the linear response, at each frequency
HARMONIC_PRE_CYCLES, HARMONIC_POST_CYCLES = 4.0, 16.0  # weak and smoothed over frequency anyway: less noise
SHORTEST_PRE, SHORTEST_POST = 0.005, 0.02  # s
REGULAR = 1e-8  # of the sweep's largest power: where there is less the sweep says nothing
LEAST_SILENCE = 0.1  # s, that the noise can be told from


@dataclass(frozen=True, eq=False)
class Impulse:
    """A measured impulse response.

    Parameters
    ----------
    samples
        Shape [n]: circular, the linear response at 0, harmonics towards the end.
    plan
        Of the sweep.
    density
        Shape [n/2 + 1]: noise power a sample over the sweep's spectrum, on the grid of the spectrum of `samples`.
    """

    samples: FloatArray
    plan: SweepPlan
    density: FloatArray


def impulse_response(recording: FloatArray, plan: SweepPlan, latency_samples: int) -> Impulse:
    """Divide the recorded sweep by the played one.

    Raises
    ------
    AudioError
        The recording stops before the sweep has died away.
    """
    before, after = plan.frames(BEFORE_SECONDS), plan.frames(AFTER_SECONDS)
    start = plan.start + latency_samples - before
    stop = plan.stop + latency_samples + after
    if stop > recording.size or start < 0:
        raise AudioError(
            f"the recording lacks part of the sweep (needed samples {start} to {stop}, there are {recording.size})"
        )
    played = plan.sweep()
    size = fft.next_fast_len(stop - start + before, real=True)
    x = fft.rfft(np.concatenate([np.zeros(before), played]), size)
    y = fft.rfft(recording[start:stop], size)
    f = np.asarray(fft.rfftfreq(size, 1.0 / plan.sample_rate_hz))
    power = x.real**2 + x.imag**2
    inverse = np.conj(x) / (power + REGULAR * power.max()) * _band(f, plan)
    noise = _noise_density(recording, plan, latency_samples, f)
    return Impulse(np.asarray(fft.irfft(y * inverse, size)), plan, noise * (inverse.real**2 + inverse.imag**2))


def _band(f: FloatArray, plan: SweepPlan) -> FloatArray:
    """1 within the sweep's band, cosine edges: half an octave below its lower end, the last 2.5 % at the upper one."""
    low = np.clip(np.log2(np.maximum(f, 1e-3) / plan.low_hz) / 0.5 + 1.0, 0.0, 1.0)
    high = np.clip((plan.high_hz - f) / (0.025 * plan.high_hz), 0.0, 1.0)
    return np.asarray(np.sin(0.5 * np.pi * low) ** 2 * np.sin(0.5 * np.pi * high) ** 2)


def _noise_density(recording: FloatArray, plan: SweepPlan, latency_samples: int, f: FloatArray) -> FloatArray:
    """Noise power a sample at `f` [F], from the silence before the first marker or else after the sweep."""
    quiet = recording[: max(plan.first_marker + latency_samples - plan.frames(0.02), 0)]
    if quiet.size < plan.frames(LEAST_SILENCE):
        end = plan.second_marker + latency_samples
        quiet = recording[end - plan.frames(0.3) : end - plan.frames(0.02)]
    window = np.hanning(quiet.size)
    spectrum = np.abs(np.fft.rfft((quiet - quiet.mean()) * window)) ** 2 / np.sum(window**2)
    own = np.fft.rfftfreq(quiet.size, 1.0 / plan.sample_rate_hz)
    whole = np.concatenate([[0.0], np.cumsum(spectrum)]) * (own[1] - own[0])
    edges = np.append(own, own[-1] + own[1]) - 0.5 * own[1]
    low, high = np.minimum(f / 1.2, f - 2.0 * own[1]), np.maximum(f * 1.2, f + 2.0 * own[1])
    low, high = np.maximum(low, edges[0]), np.minimum(high, edges[-1])
    return np.asarray((np.interp(high, edges, whole) - np.interp(low, edges, whole)) / (high - low))


def linear_response(impulse: Impulse, f_hz: FloatArray) -> tuple[ComplexArray, FloatArray]:
    """The response at `f_hz` [F] and the standard deviation of the noise in it."""
    lead = impulse.plan.lead_of_harmonic(2)
    pre = np.minimum(np.maximum(PRE_CYCLES / f_hz, SHORTEST_PRE), min(0.6 * lead, BEFORE_SECONDS))
    post = np.minimum(np.maximum(POST_CYCLES / f_hz, SHORTEST_POST), AFTER_SECONDS)
    return _windowed(impulse, f_hz, 0.0, pre, post)


def harmonic_response(impulse: Impulse, f_hz: FloatArray, order: int) -> tuple[ComplexArray, FloatArray]:
    """Amplitude of the N-th harmonic at N·f over the input's at `f_hz` [F], and its noise; nan out of band."""
    plan = impulse.plan
    lead = plan.lead_of_harmonic(order)
    room_before = plan.lead_of_harmonic(order + 1) - lead
    room_after = lead - plan.lead_of_harmonic(order - 1)
    out = order * f_hz
    pre = np.minimum(np.maximum(HARMONIC_PRE_CYCLES / out, SHORTEST_PRE), 0.45 * room_before)
    post = np.minimum(np.maximum(HARMONIC_POST_CYCLES / out, SHORTEST_PRE), 0.45 * room_after)
    response, sigma = _windowed(impulse, out, -lead, pre, post)
    beyond = out > 0.97 * plan.high_hz
    return np.where(beyond, np.nan, response), np.where(beyond, np.nan, sigma)


def _windowed(
    impulse: Impulse, f_hz: FloatArray, centre: float, pre: FloatArray, post: FloatArray
) -> tuple[ComplexArray, FloatArray]:
    """Fourier sums around `centre` (s) with a window of its own at each frequency, and the noise that it lets in."""
    rate, samples = impulse.plan.sample_rate_hz, impulse.samples
    grid = np.asarray(fft.rfftfreq(samples.size, 1.0 / rate))
    density = np.interp(f_hz, grid, impulse.density)
    response, sigma = np.empty(f_hz.size, dtype=np.complex128), np.empty(f_hz.size)
    for k, (f, before, after) in enumerate(zip(f_hz, pre, post, strict=True)):
        n = np.arange(round((centre - before) * rate), round((centre + after) * rate) + 1)
        t = n / rate - centre
        window = _taper(np.where(t < 0.0, -t / before, t / after))
        response[k] = np.sum(samples[n % samples.size] * window * np.exp(-2j * np.pi * f * t))
        sigma[k] = np.sqrt(density[k] * np.sum(window**2))
    return response, sigma


def _taper(t: FloatArray) -> FloatArray:
    """1 up to half of the window's arm, a raised cosine from there to its end at 1."""
    return np.asarray(0.5 + 0.5 * np.cos(np.pi * np.clip(2.0 * t - 1.0, 0.0, 1.0)))
