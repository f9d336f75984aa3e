"""From analog sections to approximation problems, and from the solved polynomials back to signed numerators."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from a2d.analog.response import polynomial
from a2d.arrays import BoolArray, ComplexArray, FloatArray, IntArray
from a2d.digital.rational.problem import Problem
from a2d.digital.shapes import Shape

LOG_POINTS, TOP_POINTS, RESONANCE_POINTS = 36, 28, 20
"""Grid points: spread over the logarithm of the band, crowded to its ends, and about each resonance."""
FARTHEST_BELOW = 1e-4
"""The fit reaches below the band to half the lowest root's frequency, but no further than this part of its end."""
CARRY_ON, LAST = 1.1, 0.98
"""A fit that is carried on ends at CARRY_ON times the resonance, which has to lie below LAST of half the rate."""
BEYOND = 0.03
"""The weight of errors above the band in such a fit."""
HIGHEST_ROOT = 0.93
"""Of half the rate: roots that oscillate faster count as there when the first reference is set."""
FAR = -1e30
"""t, or s, of a root that is not there."""


@dataclass(frozen=True, eq=False)
class Setting:
    """N sections of one shape: `shape`, their `rate` [N] and `band` [N, 2] in Hz, and what of them is free.

    `zeros`, `poles` count the free roots; the zeros that stay where they are make the fixed factor of the numerator.
    `weight` [2, W] holds frequencies in Hz, rising, and factors on the error between which it runs straight. Above
    `counts_to` [N], Hz, errors count no more than BEYOND.
    """

    shape: Shape
    rate: FloatArray
    band: FloatArray
    zeros: int
    poles: int
    weight: FloatArray | None = None
    counts_to: FloatArray | None = None

    @property
    def half_angle(self) -> FloatArray:
        """π/fs, shape [N, 1]: half the angle on the circle a hertz."""
        return (np.pi / self.rate)[:, np.newaxis]

    def rows(self, which: BoolArray | IntArray) -> Setting:
        """The sections `which` of these."""
        shape = Shape(self.shape.b[which], self.shape.a[which])
        counts_to = None if self.counts_to is None else self.counts_to[which]
        return replace(self, shape=shape, rate=self.rate[which], band=self.band[which], counts_to=counts_to)


def free_zeros(shape: Shape, rate: FloatArray) -> FloatArray:
    """How many zeros each section has to be given a place for, shape [N].

    Zeros at 0 and pairs on the axis below half the rate stay where they are.
    """
    b = shape.b
    at_zero = np.where(b[:, 2] != 0.0, 0, np.where(b[:, 1] != 0.0, 1, 2))
    pair = shape.notch & (axis_tangent(shape, rate) < np.inf)
    order = np.where(shape.second_order, 2, np.where(shape.first_order, 1, 0))
    return np.asarray(np.where(pair, 0, np.maximum(order - at_zero, 0)))


def axis_tangent(shape: Shape, rate: FloatArray) -> FloatArray:
    """tan²(w/2) of a pair of zeros on the axis, shape [N]; infinite at and above half the rate."""
    lead = np.where(shape.b[:, 0] == 0.0, 1.0, shape.b[:, 0])
    half = 0.5 * np.sqrt(np.abs(shape.b[:, 2] / lead)) / rate
    return np.where(half < 0.5 * np.pi, np.tan(np.minimum(half, 1.57)) ** 2, np.inf)


def frequencies(setting: Setting) -> FloatArray:
    """Each section's grid in Hz, shape [N, G], ascending: from below the band, where a root lies there, to its top."""
    shape, high = setting.shape, setting.band[:, 1]
    centres, widths = zip(*(_resonance_hz(c) for c in (shape.b, shape.a)), strict=True)
    lowest = np.minimum(*(_slowest(centre, width) for centre, width in zip(centres, widths, strict=True)))
    low = np.minimum(setting.band[:, 0], np.maximum(0.5 * lowest, FARTHEST_BELOW * setting.band[:, 0]))
    steps = np.linspace(0.0, 1.0, LOG_POINTS)
    spread = low[:, np.newaxis] * (high / low)[:, np.newaxis] ** steps
    crowd = 0.5 - 0.5 * np.cos(np.pi * (np.arange(TOP_POINTS) + 0.5) / TOP_POINTS)
    parts = [spread, low[:, np.newaxis] + (high - low)[:, np.newaxis] * crowd]
    fan = np.tan(np.linspace(-1.45, 1.45, RESONANCE_POINTS))
    for centre, width in zip(centres, widths, strict=True):
        inner = (
            np.where(centre > 0.0, centre, 0.5 * high)[:, np.newaxis]
            + np.maximum(width, 1e-3 * centre)[:, np.newaxis] * fan
        )
        parts.append(np.clip(inner, low[:, np.newaxis], high[:, np.newaxis]))
    return np.sort(np.concatenate(parts, axis=1), axis=1)


def _resonance_hz(c: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Modulus and half-width of the roots of `c` [N, 3] in Hz; 0 where there is none away from 0."""
    two = (c[:, 0] != 0.0) & (c[:, 2] != 0.0)
    lead = np.where(two, np.abs(c[:, 0]), np.where(c[:, 1] != 0.0, np.abs(c[:, 1]), 1.0))
    centre = np.where(two, np.sqrt(np.abs(c[:, 2]) / lead), np.where(c[:, 1] != 0.0, np.abs(c[:, 2]) / lead, 0.0))
    width = np.where(two, 0.5 * np.abs(c[:, 1]) / lead, centre)
    return centre / (2.0 * np.pi), width / (2.0 * np.pi)


def _slowest(centre: FloatArray, width: FloatArray) -> FloatArray:
    """About the modulus of the slower root: that of both, or centre²/(2·width) where they are real and far apart."""
    slow = centre * np.minimum(1.0, 0.5 * centre / np.where(width > 0.0, width, 1.0))
    return np.where(centre > 0.0, np.where(width > 0.0, slow, centre), np.inf)


def resonates_above(setting: Setting) -> BoolArray:
    """Whether a free root oscillates above the band and below what the fit can be carried on to, shape [N]."""
    highest = _highest_hz(setting)
    return np.asarray((highest > setting.band[:, 1]) & (CARRY_ON * highest < LAST * 0.5 * setting.rate))


def up_to_resonance(setting: Setting) -> Setting:
    """The same with the band carried on past the highest resonance.

    Where the best fit of the band alone would set poles or zeros on the circle above it.
    """
    top = np.maximum(setting.band[:, 1], CARRY_ON * _highest_hz(setting))
    return replace(setting, band=np.stack([setting.band[:, 0], top], axis=-1), counts_to=setting.band[:, 1])


def _highest_hz(setting: Setting) -> FloatArray:
    """The greatest modulus, below half the rate, of roots that oscillate; 0 where there are none; shape [N]."""
    found = []
    for c, count in ((setting.shape.b, setting.zeros), (setting.shape.a, setting.poles)):
        centre, width = _resonance_hz(c)
        counts = (count == 2) & (width < centre) & (centre < LAST * 0.5 * setting.rate / CARRY_ON)
        found.append(np.where(counts, centre, 0.0))
    return np.maximum(*found)


def problem_of(setting: Setting, f_hz: FloatArray) -> Problem:
    """The approximation problem of `setting` on the grid `f_hz` [N, G]."""
    t = np.tan(setting.half_angle * f_hz) ** 2
    shape, w = setting.shape, 2.0 * np.pi * f_hz
    numerator = _without_fixed_zeros(setting, w, t)
    target = numerator - np.log(np.abs(polynomial(shape.a, w)) ** 2)
    weight = np.ones_like(t) if setting.weight is None else np.interp(f_hz, setting.weight[0], setting.weight[1])
    if setting.counts_to is not None:
        weight = np.where(f_hz > setting.counts_to[:, np.newaxis] * (1.0 + 1e-9), BEYOND * weight, weight)
    return Problem(t, target, weight, setting.zeros, setting.poles)


def _without_fixed_zeros(setting: Setting, w: FloatArray, t: FloatArray) -> FloatArray:
    """ln |b(jw)|² less that of the fixed factor: tⁿ for n zeros at 0, (t - τ)² for a pair on the axis at t = τ."""
    b, shape = setting.shape.b, setting.shape
    with np.errstate(divide="ignore", invalid="ignore"):
        plain = np.log(np.abs(polynomial(b, w)) ** 2)
        at_zero = np.where(b[:, 2] != 0.0, 0.0, np.where(b[:, 1] != 0.0, 1.0, 2.0))[:, np.newaxis] * np.log(t)
    pair = shape.notch & (setting.zeros == 0)
    if not np.any(pair):
        return np.asarray(plain - at_zero)
    tau = axis_tangent(shape, setting.rate)[:, np.newaxis]
    return np.where(pair[:, np.newaxis], _pair_quotient(setting, w, t, tau), plain - at_zero)


def _pair_quotient(setting: Setting, w: FloatArray, t: FloatArray, tau: FloatArray) -> FloatArray:
    """ln (b0 - b2·w²)²/(t - τ)², with its limit (b2·dw²/dt)² at the zeros, dw²/dt = 2·w·fs/((1 + t)·sqrt(t))."""
    b = setting.shape.b
    near = np.abs(t - tau) <= 1e-7 * tau
    value = np.where(near, 1.0, (b[:, 2:] - b[:, :1] * w * w) / np.where(near, 1.0, t - tau))
    limit = b[:, :1] * 2.0 * w * setting.rate[:, np.newaxis] / ((1.0 + t) * np.sqrt(np.maximum(t, 1e-300)))
    return np.asarray(2.0 * np.log(np.abs(np.where(near, limit, value))))


def known_roots(setting: Setting) -> ComplexArray:
    """t of the free zeros and the poles by the exponential mapping, shape [N, zeros + poles]."""
    found = []
    for c, count in ((setting.shape.b, setting.zeros), (setting.shape.a, setting.poles)):
        s = _roots(c)[:, :count]
        there = s.real > FAR
        s = s / (2.0 * setting.rate[:, np.newaxis])
        limit = 0.5 * np.pi * HIGHEST_ROOT
        inner = np.clip(s.real, -20.0, 20.0) + 1j * np.clip(s.imag, -limit, limit)
        found.append(np.where(there, -(np.tanh(np.where(there, inner, 0.0)) ** 2), FAR))
    return np.concatenate(found, axis=1)


def _roots(c: FloatArray) -> ComplexArray:
    """The roots of `c` [N, 3], those away from 0 first, beyond FAR where there is none; shape [N, 2]."""
    c2, c1, c0 = c[:, 0], c[:, 1], c[:, 2]
    square = np.sqrt(c1 * c1 - 4.0 * c2 * c0 + 0j)
    q = -0.5 * (c1 + np.where(c1 < 0.0, -1.0, 1.0) * square)
    none = np.full(len(c), 2.0 * FAR + 0j)
    first = np.divide(q, c2, where=c2 != 0.0, out=none.copy())
    second = np.divide(c0 + 0j, q, where=(q != 0.0) & (c0 != 0.0), out=none.copy())
    return np.where((c2 != 0.0)[:, np.newaxis], np.stack([first, second], axis=1), np.stack([second, first], axis=1))


def signs(setting: Setting) -> FloatArray:
    """The sign of each coefficient of the numerator in v, shape [N, 3]; a term that s lacks takes that of the next."""
    b = setting.shape.b
    constant = np.where(b[:, 2] != 0.0, np.sign(b[:, 2]), 1.0)
    linear = np.where(b[:, 1] != 0.0, np.sign(b[:, 1]), constant)
    return np.stack([np.where(b[:, 0] != 0.0, np.sign(b[:, 0]), linear), linear, constant], axis=-1)


def split_zeros(setting: Setting) -> BoolArray:
    """Whether two free zeros lie one in each half-plane, shape [N]."""
    sign = signs(setting)
    return np.asarray((setting.zeros == 2) & (sign[:, 0] * sign[:, 2] < 0.0))


def whole_numerator(setting: Setting, c: FloatArray) -> FloatArray:
    """The numerator in v of the free part `c` [N, 3] and the fixed zeros, with the analog section's signs; [N, 3]."""
    size, b = np.abs(c), setting.shape.b
    zero, free = np.zeros(len(c)), size[:, 2]
    if setting.zeros == 0:
        tau = np.where(setting.shape.notch, axis_tangent(setting.shape, setting.rate), 0.0)
        two = setting.poles == 2
        whole = np.stack([free if two else zero, zero if two else free, np.where(tau > 0.0, tau * free, 0.0)], axis=-1)
    elif setting.zeros == 1 and setting.poles == 2:
        whole = np.stack([size[:, 1], size[:, 2], zero], axis=-1)
    else:
        whole = size
    sign = signs(setting)
    at_zero = (b[:, 2] == 0.0) & (b[:, 1] != 0.0) & (setting.poles == 2)
    sign = np.where(at_zero[:, np.newaxis], np.stack([sign[:, 0], sign[:, 1], sign[:, 1]], axis=-1), sign)
    return whole * sign
