"""Lawson's reweighting of damped Gauss-Newton steps: from any start towards the least largest error."""

from __future__ import annotations

from typing import NamedTuple, Protocol, TypeVar

import numpy as np

from a2d.arrays import FloatArray
from a2d.digital.rational.linear import solve

SETTLING = 4
"""Steps with even weights before the reweighting begins."""
LEAST_WEIGHT = 1e-7
BLOCK_WORK = 100_000
"""Multiplications in one matrix product."""
LEAST_DAMPING, MOST_DAMPING = 1e-13, 1e8


class State(NamedTuple):
    """Numerators and denominators in v of M models, shape [M, ..., 3]."""

    b: FloatArray
    a: FloatArray


class Model(Protocol):
    """M fits that are made side by side; an error has C parts at each of G frequencies (magnitude, phase)."""

    def error(self, state: State) -> FloatArray:
        """Shape [M, C, G]."""

    def slopes(self, state: State) -> tuple[FloatArray, object]:
        """d error/d step, shape [M, C, G, K], and what `move` needs to know about the directions."""

    def move(self, state: State, ways: object, step: FloatArray) -> State:
        """`state` moved by `step` [M, K], or by less where it would leave what is allowed."""


M = TypeVar("M", bound=Model)


def size(error: FloatArray) -> FloatArray:
    """The size of each error, its parts at right angles: [M, C, G] -> [M, G]."""
    return np.asarray(np.sqrt((error**2).sum(axis=1)))


def lawson(model: Model, state: State, steps: int) -> State:
    """The state with the least largest error met on the way.

    Weighted least squares of the error with the weights multiplied by its size after each step tends to the minimax
    fit (C. L. Lawson 1961; J. R. Rice and K. H. Usow, The Lawson algorithm and extensions, Math. Comp. 22, 1968; from
    memory). Steps are damped after Levenberg and Marquardt. Nothing is drawn at random.
    """
    error = model.error(state)
    magnitude = size(error)
    weight = np.full(magnitude.shape, 1.0 / magnitude.shape[1])
    damping = np.full(len(magnitude), 1e-3)
    best, best_worst = State(state.b.copy(), state.a.copy()), _largest(magnitude)
    for step_number in range(steps):
        slopes, ways = model.slopes(state)
        moved = model.move(state, ways, _damped_step(slopes, error, weight, damping))
        moved_error = model.error(moved)
        moved_magnitude = size(moved_error)
        with np.errstate(invalid="ignore"):
            lower = (weight * moved_magnitude**2).sum(axis=1) < (weight * magnitude**2).sum(axis=1)
        state = State(_where(lower, moved.b, state.b), _where(lower, moved.a, state.a))
        error, magnitude = _where(lower, moved_error, error), _where(lower, moved_magnitude, magnitude)
        damping = np.clip(np.where(lower, 0.1 * damping, 10.0 * damping), LEAST_DAMPING, MOST_DAMPING)
        if step_number >= SETTLING:
            weight = _where(lower, _reweighted(weight, magnitude), weight)
        better = _largest(magnitude) < best_worst
        best = State(_where(better, state.b, best.b), _where(better, state.a, best.a))
        best_worst = np.where(better, _largest(magnitude), best_worst)
    return best


def _damped_step(slopes: FloatArray, error: FloatArray, weight: FloatArray, damping: FloatArray) -> FloatArray:
    """-(JᵀWJ + damping·diag)⁻¹·JᵀWe, columns brought to one size; shape [M, K]."""
    count, parts, grid, unknowns = slopes.shape
    rows = slopes.reshape(count, parts * grid, unknowns)
    root = np.sqrt(np.broadcast_to(weight[:, np.newaxis], (count, parts, grid))).reshape(count, parts * grid, 1)
    weighted = rows * root
    scale = 1.0 / np.maximum(np.sqrt((weighted**2).sum(axis=1)), 1e-150)
    weighted *= scale[:, np.newaxis]
    both = np.concatenate([weighted, error.reshape(count, parts * grid, 1) * root], axis=-1)
    product = _in_blocks(both)
    matrix = product[:, :-1, :-1] + damping[:, np.newaxis, np.newaxis] * np.eye(unknowns)
    return np.asarray(-solve(matrix, product[:, :-1, -1:])[..., 0] * scale)


def _in_blocks(rows: FloatArray) -> FloatArray:
    """rowsᵀ·rows, [M, R, K] -> [M, K, K], in products too small for a matrix library to start threads on.

    Threads that wait for a busy core cost a step of this size many times its own work.
    """
    count, length, columns = rows.shape
    block = max(BLOCK_WORK // columns**2, 8)
    padded = np.zeros((count, -(-length // block) * block, columns))
    padded[:, :length] = rows
    parts = padded.reshape(count, -1, block, columns)
    return np.asarray((parts.transpose(0, 1, 3, 2) @ parts).sum(axis=1))


def _reweighted(weight: FloatArray, magnitude: FloatArray) -> FloatArray:
    total = np.maximum((weight * magnitude).sum(axis=1, keepdims=True), 1e-300)
    return np.asarray(np.maximum(weight * magnitude / total, LEAST_WEIGHT / magnitude.shape[1]))


def _largest(magnitude: FloatArray) -> FloatArray:
    largest = magnitude.max(axis=1)
    return np.where(np.isfinite(largest), largest, np.inf)


def _where(rows: FloatArray | np.ndarray, new: FloatArray, old: FloatArray) -> FloatArray:
    return np.where(rows.reshape((-1,) + (1,) * (new.ndim - 1)), new, old)
