"""H(s) on the imaginary axis: response and group delay of analog sections."""

from __future__ import annotations

import numpy as np

from a2d.arrays import ComplexArray, FloatArray


def section_response(b: FloatArray, a: FloatArray, f_hz: FloatArray) -> ComplexArray:
    """H(j2πf) of each section.

    Parameters
    ----------
    b, a
        Shape [..., 3], coefficients of s², s, 1; s in rad/s.
    f_hz
        Frequencies in Hz, shape [F] or [..., F] with the sections' leading axes.

    Returns
    -------
    Complex, shape [..., F].
    """
    w = 2.0 * np.pi * f_hz
    return polynomial(b, w) / polynomial(a, w)


def chain_response(b: FloatArray, a: FloatArray, f_hz: FloatArray) -> ComplexArray:
    """The product of `section_response` over the section axis: `b`, `a` [..., S, 3] -> [..., F]."""
    return np.asarray(np.prod(section_response(b, a, f_hz[..., np.newaxis, :]), axis=-2))


def polynomial(c: FloatArray, w: FloatArray) -> ComplexArray:
    """c2·s² + c1·s + c0 at s = jw: `c` [..., 3], `w` [..., F] in rad/s -> [..., F]."""
    real = c[..., 2, np.newaxis] - c[..., 0, np.newaxis] * w**2
    return np.asarray(real + 1j * (c[..., 1, np.newaxis] * w))


def section_group_delay(b: FloatArray, a: FloatArray, f_hz: FloatArray) -> FloatArray:
    """-dφ/dω of each section in seconds, shape [..., F].

    With P(jω) = R + jX, d(arg P)/dω = (R X' - X R')/(R² + X²).
    """
    w = 2.0 * np.pi * f_hz
    return phase_slope(a, w) - phase_slope(b, w)


def phase_slope(c: FloatArray, w: FloatArray) -> FloatArray:
    """d(arg P(jw))/dw of c2·s² + c1·s + c0, in seconds; 0 at a root that lies on the axis."""
    p = polynomial(c, w)
    power = p.real**2 + p.imag**2
    slope = p.real * c[..., 1, np.newaxis] + p.imag * 2.0 * c[..., 0, np.newaxis] * w
    return np.divide(slope, power, out=np.zeros_like(power), where=power > 0.0)
