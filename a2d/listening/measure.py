"""What a recording of the measuring signal says of the device."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy import optimize

from a2d.arrays import ComplexArray, FloatArray
from a2d.digital.twin import default_band_hz
from a2d.errors import AudioError
from a2d.listening.deconvolve import Impulse, harmonic_response, impulse_response, linear_response
from a2d.listening.distortion import looks_clipped
from a2d.listening.markers import find_signal
from a2d.listening.sweep import SweepPlan

POINTS_AN_OCTAVE = 48
HARMONICS = (2, 3, 4, 5)
SMOOTHED = POINTS_AN_OCTAVE // 6 + 1  # points of a sixth of an octave
DELAY_SEARCH_SECONDS = 0.004  # around the markers' latency, which a device's own phase shifts


@dataclass(frozen=True, eq=False)
class Measured:
    """One channel, with the latency taken out but no gain.

    Parameters
    ----------
    f_hz
        Shape [F], Hz: 48 an octave.
    response
        Shape [F].
    sigma
        Shape [F]: standard deviation of the noise in the response, same unit.
    harmonics
        Shape [H, F]: modulus of the harmonics of `HARMONICS` over the fundamental; nan where they lie out of band.
    latency_s
        What was taken out, s.
    drift_ppm
        Of the recorder's clock against the player's.
    clipped
        Whether tops are cut off.
    peak
        Largest sample.
    """

    f_hz: FloatArray
    response: ComplexArray
    sigma: FloatArray
    harmonics: FloatArray
    latency_s: float
    drift_ppm: float
    clipped: bool
    peak: float


@dataclass(frozen=True)
class Alignment:
    """How a response lies against a reference: response ≈ gain·e^{-jωτ}·reference."""

    gain_db: float
    inverted: bool
    delay_s: float


def measure_channel(samples: FloatArray, plan: SweepPlan, loopback: FloatArray | None = None) -> Measured:
    """Measure one channel [n]; with `loopback` [n] converters and cables are taken out.

    Raises
    ------
    AudioError
        The signal is not in the recording, or is cut short; the recording is silent.
    """
    if not np.any(samples):
        raise AudioError("the channel is silent (check the cabling and --channel)")
    low, high = default_band_hz(plan.sample_rate_hz)
    f = np.geomspace(low, high, round(np.log2(high / low) * POINTS_AN_OCTAVE) + 1)
    found = find_signal(samples, plan)
    impulse = impulse_response(samples, plan, found.latency_samples)
    response, sigma = linear_response(impulse, f)
    harmonics = np.stack([harmonic_level(impulse, f, n, np.abs(response)) for n in HARMONICS])
    latency = found.latency_samples
    if loopback is not None:
        back = find_signal(loopback, plan).latency_samples
        through, own_sigma = linear_response(impulse_response(loopback, plan, back), f)
        sigma = np.hypot(sigma, own_sigma * np.abs(response / through)) / np.abs(through)
        response = response / through
        latency -= back
    clipped = looks_clipped(samples, plan, found.latency_samples)
    return Measured(
        f,
        response,
        sigma,
        harmonics,
        latency / plan.sample_rate_hz,
        found.drift_ppm,
        clipped,
        float(np.max(np.abs(samples))),
    )


def harmonic_level(impulse: Impulse, f_hz: FloatArray, order: int, fundamental: FloatArray) -> FloatArray:
    """Modulus of the N-th harmonic over the fundamental's [F], noise taken off, means over a sixth of an octave.

    nan where the harmonic lies out of band.
    """
    response, sigma = harmonic_response(impulse, f_hz, order)
    power = (np.abs(response) ** 2 - sigma**2) / fundamental**2
    known = np.isfinite(power)
    kernel = np.ones(SMOOTHED)
    sums = np.convolve(np.where(known, power, 0.0), kernel, "same")
    counts = np.convolve(known.astype(np.float64), kernel, "same")
    return np.where(known, np.sqrt(np.maximum(sums / np.maximum(counts, 1.0), 0.0)), np.nan)


def align(response: ComplexArray, reference: ComplexArray, f_hz: FloatArray, weights: FloatArray) -> Alignment:
    """Gain, polarity and delay at which `response` [F] is most like `reference` [F].

    The delay is the one that makes Σ w·(Q/|Q|)·e^{jωτ} largest, Q = response/reference; polarity is the sign of that
    sum's real part, the gain the weighted median of |Q| in dB, which a few wrong places do not move.
    """
    ratio = response / reference
    unit = weights * ratio / np.abs(ratio)
    delays = np.arange(-DELAY_SEARCH_SECONDS, DELAY_SEARCH_SECONDS, 0.2 / f_hz[-1])
    sums = np.exp(2j * np.pi * delays[:, np.newaxis] * f_hz) @ unit
    coarse = float(delays[np.argmax(np.abs(sums.real))])
    step = 0.25 / f_hz[-1]

    def loss(delay: float) -> float:
        return -abs(float((np.exp(2j * np.pi * delay * f_hz) @ unit).real))

    found = optimize.minimize_scalar(
        loss, bounds=(coarse - step, coarse + step), method="bounded", options={"xatol": 1e-11}
    )
    total = complex(np.exp(2j * np.pi * float(found.x) * f_hz) @ unit)
    return Alignment(_median(20.0 * np.log10(np.abs(ratio)), weights), total.real < 0.0, float(found.x))


def aligned(response: ComplexArray, f_hz: FloatArray, alignment: Alignment) -> ComplexArray:
    """`response` with gain, polarity and delay taken out."""
    sign = -1.0 if alignment.inverted else 1.0
    gain = sign * 10.0 ** (alignment.gain_db / 20.0)
    return np.asarray(response * np.exp(2j * np.pi * f_hz * alignment.delay_s) / gain)


def _median(values: FloatArray, weights: FloatArray) -> float:
    order = np.argsort(values)
    share = np.cumsum(weights[order])
    return float(values[order][np.searchsorted(share, 0.5 * share[-1])])
