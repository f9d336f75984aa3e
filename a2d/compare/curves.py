"""Error curves of a digital chain against an analog one."""

from __future__ import annotations

import numpy as np

from a2d.analog import response as analog
from a2d.arrays import ComplexArray, FloatArray
from a2d.digital import response as digital

FLOOR_DB = 100.0  # below the analog response's maximum in the band

MAGNITUDE, PHASE, GROUP_DELAY = range(3)


def error_curves(
    b: FloatArray, a: FloatArray, sos: FloatArray, sample_rate_hz: float, f_hz: FloatArray, peak: FloatArray
) -> FloatArray:
    """Magnitude error in dB, phase error in degrees (-180 to 180) and group-delay error in µs, digital minus analog.

    Parameters
    ----------
    b, a
        Shape [..., S, 3].
    sos
        Shape [..., T, 6]; T need not be S.
    sample_rate_hz
        Hz.
    f_hz
        Shape [F] or [..., F].
    peak
        Shape [...]: the largest |H| of the analog chain in the band.

    Returns
    -------
    Shape [3, ..., F].

    Notes
    -----
    Near-zero responses: what lies more than `FLOOR_DB` below `peak` counts as lying there, in both responses, and
    where either does phase and group delay are not judged (zero error). A notch whose bottom is reached at the same
    frequency by both thus has a finite error, and one that misses it is charged with up to `FLOOR_DB`.
    """
    h_a, delay_a = _analog(b, a, f_hz)
    h_d, delay_d = _digital(sos, f_hz, sample_rate_hz)
    floor = peak[..., np.newaxis] * 10.0 ** (-FLOOR_DB / 20.0)
    size_a, size_d = np.abs(h_a), np.abs(h_d)
    audible = (size_a > floor) & (size_d > floor)
    magnitude = 20.0 * np.log10(np.maximum(size_d, floor) / np.maximum(size_a, floor))
    phase = np.degrees(np.angle(h_d * np.conj(h_a)))
    delay = 1e6 * (delay_d - delay_a)
    return np.stack([magnitude, np.where(audible, phase, 0.0), np.where(audible, delay, 0.0)])


def _analog(b: FloatArray, a: FloatArray, f_hz: FloatArray) -> tuple[ComplexArray, FloatArray]:
    f = f_hz[..., np.newaxis, :]
    w = 2.0 * np.pi * f
    delay = np.sum(analog.phase_slope(a, w) - analog.phase_slope(b, w), axis=-2)
    return np.prod(analog.polynomial(b, w) / analog.polynomial(a, w), axis=-2), delay


def _digital(sos: FloatArray, f_hz: FloatArray, sample_rate_hz: float) -> tuple[ComplexArray, FloatArray]:
    u = digital.unit_delay_complement(f_hz[..., np.newaxis, :], sample_rate_hz)
    b, a = sos[..., :3], sos[..., 3:]
    samples = np.sum(digital.delay_in_samples(b, u) - digital.delay_in_samples(a, u), axis=-2)
    return np.prod(digital.polynomial(b, u) / digital.polynomial(a, u), axis=-2), samples / sample_rate_hz


def largest_magnitude(b: FloatArray, a: FloatArray, f_hz: FloatArray) -> FloatArray:
    """The largest |H| of analog chains `b`, `a` [..., S, 3] on the grid `f_hz` [F]; shape [...]."""
    return np.asarray(np.max(np.abs(analog.chain_response(b, a, f_hz)), axis=-1))
