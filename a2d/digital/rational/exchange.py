"""Remez' exchange: level the error on its own largest alternating extrema, again and again."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from a2d.arrays import BoolArray, FloatArray, IntArray
from a2d.digital.rational.linear import solve
from a2d.digital.rational.problem import Problem, worst
from a2d.digital.rational.steps import directions, jacobian, move

MAY_GROW = 1.5
"""A step that lets the worst error grow beyond this factor of the best so far is cut to a quarter."""


class Alternation(NamedTuple):
    """K alternating extrema of an error curve.

    Parameters
    ----------
    points
        Shape [N, K], grid points; of no meaning where `bound` is 0.
    bound
        Shape [N]: the smallest |error| at them, below which no approximation of the same shape can stay
        (de la Vallée Poussin's bound); 0 where the error has fewer than K extrema of alternating sign.
    extrema
        Shape [N]: extrema of alternating sign whose size is at least `bound`, or all of them where that is 0.
    """

    points: IntArray
    bound: FloatArray
    extrema: IntArray


def alternation(error: FloatArray, size: int) -> Alternation:
    """The run of `size` neighbouring extrema of `error` [N, G] that holds the largest and whose least is greatest."""
    count, grid = error.shape
    negative = error < 0.0
    starts = np.ones((count, grid), dtype=np.bool_)
    starts[:, 1:] = negative[:, 1:] != negative[:, :-1]
    first, magnitude = np.flatnonzero(starts), np.abs(error).ravel()
    peak = np.maximum.reduceat(magnitude, first)
    run = np.cumsum(starts.ravel()) - 1
    where = np.zeros(len(first), dtype=np.int64)
    hits = np.flatnonzero(magnitude == peak[run])
    where[run[hits]] = hits
    row = first // grid
    runs = np.bincount(row, minlength=count)
    column = np.arange(len(first)) - np.concatenate([[0], np.cumsum(runs)[:-1]])[row]
    peaks = np.zeros((count, max(int(runs.max()), size)))
    places = np.zeros(peaks.shape, dtype=np.int64)
    peaks[row, column], places[row, column] = peak, where % grid
    windows = np.lib.stride_tricks.sliding_window_view(peaks, size, axis=1)
    least = np.where(windows.max(axis=2) >= peaks.max(axis=1, keepdims=True), windows.min(axis=2), -1.0)
    best = least.argmax(axis=1)
    bound = np.maximum(least[np.arange(count), best], 0.0)
    points = np.take_along_axis(places, best[:, np.newaxis] + np.arange(size), axis=1)
    high = (peaks >= np.where(bound > 0.0, bound, 0.0)[:, np.newaxis]) & (peaks > 0.0)
    return Alternation(points, bound, high.sum(axis=1))


class Exchanged(NamedTuple):
    """The best of the exchange: `b`, `a` [N, 3] in v, their worst error and the greatest lower bound met, [N]."""

    b: FloatArray
    a: FloatArray
    worst: FloatArray
    bound: FloatArray


def exchange(problem: Problem, b: FloatArray, a: FloatArray, rounds: int, close: float = 1e-4) -> Exchanged:
    """Newton's step on error = ±E at the K alternating extrema, `rounds` times or until within `close` of the bound."""
    error = problem.error(b, a)
    best = Exchanged(b.copy(), a.copy(), worst(error), np.zeros(len(b)))
    rows = np.arange(len(b))
    for _ in range(rounds):
        part = problem if len(rows) == len(best.b) else problem.rows(rows)
        seen = alternation(error, problem.references)
        best.bound[rows] = np.maximum(best.bound[rows], seen.bound)
        busy = (best.worst[rows] > (1.0 + close) * best.bound[rows]) & (seen.bound > 0.0)
        if not np.any(busy):
            break
        rows, part = rows[busy], part.rows(busy)
        b, a, error = _step(part, b[busy], a[busy], error[busy], seen.points[busy], best.worst[rows])
        size = worst(error)
        better = size < best.worst[rows]
        chosen = rows[better]
        best.b[chosen], best.a[chosen], best.worst[chosen] = b[better], a[better], size[better]
    return best


def _step(
    problem: Problem, b: FloatArray, a: FloatArray, error: FloatArray, points: IntArray, limit: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """One Newton step; cut to a quarter where the worst error would grow beyond MAY_GROW·`limit`."""
    ways = directions(problem, b, a)
    step = _levelling(jacobian(problem.at(points), b, a, ways), np.take_along_axis(error, points, axis=1))
    new_b, new_a = move(b, a, ways, step)
    new_error = problem.error(new_b, new_a)
    wild: BoolArray = ~(worst(new_error) < MAY_GROW * limit)
    if np.any(wild):
        ways_wild = type(ways)(ways.b[wild], ways.a[wild])
        new_b[wild], new_a[wild] = move(b[wild], a[wild], ways_wild, 0.25 * step[wild])
        new_error[wild] = problem.rows(wild).error(new_b[wild], new_a[wild])
    return new_b, new_a, new_error


def _levelling(slopes: FloatArray, error: FloatArray) -> FloatArray:
    """The step that makes the linear error ±E on the K points, signs alternating; `slopes` [N, K, K - 1]."""
    count = error.shape[1]
    signs = np.where(np.arange(count) % 2 == 0, 1.0, -1.0) * np.where(error[:, :1] < 0.0, -1.0, 1.0)
    scale = 1.0 / np.maximum(np.abs(slopes).max(axis=1, keepdims=True), 1e-300)
    matrix = np.concatenate([slopes * scale, -signs[..., np.newaxis]], axis=-1)
    matrix = matrix + 1e-15 * np.eye(count)
    solution = solve(matrix, -error[..., np.newaxis])[..., 0]
    return np.asarray(solution[:, :-1] * scale[:, 0])
