"""Steps in the coefficients of N(t) and D(t) that keep both positive for all t ≥ 0."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from a2d.arrays import BoolArray, FloatArray
from a2d.digital.rational.problem import Problem
from a2d.digital.warped import power

LEAST_LEFT = 0.1
"""A step leaves at least this part of each of the three positive numbers that a polynomial is made of."""
HALVINGS = 12
NYQUIST_MARGIN = 1e-4
"""Least ratio of a denominator's v² and v coefficients: a real pole stays within 0.9998 of z = -1."""


class Directions(NamedTuple):
    """Directions to move in: coefficients of 1, t, t², shape [N, K, 3], for the numerator and the denominator."""

    b: FloatArray
    a: FloatArray


def directions(problem: Problem, b: FloatArray, a: FloatArray) -> Directions:
    """K directions that span every change of N(t), and of D(t) but for its factor.

    With τ the t of the resonance, held within the grid, they are τ - t, t·(τ - t) and t: well apart however sharp the
    resonance is, where 1, t and t² run together. The denominator goes without t, so D(τ) stays as it is.
    """
    low, high = problem.t[:, 0], problem.t[:, -1]
    return Directions(
        _span(_resonance(b, low, high), problem.zeros), _span(_resonance(a, low, high), problem.poles)[:, :-1]
    )


def _resonance(c: FloatArray, low: FloatArray, high: FloatArray) -> FloatArray:
    t = np.divide(np.abs(c[:, 2]), np.abs(c[:, 0]), out=high.copy(), where=c[:, 0] != 0.0)
    return np.clip(t, low, high)


def _span(tau: FloatArray, degree: int) -> FloatArray:
    """Directions for a polynomial of `degree`, the one to leave out of a denominator last; shape [N, degree + 1, 3]."""
    zero, one = np.zeros_like(tau), np.ones_like(tau)
    if degree == 0:
        return np.stack([one, zero, zero], axis=-1)[:, np.newaxis]
    if degree == 1:
        return np.stack([np.stack([tau, zero, zero], -1), np.stack([zero, one, zero], -1)], axis=1)
    return np.stack(
        [np.stack([tau, -one, zero], -1), np.stack([zero, tau, -one], -1), np.stack([zero, one, zero], -1)], axis=1
    )


def jacobian(problem: Problem, b: FloatArray, a: FloatArray, ways: Directions) -> FloatArray:
    """d error/d step on the grid of `problem`, shape [N, G, K]."""
    t = problem.t
    powers = np.stack([np.ones_like(t), t, t * t], axis=-1)
    scale_b, scale_a = problem.weight / power(b, t), -problem.weight / power(a, t)
    return np.concatenate(
        [
            powers @ ways.b.transpose(0, 2, 1) * scale_b[..., np.newaxis],
            powers @ ways.a.transpose(0, 2, 1) * scale_a[..., np.newaxis],
        ],
        axis=-1,
    )


def move(b: FloatArray, a: FloatArray, ways: Directions, step: FloatArray) -> tuple[FloatArray, FloatArray]:
    """`b`, `a` [N, 3] moved by `step` [N, K], halved until both polynomials stay positive."""
    split = ways.b.shape[1]
    change_b = np.einsum("nk,nkj->nj", step[:, :split], ways.b)
    change_a = np.einsum("nk,nkj->nj", step[:, split:], ways.a)
    new_b, new_a, left = b.copy(), a.copy(), np.ones(len(b), dtype=np.bool_)
    for halving in range(HALVINGS):
        size = 0.5**halving
        moved_b, fits_b = _moved(b, size * change_b)
        moved_a, fits_a = _moved(a, size * change_a)
        fits_a &= moved_a[:, 0] >= np.where(a[:, 0] > 0.0, np.minimum(NYQUIST_MARGIN * moved_a[:, 1], a[:, 0]), 0.0)
        take = left & fits_b & fits_a
        new_b[take], new_a[take] = moved_b[take], moved_a[take]
        left &= ~take
        if not np.any(left):
            break
    return new_b, new_a


def _moved(c: FloatArray, change: FloatArray) -> tuple[FloatArray, BoolArray]:
    """The factor of |c|² + `change` [N, 3] (coefficients of 1, t, t²), and whether enough of it is left.

    |c2·v² + c1·v + c0|² = c0² + (c1² - 2·c0·c2)·t + c2²·t² on the axis. A negative c2 stays negative: one root in
    each half-plane.
    """
    constant, square = c[:, 2] ** 2 + change[:, 0], c[:, 0] ** 2 + change[:, 2]
    fits = (constant >= LEAST_LEFT * c[:, 2] ** 2) & (square >= LEAST_LEFT * c[:, 0] ** 2)
    c0, c2 = np.sqrt(np.maximum(constant, 0.0)), np.copysign(np.sqrt(np.maximum(square, 0.0)), c[:, 0])
    linear = c[:, 1] ** 2 + change[:, 1] + 2.0 * (c0 * c2 - c[:, 2] * c[:, 0])
    fits &= linear >= LEAST_LEFT * c[:, 1] ** 2
    return np.stack([c2, np.sqrt(np.maximum(linear, 0.0)), c0], axis=-1), fits
