"""Closed forms that keep the magnitude up to half the rate: exponential poles, zeros from the squared magnitude."""

from __future__ import annotations

from collections.abc import Callable
from typing import NamedTuple

import numpy as np

from a2d import checks
from a2d.analog.response import polynomial
from a2d.arrays import BoolArray, FloatArray
from a2d.digital import warped
from a2d.digital.exponential import above_half_rate, map_roots, own_poles
from a2d.digital.refusal import refuse
from a2d.digital.shapes import Shape, gain_at_zero, shape_of


def magnitude_matched(
    b: FloatArray, a: FloatArray, sample_rate_hz: FloatArray, match_hz: FloatArray, band_hz: FloatArray
) -> FloatArray:
    """Second-order sections with the analog poles mapped by e^{s/fs} and zeros that restore the magnitude.

    Value and slope of the squared magnitude are exact at `match_hz`, the value also at 0 Hz; low-pass sections (no
    zero) and high-pass sections (both zeros at 0) have one number less or two and keep the value only. A section
    whose zeros are less damped than its poles (a cut, a notch) is the reciprocal of the twin of its own reciprocal,
    so that a cut mirrors its boost. M. Vicanek, Matched Second Order Digital Filters (2016), gives the forms for
    low-, high-, band-pass and peaking sections; docs/fidelity.md derives the same step for any numerator.

    Parameters
    ----------
    b, a
        Shape [..., 3], coefficients of s², s, 1; s in rad/s.
    sample_rate_hz, match_hz
        Shape [...] or broadcastable to it, Hz; match below half the sample rate.
    band_hz
        Not used by this method.

    Returns
    -------
    Shape [..., 6]: b0, b1, b2, 1, a1, a2.

    Raises
    ------
    SectionRefused
        The section has no such twin; the message says why and names another method.
    """
    del band_hz
    checks.below_half_rate("the match frequency", match_hz, sample_rate_hz)
    lead = np.broadcast_shapes(b.shape[:-1], sample_rate_hz.shape, match_hz.shape)
    shape = shape_of(np.broadcast_to(b, (*lead, 3)), np.broadcast_to(a, (*lead, 3)))
    _refuse_unmappable(shape)
    flat = Shape(shape.b.reshape(-1, 3), shape.a.reshape(-1, 3))
    rate, match = (np.broadcast_to(v, lead).ravel() for v in (sample_rate_hz, match_hz))
    return _by_form(flat, rate, match).reshape(*lead, 6)


def _refuse_unmappable(shape: Shape) -> None:
    refuse(shape.improper, "magnitude_matched needs as many poles as zeros: the section has more zeros")
    refuse(~shape.stable, "magnitude_matched needs poles in the left half-plane")


def _by_form(shape: Shape, rate: FloatArray, match: FloatArray) -> FloatArray:
    """Each section of `shape` [N] by the first form in FORMS that it is one of; shape [N, 6]."""
    sos = np.empty((len(rate), 6))
    left = np.ones(len(rate), dtype=np.bool_)
    for is_one, form in FORMS:
        rows = left & is_one(shape)
        left &= ~rows
        if np.any(rows):
            sos[rows] = _with_rows(form, shape.b[rows], shape.a[rows], rate[rows], match[rows])
    return sos


def _with_rows(form: Form, b: FloatArray, a: FloatArray, rate: FloatArray, match: FloatArray) -> FloatArray:
    numerator, denominator = form(b, a, rate, match)
    refuse(
        ~np.all(np.isfinite(numerator), axis=-1),
        "magnitude_matched has no real zeros that give this section's magnitude; minimax has",
    )
    return np.concatenate([numerator, denominator], axis=-1) / denominator[..., :1]


def _gain(b: FloatArray, a: FloatArray, rate: FloatArray, match: FloatArray) -> Polynomials:
    one = np.broadcast_to(np.array([1.0, 0.0, 0.0]), b.shape)
    return one * gain_at_zero(b, a)[..., np.newaxis], one


def _own_poles(b: FloatArray, a: FloatArray, rate: FloatArray, match: FloatArray) -> Polynomials:
    sos = own_poles(Shape(b, a), rate)
    return sos[:, :3], sos[:, 3:]


def _allpass(b: FloatArray, a: FloatArray, rate: FloatArray, match: FloatArray) -> Polynomials:
    """The numerator is the denominator reversed, in the order that the section has."""
    d = _poles(a, rate)
    reversed_d = np.where((a[..., :1] != 0.0), d[..., ::-1], d[..., [1, 0, 2]])
    return reversed_d * gain_at_zero(b, a)[..., np.newaxis], d


def _reciprocal(b: FloatArray, a: FloatArray, rate: FloatArray, match: FloatArray) -> Polynomials:
    denominator, numerator = _general(a, b, rate, match)
    inside = np.abs(denominator[..., 2]) < np.abs(denominator[..., 0])
    return np.where(inside[..., np.newaxis], numerator, np.nan), denominator


def _lowpass(b: FloatArray, a: FloatArray, rate: FloatArray, match: FloatArray) -> Polynomials:
    """B(1) from 0 Hz, B(-1) from the match frequency, b2 = 0 (Vicanek 2016, low-pass)."""
    at = _target(b, a, rate, match)
    high = np.sign(at.low) * _root((at.value - at.low**2 * (1.0 - at.p)) / at.p)
    ends = [0.5 * (at.low + high), 0.5 * (at.low - high), np.zeros_like(high)]
    return np.stack(ends, axis=-1), _poles(a, rate)


def _highpass(b: FloatArray, a: FloatArray, rate: FloatArray, match: FloatArray) -> Polynomials:
    """g·(1 - z⁻¹)ⁿ, n zeros at 0 Hz, g from the match frequency (Vicanek 2016, high-pass)."""
    double = b[..., 0] != 0.0
    at = _target(b, a, rate, match)
    size = np.sqrt(at.value / np.where(double, (4.0 * at.p) ** 2, 4.0 * at.p))
    gain = size * np.sign(np.where(double, b[..., 0], b[..., 1]))
    zeros = np.where(double[..., np.newaxis], [1.0, -2.0, 1.0], [1.0, -1.0, 0.0])
    return gain[..., np.newaxis] * zeros, _poles(a, rate)


def _first_order(b: FloatArray, a: FloatArray, rate: FloatArray, match: FloatArray) -> Polynomials:
    """b0 + b1 from 0 Hz, |b0 - b1| from the match frequency; a zero in the right half-plane is put outside."""
    numerator, d = _lowpass(b, a, rate, match)
    flip = (b[..., 1] * b[..., 2] < 0.0)[..., np.newaxis]
    return np.where(flip, numerator[..., [1, 0, 2]], numerator), d


def _first_order_reciprocal(b: FloatArray, a: FloatArray, rate: FloatArray, match: FloatArray) -> Polynomials:
    denominator, numerator = _first_order(a, b, rate, match)
    return numerator, denominator


def _general(b: FloatArray, a: FloatArray, rate: FloatArray, match: FloatArray) -> Polynomials:
    """Value at 0 Hz, value and slope at the match frequency (Vicanek 2016, peaking, for any numerator).

    |B|² = B0·(1 - p) + B1·p + 4·B2·p·(1 - p) with B0 = B(1)², B1 = B(-1)², B2 = -4·b0·b2. With the value R and the
    slope R' wanted at p: B2 = (R - B0 - R'·p)/(4·p²), B1 = R' + B0 - 4·(1 - 2p)·B2. The signs of B(1) and B(-1) are
    those of H(0) and H(j∞), and the zeros lie where the analog section's do.
    """
    refuse(
        above_half_rate(a, rate),
        "magnitude_matched cannot map a resonance at or above half the sample rate; minimax fits the band below it",
    )
    lead = np.where(b[..., 0] != 0.0, b[..., 0], np.where(b[..., 1] != 0.0, b[..., 1], b[..., 2]))
    at = _target(b, a, rate, match)
    product = (at.value - at.low**2 - at.slope * at.p) / (4.0 * at.p**2)
    high = _root(at.slope + at.low**2 - 4.0 * (1.0 - 2.0 * at.p) * product) * np.where(
        lead * a[..., 0] < 0.0, -1.0, 1.0
    )
    middle = 0.5 * (at.low + high)
    outward = np.where(b[..., 1] * lead < 0.0, -1.0, 1.0) * np.where(middle < 0.0, -1.0, 1.0)
    first = 0.5 * (middle + outward * _root(middle**2 + product))
    return np.stack([first, 0.5 * (at.low - high), middle - first], axis=-1), _poles(a, rate)


def _poles(a: FloatArray, rate: FloatArray) -> FloatArray:
    """The monic denominator in z⁻¹ with exponentially mapped poles, shape [..., 3]."""
    return warped.to_z(map_roots(a, rate), a[..., 0] == 0.0)


class _Target(NamedTuple):
    """What the numerator has to be; every field [...].

    B(1); and at the match frequency p = sin²(w/2), the value of |B|² and its slope in p.
    """

    low: FloatArray
    p: FloatArray
    value: FloatArray
    slope: FloatArray


def _target(b: FloatArray, a: FloatArray, rate: FloatArray, match: FloatArray) -> _Target:
    """|D|²·|H|² and its slope at the match frequency, D the digital denominator and H the analog section."""
    w = 2.0 * np.pi * match / rate
    d = map_roots(a, rate)
    ratio, ratio_slope = _denominators(d, a, rate, w)
    power, power_slope = _power_and_slope(b, w * rate)
    value = ratio * power
    slope = value * (ratio_slope + power_slope * rate) * 2.0 / np.sin(w)
    low = d[..., 2] * np.where(a[..., 0] == 0.0, 2.0, 4.0) * gain_at_zero(b, a)
    return _Target(low, np.sin(0.5 * w) ** 2, value, slope)


def _denominators(d: FloatArray, a: FloatArray, rate: FloatArray, w: FloatArray) -> tuple[FloatArray, FloatArray]:
    """|D|²/|A|² at w, and its slope over w divided by itself; D is `d` [..., 3] in v, A is `a` [..., 3] in s.

    Where the roots of both lie on the axis at w, these are the limits: with |D|² = 4·(cos w - cos u)² and
    |A|² = a2²·(w² - u²)²·fs⁴ the ratio tends to (sin u/(a2·u·fs²))², the slope to cot u - 1/u.
    """
    order, tangent = np.where(a[..., 0] == 0.0, 1.0, 2.0), np.tan(0.5 * w)
    digital, digital_slope = _power_and_slope(d, tangent)
    digital = digital * (2.0 * np.cos(0.5 * w)) ** (2.0 * order)
    analog, analog_slope = _power_and_slope(a, w * rate)
    on_axis = _roots_at(a, w * rate)
    lead = np.where(a[..., 0] != 0.0, a[..., 0], 1.0)
    with np.errstate(divide="ignore", invalid="ignore"):
        slope = 0.5 * (1.0 + tangent**2) * digital_slope - order * tangent - analog_slope * rate
        ratio = np.where(on_axis, (np.sin(w) / (lead * w * rate**2)) ** 2, digital / analog)
    return ratio, np.where(on_axis, 1.0 / np.tan(w) - 1.0 / w, slope)


def _roots_at(c: FloatArray, w: FloatArray) -> BoolArray:
    """Whether `c` has its roots on the axis, at w (rad/s) to within rounding and the noise that it brings."""
    return np.asarray((c[..., 1] == 0.0) & (np.abs(c[..., 2] - c[..., 0] * w * w) <= 1e-6 * np.abs(c[..., 2])))


def _power_and_slope(c: FloatArray, w: FloatArray) -> tuple[FloatArray, FloatArray]:
    """|P(jw)|² of c2·s² + c1·s + c0 and its slope over w divided by itself; each [...]."""
    value = polynomial(c, w[..., np.newaxis])[..., 0]
    power = value.real**2 + value.imag**2
    slope = 2.0 * (value.real * (-2.0 * c[..., 0] * w) + value.imag * c[..., 1])
    return power, np.divide(slope, power, where=power > 0.0, out=np.zeros_like(power))


def _root(square: FloatArray) -> FloatArray:
    """The square root, NaN where there is none."""
    return np.sqrt(np.where(square < 0.0, np.nan, square))


def _less_damped_zeros(shape: Shape) -> BoolArray:
    """Zeros in the left half-plane or on the axis whose decay rate c1/c2 (or c0/c1) lies below the poles'."""
    b, a, second = np.abs(shape.b), np.abs(shape.a), shape.second_order
    invertible = shape.minimum_phase & (b[..., 2] > 0.0) & np.where(second, b[..., 0] > 0.0, b[..., 1] > 0.0)
    zeros = np.where(second, b[..., 1] * a[..., 0], b[..., 2] * a[..., 1])
    poles = np.where(second, a[..., 1] * b[..., 0], a[..., 2] * b[..., 1])
    return np.asarray(invertible & (zeros < poles))


Polynomials = tuple[FloatArray, FloatArray]
Form = Callable[[FloatArray, FloatArray, FloatArray, FloatArray], Polynomials]

FORMS: tuple[tuple[Callable[[Shape], BoolArray], Form], ...] = (
    (lambda s: s.gain, _gain),
    (lambda s: s.own_poles_only, _own_poles),
    (lambda s: s.allpass, _allpass),
    (lambda s: s.lowpass, _lowpass),
    (lambda s: s.highpass | (s.first_order & (s.b[..., 2] == 0.0)), _highpass),
    (lambda s: s.first_order & _less_damped_zeros(s), _first_order_reciprocal),
    (lambda s: s.first_order, _first_order),
    (_less_damped_zeros, _reciprocal),
    (lambda s: s.second_order, _general),
)
