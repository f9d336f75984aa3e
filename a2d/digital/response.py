"""H(z) on the unit circle: response and group delay of second-order sections."""

from __future__ import annotations

import numpy as np

from a2d.arrays import ArrayLike, ComplexArray, FloatArray


def section_response(sos: FloatArray, f_hz: FloatArray, sample_rate_hz: ArrayLike) -> ComplexArray:
    """H(e^{j2πf/fs}) of each section.

    Parameters
    ----------
    sos
        Shape [..., 6]: b0, b1, b2, a0, a1, a2.
    f_hz
        Frequencies in Hz, shape [F] or [..., F] with the sections' leading axes.
    sample_rate_hz
        Shape [...], or one number.

    Returns
    -------
    Complex, shape [..., F].

    Notes
    -----
    With u = 1 - z⁻¹ a polynomial c0 + c1·z⁻¹ + c2·z⁻² is (c0 + c1 + c2) - (c1 + 2·c2)·u + c2·u². u is known to full
    relative accuracy as 2j·sin(w/2)·e^{-jw/2}, so that low frequencies lose nothing but what the coefficients lost.
    """
    u = unit_delay_complement(f_hz, sample_rate_hz)
    return polynomial(sos[..., :3], u) / polynomial(sos[..., 3:], u)


def chain_response(sos: FloatArray, f_hz: FloatArray, sample_rate_hz: ArrayLike) -> ComplexArray:
    """The product of `section_response` over the section axis: `sos` [..., S, 6], rate [...] -> [..., F]."""
    rate = np.asarray(sample_rate_hz, dtype=np.float64)[..., np.newaxis]
    return np.asarray(np.prod(section_response(sos, f_hz[..., np.newaxis, :], rate), axis=-2))


def unit_delay_complement(f_hz: FloatArray, sample_rate_hz: ArrayLike) -> ComplexArray:
    """u = 1 - e^{-jw}, w = 2πf/fs, shape [..., F]."""
    half_w = np.pi * f_hz / np.asarray(sample_rate_hz, dtype=np.float64)[..., np.newaxis]
    sine = np.sin(half_w)
    return np.asarray(2.0 * sine**2 + 1j * (2.0 * sine * np.cos(half_w)))


def polynomial(c: FloatArray, u: ComplexArray) -> ComplexArray:
    """c0 + c1·z⁻¹ + c2·z⁻² at z⁻¹ = 1 - u: `c` [..., 3], `u` [..., F] -> [..., F]."""
    c0, c1, c2 = c[..., 0, np.newaxis], c[..., 1, np.newaxis], c[..., 2, np.newaxis]
    return np.asarray((c0 + c1 + c2) - u * ((c1 + 2.0 * c2) - c2 * u))


def section_group_delay(sos: FloatArray, f_hz: FloatArray, sample_rate_hz: ArrayLike) -> FloatArray:
    """-dφ/dω of each section in seconds, shape [..., F]."""
    u = unit_delay_complement(f_hz, sample_rate_hz)
    samples = delay_in_samples(sos[..., :3], u) - delay_in_samples(sos[..., 3:], u)
    return np.asarray(samples / np.asarray(sample_rate_hz, dtype=np.float64)[..., np.newaxis])


def delay_in_samples(c: FloatArray, u: ComplexArray) -> FloatArray:
    """Re(Σ n·c_n·z⁻ⁿ / Σ c_n·z⁻ⁿ), the group delay of a polynomial in z⁻¹ in samples; 0 at a root on the circle."""
    p = polynomial(c, u)
    z1 = 1.0 - u
    ramp = z1 * (c[..., 1, np.newaxis] + 2.0 * c[..., 2, np.newaxis] * z1)
    power = p.real**2 + p.imag**2
    product = ramp.real * p.real + ramp.imag * p.imag
    return np.divide(product, power, out=np.zeros_like(power), where=power > 0.0)
