"""Roots by the exponential mapping z = e^{s/fs}."""

from __future__ import annotations

import numpy as np

from a2d.arrays import BoolArray, FloatArray
from a2d.digital.shapes import Shape, gain_at_zero
from a2d.digital.warped import to_z


def map_roots(c: FloatArray, sample_rate_hz: FloatArray) -> FloatArray:
    """The polynomial in v (see a2d.digital.warped) whose roots are e^{r/fs} for the roots r of c2·s² + c1·s + c0.

    Parameters
    ----------
    c
        Shape [..., 3], coefficients of s², s, 1; roots in the left half-plane or on the axis.
    sample_rate_hz
        Shape [...], Hz.

    Returns
    -------
    Shape [..., 3], coefficients of v², v, 1, scaled so that the polynomial in z⁻¹ is monic: with the roots z1, z2
    they are (1 + z1)·(1 + z2)/4, (1 - z1·z2)/2, (1 - z1)·(1 - z2)/4; with one root 0, (1 + z1)/2, (1 - z1)/2.
    """
    two = c[..., 0] != 0.0
    decay, square = _decay_and_square(c, two)
    return np.where(
        two[..., np.newaxis],
        np.where(
            (square < 0.0)[..., np.newaxis],
            _complex_pair(decay / sample_rate_hz, np.sqrt(np.abs(square)) / sample_rate_hz),
            _real_pair(c, decay, np.sqrt(np.abs(square)), sample_rate_hz),
        ),
        _single(c, sample_rate_hz),
    )


def above_half_rate(c: FloatArray, sample_rate_hz: FloatArray) -> BoolArray:
    """Whether the roots of `c` [..., 3] oscillate at or above half the rate, where z = e^{s/fs} folds them down."""
    _, square = _decay_and_square(c, c[..., 0] != 0.0)
    return np.asarray((square < 0.0) & (np.sqrt(np.abs(square)) >= np.pi * sample_rate_hz))


def own_poles(shape: Shape, sample_rate_hz: FloatArray) -> FloatArray:
    """`sos` [N, 6] of sections whose zeros lie where their poles lie: a gain, with the poles mapped.

    The poles stay, so that a control that passes 0 dB moves them evenly; those above half the rate go to 0.
    """
    poles = to_z(map_roots(shape.a, sample_rate_hz), ~shape.second_order)
    folded = above_half_rate(shape.a, sample_rate_hz)
    poles = np.where(folded[:, np.newaxis], np.array([1.0, 0.0, 0.0]), poles)
    poles[:, 0] = 1.0
    return np.concatenate([gain_at_zero(shape.b, shape.a)[:, np.newaxis] * poles, poles], axis=-1)


def _decay_and_square(c: FloatArray, two: BoolArray) -> tuple[FloatArray, FloatArray]:
    """σ and σ² - w² of the roots -σ ± sqrt(σ² - w²) of a quadratic."""
    lead = np.where(two, c[..., 0], 1.0)
    decay = np.where(two, 0.5 * c[..., 1] / lead, 0.0)
    return decay, np.where(two, decay * decay - c[..., 2] / lead, 0.0)


def _complex_pair(decay: FloatArray, angle: FloatArray) -> FloatArray:
    """z = r·e^{±j·angle}, r = e^{-decay}: (1 ± z1)(1 ± z2) = (1 - r)² + 4r·cos² or sin² of angle/2."""
    r, gap = np.exp(-decay), -np.expm1(-decay)
    plus = 0.25 * gap**2 + r * np.cos(0.5 * angle) ** 2
    minus = 0.25 * gap**2 + r * np.sin(0.5 * angle) ** 2
    return np.stack([plus, -0.5 * np.expm1(-2.0 * decay), minus], axis=-1)


def _real_pair(c: FloatArray, decay: FloatArray, beat: FloatArray, rate: FloatArray) -> FloatArray:
    """The slower root as c0/c2 over the faster, which loses no digits when they are far apart."""
    faster = decay + beat
    product = np.divide(c[..., 2], c[..., 0], where=c[..., 0] != 0.0, out=np.zeros_like(decay))
    slower = np.divide(product, faster, where=faster > 0.0, out=np.zeros_like(decay))
    z1, z2, gap1, gap2 = (f(-s / rate) for f in (np.exp, np.expm1) for s in (faster, slower))
    return np.stack([0.25 * (1.0 + z1) * (1.0 + z2), -0.5 * np.expm1(-2.0 * decay / rate), 0.25 * gap1 * gap2], axis=-1)


def _single(c: FloatArray, rate: FloatArray) -> FloatArray:
    """One root -c0/c1; none gives the constant 1."""
    one = c[..., 1] != 0.0
    x = np.divide(c[..., 2], c[..., 1], where=one, out=np.zeros(c.shape[:-1])) / rate
    zero = np.zeros_like(x)
    return np.stack(
        [zero, np.where(one, 0.5 * (1.0 + np.exp(-x)), 0.0), np.where(one, -0.5 * np.expm1(-x), 1.0)], axis=-1
    )
