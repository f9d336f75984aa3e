"""A first set of alternation points: the extrema of the rational Chebyshev function with the section's own poles."""

from __future__ import annotations

import numpy as np

from a2d.arrays import ComplexArray, FloatArray, IntArray
from a2d.digital.rational.problem import Problem


def first_reference(problem: Problem, roots: ComplexArray) -> IntArray:
    """Grid points near which the error of the best approximation alternates, shape [N, K], K = `problem.references`.

    The error has K - 1 sign changes and poles where N or D has a zero, the rest of them far away: it behaves like
    cos ψ, ψ the sum of the phases of the factors (z - α)/(1 - α'z) over those poles, x = cos φ the band of t mapped
    to -1 to 1, z = e^{jφ} and α the image of a pole by x = (α + 1/α)/2 inside the circle (the rational Chebyshev
    function with given poles; N. I. Achieser, Theory of Approximation, section 2.4 and appendix A; from memory).

    Parameters
    ----------
    problem
        The sections.
    roots
        Shape [N, R], R ≤ K - 1: zeros of N(t) and D(t) as far as they are known before the fit.
    """
    low, high = problem.t[:, :1], problem.t[:, -1:]
    phi = 2.0 * np.arcsin(np.sqrt(np.clip((problem.t - low) / (high - low), 0.0, 1.0)))
    total = float(problem.references - 1 - roots.shape[1]) * phi
    for column in range(roots.shape[1]):
        inside = _inside((low + high - 2.0 * roots[:, column : column + 1]) / (high - low))
        total = total + _phase(phi, inside) - _phase(np.zeros_like(phi[:, :1]), inside)
    return nearest_rising(total, np.linspace(0.0, 1.0, problem.references) * total[:, -1:])


def _inside(x: ComplexArray) -> ComplexArray:
    """The α inside the circle with (α + 1/α)/2 = x."""
    root = np.sqrt(x * x - 1.0 + 0j)
    first, second = x - root, x + root
    larger = np.where(np.abs(first) > np.abs(second), first, second)
    return np.asarray(1.0 / np.where(np.abs(larger) < 1.0, 1.0, larger), dtype=np.complex128)


def _phase(phi: FloatArray, alpha: ComplexArray) -> FloatArray:
    """The phase of (z - α)/(1 - α'z), z = e^{jφ}, continuous in φ."""
    size, turn = np.abs(alpha), phi - np.angle(alpha)
    return np.asarray(phi + 2.0 * np.arctan2(size * np.sin(turn), 1.0 - size * np.cos(turn)))


def nearest_rising(values: FloatArray, wanted: FloatArray) -> IntArray:
    """The grid points where rising `values` [N, G] come nearest to `wanted` [N, K], all different."""
    count, last = wanted.shape[1], values.shape[1] - 1
    found = np.empty(wanted.shape, dtype=np.int64)
    for k in range(count):
        above = np.minimum((values < wanted[:, k : k + 1]).sum(axis=1), last)
        below = np.maximum(above - 1, 0)
        gap = np.abs(np.take_along_axis(values, np.stack([below, above], axis=1), axis=1) - wanted[:, k : k + 1])
        found[:, k] = np.where(gap[:, 0] <= gap[:, 1], below, above)
    for k in range(1, count):
        found[:, k] = np.maximum(found[:, k], found[:, k - 1] + 1)
    for k in range(count - 1, -1, -1):
        found[:, k] = np.minimum(found[:, k], last - (count - 1 - k))
    return found
