"""What a section is, read from its own coefficients, so that sections out of networks are recognised as well."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from a2d.arrays import BoolArray, FloatArray

EVERYWHERE_RAD_S = (2.0 * np.pi * 1.0, 2.0 * np.pi * 100_000.0)
"""A term that makes no difference from 1 Hz to 100 kHz is not there."""
NEGLIGIBLE = 1e-8
"""... no difference: this part of the largest term, less than 1e-7 dB; rounding in a network leaves some 1e-13."""
NO_DAMPING = 1e-12
"""1/Q below which a pair of zeros lies on the axis."""
SAME = 1e-12
"""The relative difference at which zeros count as lying where the poles lie."""
MIRRORED = 1e-9
"""The relative difference at which zeros count as the mirrored poles of an all-pass section."""


@dataclass(frozen=True, eq=False)
class Shape:
    """The shape of each section, from the terms that its polynomials have; every field has the leading axes [...].

    `b` and `a` [..., 3] are the coefficients of s², s, 1 with a's leading coefficient positive and terms that make no
    difference set to zero.
    """

    b: FloatArray
    a: FloatArray

    @property
    def gain(self) -> BoolArray:
        """H(s) is a constant: no term in s anywhere."""
        return _absent(self.a, 0, 1) & _absent(self.b, 0, 1)

    @property
    def first_order(self) -> BoolArray:
        """One pole and no term in s²."""
        return np.asarray(_absent(self.a, 0) & (self.a[..., 1] != 0.0) & _absent(self.b, 0))

    @property
    def second_order(self) -> BoolArray:
        """Two poles."""
        return np.asarray(self.a[..., 0] != 0.0)

    @property
    def own_poles_only(self) -> BoolArray:
        """Two or one poles, and zeros in the same places: a peaking section or a shelf of 0 dB."""
        expected = self.a * gain_at_zero(self.b, self.a)[..., np.newaxis]
        close = np.all(np.abs(self.b - expected) <= SAME * np.abs(expected), axis=-1)
        return np.asarray(close & (self.second_order | self.first_order))

    @property
    def improper(self) -> BoolArray:
        """More zeros than poles: the gain grows without bound."""
        return ~(self.gain | self.first_order | self.second_order)

    @property
    def stable(self) -> BoolArray:
        """Every pole in the left half-plane: all coefficients down from the leading one positive (Hurwitz, n ≤ 2)."""
        hurwitz = np.where(self.second_order, np.all(self.a > 0.0, axis=-1), np.all(self.a[..., 1:] > 0.0, axis=-1))
        return np.asarray(self.gain | hurwitz)

    @property
    def lowpass(self) -> BoolArray:
        """Two poles, no zero."""
        return self.second_order & _absent(self.b, 0, 1)

    @property
    def highpass(self) -> BoolArray:
        """Two poles, two zeros at 0."""
        return self.second_order & _absent(self.b, 1, 2)

    @property
    def notch(self) -> BoolArray:
        """Two poles and a pair of zeros on the axis, away from 0."""
        return np.asarray(self.second_order & (self.b[..., 1] == 0.0) & (self.b[..., 0] * self.b[..., 2] > 0.0))

    @property
    def allpass(self) -> BoolArray:
        """The zeros are the poles mirrored in the axis: |H| is constant."""
        even = np.where(self.second_order[..., np.newaxis], [1.0, -1.0, 1.0], [0.0, -1.0, 1.0])
        expected = self.a * even * gain_at_zero(self.b, self.a)[..., np.newaxis]
        close = np.all(np.abs(self.b - expected) <= MIRRORED * np.abs(expected), axis=-1)
        return np.asarray(close & (self.second_order | self.first_order))

    @property
    def minimum_phase(self) -> BoolArray:
        """No zero in the right half-plane: the coefficients have one sign."""
        return np.asarray(np.all(self.b >= 0.0, axis=-1) | np.all(self.b <= 0.0, axis=-1))


def shape_of(b: FloatArray, a: FloatArray) -> Shape:
    """The `Shape` of sections `b`, `a` [..., 3] (coefficients of s², s, 1; s in rad/s)."""
    b, a = _without_residue(b), _without_residue(a)
    leading = np.where(a[..., 0] != 0.0, a[..., 0], np.where(a[..., 1] != 0.0, a[..., 1], a[..., 2]))
    sign = np.where(leading < 0.0, -1.0, 1.0)[..., np.newaxis]
    return Shape(b * sign, a * sign)


def gain_at_zero(b: FloatArray, a: FloatArray) -> FloatArray:
    """H(0) = b0/a0, shape [...]; 0 where the section has a pole at 0, which no stable section has."""
    return np.divide(b[..., 2], a[..., 2], out=np.zeros(b.shape[:-1]), where=a[..., 2] != 0.0)


def _without_residue(c: FloatArray) -> FloatArray:
    """`c` [..., 3] with the terms that make no difference on the axis from 1 Hz to 100 kHz set to 0."""
    low, high = (np.abs(c) * np.array([w * w, w, 1.0]) for w in EVERYWHERE_RAD_S)
    keep_square = high[..., 0] > NEGLIGIBLE * np.maximum(high[..., 1], high[..., 2])
    keep_constant = low[..., 2] > NEGLIGIBLE * np.maximum(low[..., 1], low[..., 0])
    ends = np.sqrt(np.abs(c[..., 0]) * np.abs(c[..., 2]))
    keep_linear = (np.abs(c[..., 1]) > NO_DAMPING * ends) & (
        (high[..., 1] > NEGLIGIBLE * np.maximum(high[..., 0], high[..., 2]))
        | (low[..., 1] > NEGLIGIBLE * np.maximum(low[..., 0], low[..., 2]))
        | (ends > 0.0)
    )
    return np.where(np.stack([keep_square, keep_linear, keep_constant], axis=-1), c, 0.0)


def _absent(c: FloatArray, *terms: int) -> BoolArray:
    return np.asarray(np.all(c[..., list(terms)] == 0.0, axis=-1))
