"""Second-order sections written in v = (1 - z⁻¹)/(1 + z⁻¹), the plane where the unit circle is the axis v = j·tan(w/2).

A polynomial is `c[..., 3]`, coefficients of v², v, 1, as an analog one is of s², s, 1: the left half-plane is the
inside of the circle, so all coefficients positive means all roots inside (Hurwitz for two roots), and the squared
magnitude (c0 - c2·t)² + c1²·t, t = tan²(w/2), loses no digits however low the frequency.
"""

from __future__ import annotations

import numpy as np

from a2d.arrays import BoolArray, FloatArray


def to_z(c: FloatArray, first_order: BoolArray) -> FloatArray:
    """The polynomial in z⁻¹, shape [..., 3]: v replaced, times (1 + z⁻¹)² or, where `first_order` [...], (1 + z⁻¹)."""
    c2, c1, c0 = c[..., 0], c[..., 1], c[..., 2]
    middle = np.where(first_order, c0 - c1, 2.0 * (c0 - c2))
    return np.stack([c2 + c1 + c0, middle, np.where(first_order, 0.0, c2 - c1 + c0)], axis=-1)


def from_z(d: FloatArray, first_order: BoolArray) -> FloatArray:
    """The inverse of `to_z`: `d` [..., 3], coefficients of 1, z⁻¹, z⁻²."""
    d0, d1, d2 = d[..., 0], d[..., 1], d[..., 2]
    first = np.stack([np.zeros_like(d0), 0.5 * (d0 - d1), 0.5 * (d0 + d1)], axis=-1)
    second = np.stack([0.25 * (d0 - d1 + d2), 0.5 * (d0 - d2), 0.25 * (d0 + d1 + d2)], axis=-1)
    return np.where(first_order[..., np.newaxis], first, second)


def to_sos(b: FloatArray, a: FloatArray, first_order: BoolArray) -> FloatArray:
    """`sos` [..., 6] of numerator and denominator `b`, `a` [..., 3] in v."""
    sos = np.concatenate([to_z(b, first_order), to_z(a, first_order)], axis=-1)
    sos /= sos[..., 3:4].copy()
    return np.asarray(sos)


def power(c: FloatArray, t: FloatArray) -> FloatArray:
    """|c(jΩ)|², Ω² = `t` [..., F]; shape [..., F]."""
    c2, c1, c0 = c[..., 0, np.newaxis], c[..., 1, np.newaxis], c[..., 2, np.newaxis]
    return np.asarray((c0 - c2 * t) ** 2 + c1 * c1 * t)
