"""Error curves of a digital chain against an analog one."""

from __future__ import annotations

import numpy as np

from a2d.analog import response as analog
from a2d.arrays import ComplexArray, FloatArray
from a2d.digital import response as digital
from a2d.digital.response import unit_delay_complement

FLOOR_DB = 80.0  # below the analog maximum in the band: under the noise of most equipment (common practice)

MAGNITUDE, PHASE, GROUP_DELAY = range(3)


def error_curves(
    b: FloatArray, a: FloatArray, sos: FloatArray, sample_rate_hz: float, f_hz: FloatArray, peak: FloatArray
) -> FloatArray:
    """Magnitude error in dB, phase error in degrees and group-delay error in µs, digital minus analog.

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
    w, u = 2.0 * np.pi * f_hz[..., np.newaxis, :], unit_delay_complement(f_hz[..., np.newaxis, :], sample_rate_hz)
    sections_a = analog.polynomial(b, w) / analog.polynomial(a, w)
    sections_d = digital.polynomial(sos[..., :3], u) / digital.polynomial(sos[..., 3:], u)
    floor = peak[..., np.newaxis] * 10.0 ** (-FLOOR_DB / 20.0)
    size_a, size_d = (np.abs(np.prod(h, axis=-2)) for h in (sections_a, sections_d))
    audible = (size_a > floor) & (size_d > floor)
    magnitude = 20.0 * np.log10(np.maximum(size_d, floor) / np.maximum(size_a, floor))
    phase = _phase_error(sections_a, sections_d)
    delay_a = np.sum(analog.phase_slope(a, w) - analog.phase_slope(b, w), axis=-2)
    samples = np.sum(digital.delay_in_samples(sos[..., :3], u) - digital.delay_in_samples(sos[..., 3:], u), axis=-2)
    delay = 1e6 * (samples / sample_rate_hz - delay_a)
    return np.stack([magnitude, np.where(audible, phase, 0.0), np.where(audible, delay, 0.0)])


def _phase_error(analog_sections: ComplexArray, digital_sections: ComplexArray) -> FloatArray:
    """Phase of digital re analog in degrees: the sum over sections, which has no jumps of 360 degrees; where the two
    have different numbers of sections, of the products, from -180 to 180.
    """
    if analog_sections.shape[-2] == digital_sections.shape[-2]:
        return np.asarray(np.sum(np.degrees(np.angle(digital_sections * np.conj(analog_sections))), axis=-2))
    products = np.prod(digital_sections, axis=-2) * np.conj(np.prod(analog_sections, axis=-2))
    return np.asarray(np.degrees(np.angle(products)))


def largest_magnitude(b: FloatArray, a: FloatArray, f_hz: FloatArray) -> FloatArray:
    """The largest |H| of analog chains `b`, `a` [..., S, 3] on the grid `f_hz` [F]; shape [...]."""
    return np.asarray(np.max(np.abs(analog.chain_response(b, a, f_hz)), axis=-1))
