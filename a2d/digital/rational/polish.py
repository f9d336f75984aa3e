"""Exchange for any `Model` with one error a frequency: the last digits after `lawson`."""

from __future__ import annotations

import numpy as np

from a2d.arrays import FloatArray
from a2d.digital.rational.exchange import Alternation, alternation
from a2d.digital.rational.lawson import Model, State

CUTS = 4
GONE_ASTRAY = 2.0
"""Times the best so far at which the next round starts from the best again: the exchange need not fall every round."""
LEAST_SINGULAR = 1e-12


def polish(model: Model, state: State, references: int, rounds: int) -> tuple[State, FloatArray, FloatArray]:
    """The best state met in `rounds` levelling steps, its largest error [M] and the greatest lower bound met [M].

    Parameters
    ----------
    model
        Its errors have one part; K numbers move it, of which `references` - 1 matter.
    state
        Where to start, near the best.
    references
        Alternating extrema that prove a best fit.
    rounds
        Steps.
    """
    error = model.error(state)[:, 0]
    best, largest, bound = state, _largest(error), np.zeros(len(error))
    for _ in range(rounds):
        seen = alternation(error, references)
        bound = np.maximum(bound, seen.bound)
        slopes, ways = model.slopes(state)
        step = _step(slopes[:, 0], error, seen)
        state, error = _first_that_helps(model, state, ways, step, error, 1.5 * largest)
        lower = _largest(error) < largest
        best = State(_rows(lower, state.b, best.b), _rows(lower, state.a, best.a))
        largest = np.where(lower, _largest(error), largest)
        astray = _largest(error) > GONE_ASTRAY * largest
        state = State(_rows(astray, best.b, state.b), _rows(astray, best.a, state.a))
        error = model.error(state)[:, 0]
    return best, largest, bound


def _step(slopes: FloatArray, error: FloatArray, seen: Alternation) -> FloatArray:
    """The least step that makes the linear error ±E at the alternating points; 0 where these are too few."""
    at = np.take_along_axis(slopes, seen.points[..., np.newaxis], axis=1)
    value = np.take_along_axis(error, seen.points, axis=1)
    signs = np.where(np.arange(value.shape[1]) % 2 == 0, 1.0, -1.0) * np.where(value[:, :1] < 0.0, -1.0, 1.0)
    scale = np.maximum(np.sqrt((slopes**2).mean(axis=1, keepdims=True)), 1e-150)
    matrix = np.concatenate([at / scale, -signs[..., np.newaxis]], axis=-1)
    matrix = np.where((seen.bound > 0.0)[:, np.newaxis, np.newaxis], matrix, 0.0)
    solution = np.linalg.pinv(matrix, rcond=LEAST_SINGULAR) @ -value[..., np.newaxis]
    return np.asarray(solution[:, :-1, 0] / scale[:, 0])


def _first_that_helps(
    model: Model, state: State, ways: object, step: FloatArray, error: FloatArray, limit: FloatArray
) -> tuple[State, FloatArray]:
    """The step, or a quarter of it, ... where its error would grow beyond `limit`."""
    moved = state
    for cut in range(CUTS):
        trial = model.move(state, ways, step * 0.25**cut)
        trial_error = model.error(trial)[:, 0]
        take = (_largest(trial_error) < limit) if cut else np.ones(len(error), dtype=np.bool_)
        take &= (_largest(model.error(moved)[:, 0]) >= limit) if cut else True
        moved = State(_rows(take, trial.b, moved.b), _rows(take, trial.a, moved.a))
    return moved, model.error(moved)[:, 0]


def _largest(error: FloatArray) -> FloatArray:
    largest = np.abs(error).max(axis=1)
    return np.where(np.isfinite(largest), largest, np.inf)


def _rows(which: FloatArray | np.ndarray, new: FloatArray, old: FloatArray) -> FloatArray:
    return np.where(which.reshape((-1,) + (1,) * (new.ndim - 1)), new, old)
