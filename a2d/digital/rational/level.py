"""The ratio N/D whose error has one size and alternating signs on a given set of points, without a start value."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from a2d.arrays import BoolArray, ComplexArray, FloatArray
from a2d.digital.rational.linear import solve
from a2d.digital.rational.problem import Problem


class Levelled(NamedTuple):
    """`b`, `a` [N, 3] in v, and whether a positive ratio was found, [N]; rows that were not are of no meaning."""

    b: FloatArray
    a: FloatArray
    found: BoolArray


def level(points: Problem) -> Levelled:
    """Solve N(t_k) = T_k·m^{±1/2}·D(t_k), the signs alternating, for N, D and m.

    `points` is a `Problem` on its K = `references` points. The equations are linear in the K coefficients of N and D
    for a given m, so m is an eigenvalue: with D scaled by √m and ν = m - 1, [V, -T·V]·x = ν·[0, T·V in every second
    row]·x, the eigenvector one along which N and D keep one sign (H. L. Loeb's and H. Werner's form of Remez' step
    for rational functions; from memory). Weights are left out: this is a start for `exchange`.
    """
    count, half = points.t.shape[1], points.zeros + 1
    scale = np.exp(np.log(points.t).mean(axis=1))[:, np.newaxis]
    u = points.t / scale
    rows_n = np.stack([u**k for k in range(half)], axis=-1)
    rows_d = np.stack([u**k for k in range(points.poles + 1)], axis=-1)
    weighted = np.exp(points.target)[..., np.newaxis] * rows_d
    raised = np.where((np.arange(count) % 2 == 0)[:, np.newaxis], weighted, 0.0)
    vectors, ratio = _eigen(
        np.concatenate([rows_n, -weighted], axis=-1), np.concatenate([np.zeros_like(rows_n), raised], axis=-1)
    )
    at_n = np.einsum("nki,nij->nkj", rows_n, vectors[:, :half])
    at_d = np.einsum("nki,nij->nkj", rows_d, vectors[:, half:])
    good = (np.abs(ratio.imag) <= 1e-9 * np.abs(ratio)) & (ratio.real > 0.0) & _one_sign(at_n) & _one_sign(at_d)
    one = good.argmax(axis=1)
    pick = np.arange(len(one))
    factor = np.sqrt(np.where(good[pick, one], ratio[pick, one].real, 1.0))[:, np.newaxis]
    b, fine_b = _factor(np.abs(1.0 / factor) * _signed(vectors[pick, :half, one].real, at_n[pick, :, one]), scale)
    a, fine_a = _factor(_signed(vectors[pick, half:, one].real, at_d[pick, :, one]), scale)
    return Levelled(b, a, good[pick, one] & fine_b & fine_a)


def _eigen(whole: FloatArray, raised: FloatArray) -> tuple[ComplexArray, ComplexArray]:
    """Eigenvectors [N, K, K] and 1 + ν [N, K] of whole·x = ν·raised·x, rows and columns brought to one size."""
    rows = 1.0 / np.abs(whole).max(axis=-1, keepdims=True)
    whole, raised = whole * rows, raised * rows
    columns = 1.0 / np.abs(whole).max(axis=-2, keepdims=True)
    whole, raised = whole * columns, raised * columns
    inverse, vectors = np.linalg.eig(solve(whole + 1e-14 * np.eye(whole.shape[-1]), raised))
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = np.where(inverse == 0.0, -1.0, 1.0 + 1.0 / inverse)
    return vectors * columns.transpose(0, 2, 1), ratio + 0j


def _one_sign(values: ComplexArray) -> BoolArray:
    real = values.real
    return np.asarray(np.all(real > 0.0, axis=1) | np.all(real < 0.0, axis=1))


def _signed(coefficients: FloatArray, values: ComplexArray) -> FloatArray:
    return np.asarray(coefficients * np.sign(values.real[:, :1]))


def _factor(coefficients: FloatArray, scale: FloatArray) -> tuple[FloatArray, BoolArray]:
    """c2·v² + c1·v + c0 with the squared magnitude given by `coefficients` of 1, u, u², u = t/scale."""
    padded = np.zeros((len(coefficients), 3))
    degree = coefficients.shape[1] - 1
    padded[:, : degree + 1] = coefficients / scale ** np.arange(degree + 1)
    constant, linear, square = padded.T
    good = np.all(np.isfinite(padded), axis=1) & (constant > 0.0) & ((square > 0.0) | (degree < 2))
    c0, c2 = np.sqrt(np.where(good, constant, 1.0)), np.sqrt(np.where(good, square, 1.0))
    middle = linear + 2.0 * c0 * c2
    good &= (middle > 0.0) | (degree < 1)
    return np.stack([c2, np.sqrt(np.where(good, middle, 1.0)), c0], axis=-1), good
