"""Sections as arrays: what every section kind, circuit and bank gives to the chain."""

from __future__ import annotations

from typing import NamedTuple, TypeAlias

import numpy as np

from a2d.analog.response import section_response
from a2d.arrays import ArrayLike, FloatArray

Coefficients: TypeAlias = tuple[ArrayLike, ArrayLike, ArrayLike]


class Sections(NamedTuple):
    """Analog sections in cascade.

    Attributes
    ----------
    b, a
        Shape [..., S, 3]: coefficients of s², s, 1 of numerator and denominator, s in rad/s.
    f0_hz
        Shape [..., S]: each section's characteristic frequency, Hz.
    """

    b: FloatArray
    a: FloatArray
    f0_hz: FloatArray


def single(
    b: tuple[ArrayLike, ArrayLike, ArrayLike], a: tuple[ArrayLike, ArrayLike, ArrayLike], f0_hz: FloatArray
) -> Sections:
    """One section from coefficients in s normalised to `f0_hz`; all broadcast together to [...]."""
    b2, b1, b0, a2, a1, a0, f0 = np.broadcast_arrays(*b, *a, f0_hz)
    w = 2.0 * np.pi * f0
    powers = np.stack([1.0 / w**2, 1.0 / w, np.ones_like(w)], axis=-1)
    rows_b = np.stack([b2, b1, b0], axis=-1) * powers
    rows_a = np.stack([a2, a1, a0], axis=-1) * powers
    return Sections(rows_b[..., np.newaxis, :], rows_a[..., np.newaxis, :], f0[..., np.newaxis].astype(np.float64))


def scaled(sections: Sections, factor: ArrayLike) -> Sections:
    """The same with a factor on the whole, put on the first section."""
    b = sections.b.copy()
    b[..., 0, :] *= np.asarray(factor, dtype=np.float64)[..., np.newaxis]
    return Sections(b, sections.a, sections.f0_hz)


def normalised(sections: Sections, reference_hz: float, gain: float) -> Sections:
    """The same with |H| = `gain` (a factor) at `reference_hz` (0 allowed); the polarity stays."""
    h = section_response(sections.b, sections.a, np.array([reference_hz]))[..., 0]
    return scaled(sections, gain / np.abs(np.prod(h, axis=-1)))


def amplitude(gain_db: ArrayLike) -> FloatArray:
    """10^(gain/20)."""
    return np.asarray(10.0 ** (np.asarray(gain_db, dtype=np.float64) / 20.0))


def natural_frequency_hz(b: FloatArray, a: FloatArray) -> FloatArray:
    """The characteristic frequency of each section `b`, `a` [..., 3], in Hz, shape [...].

    |p| of the poles: sqrt(a0/a2) for two, a0/a1 for one; where the poles say nothing (a plain gain), that of the
    zeros; where neither does, 1 kHz.
    """

    def modulus(c: FloatArray) -> FloatArray:
        with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
            two = np.sqrt(np.abs(c[..., 2] / c[..., 0]))
            one = np.abs(c[..., 2] / c[..., 1])
        return np.where(c[..., 0] != 0.0, two, np.where(c[..., 1] != 0.0, one, 0.0))

    poles, zeros = modulus(a), modulus(b)
    rad_s = np.where(poles > 0.0, poles, np.where(zeros > 0.0, zeros, 2.0 * np.pi * 1000.0))
    return np.asarray(rad_s / (2.0 * np.pi))
