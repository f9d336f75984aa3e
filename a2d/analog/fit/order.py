"""The order sweep: one section after the other until one more explains nothing, then the least model that does."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import replace
from itertools import combinations

import numpy as np

from a2d.analog.fit.measured import MeasuredResponse
from a2d.analog.fit.score import OrderTried, exact, explained, reweighted, tried
from a2d.analog.fit.search import Effort, with_one_more
from a2d.analog.fit.shapes import FREE, SHAPES
from a2d.analog.fit.solve import Model, Problem, empty_model, evaluate, misfit, solve
from a2d.arrays import FloatArray

NEEDED_GAIN = 6.0  # of the information criterion: a section that explains less is noise
DELAY_SEARCH_SECONDS = 0.2
DELAYS_A_TURN = 64
NOTCH_FROM_DB = -24.0  # a cut so deep is meant as a notch
FIRST_ORDER = ("low_shelf_1", "lowpass_1", "highpass_1")
MERGE_OCTAVES = 3.0


def all_at_once(problem: Problem, coupling: bool, effort: Effort, most: int) -> tuple[Model, list[OrderTried]]:
    """The order sweep on level and phase together."""
    return order_sweep(problem, first_model(problem, coupling), effort, most)


def level_first(problem: Problem, coupling: bool, effort: Effort, most: int) -> tuple[Model, list[OrderTried]]:
    """The order sweep on the level alone; then delay and polarity from the phase that is left, and all together.

    A device without all-passes has the least phase that its level allows, so that what is left is the delay.
    """
    measured = problem.measured
    if measured.phase is None:
        return all_at_once(problem, coupling, effort, most)
    shapes = tuple(name for name in effort.shapes if not SHAPES[name].needs_phase)
    silent = replace(problem, measured=replace(measured, phase=None))
    model, by_level = order_sweep(silent, first_model(silent, coupling), replace(effort, shapes=shapes, kept=2), most)
    _, left = misfit(problem, evaluate(model, measured.f_hz)[0])
    delay, turn = _coarse_delay(replace(measured, phase=left), problem.weights)
    theta, free = model.theta.copy(), model.free.copy()
    theta[1], free[1] = 2.0 * np.pi * delay * measured.f_hz[-1], True
    theta[2], free[2] = (0.01, True) if coupling else (0.0, False)
    model, _ = solve(problem, replace(model, theta=theta, free=free, inverted=turn < 0.0))
    model, together = order_sweep(problem, model, effort, most)
    return model, by_level + together


def order_sweep(problem: Problem, first: Model, effort: Effort, most: int) -> tuple[Model, list[OrderTried]]:
    """One section after the other; the model of the best order, and every order tried."""
    models = [solve(problem, first)[0]]
    best, sweep = models[0], [tried(problem, models[0])]
    best_criterion = sweep[0].criterion
    while len(models[0].shapes) < most and not exact(sweep[-1]):
        models = with_one_more([reweighted(problem, m) for m in models], models, effort)
        sweep.append(tried(problem, models[0]))
        if sweep[-1].criterion < best_criterion - NEEDED_GAIN:
            best, best_criterion = models[0], sweep[-1].criterion
        elif len(models[0].shapes) >= len(best.shapes) + (1 if explained(problem, best) else 2):
            break
    return _simplified(problem, best, tuple(n for n in effort.shapes if n != FREE)), sweep


def first_model(problem: Problem, coupling: bool) -> Model:
    """Nuisance terms alone, with the delay and polarity that the phase shows at first sight."""
    measured = problem.measured
    model = empty_model(measured.phase is not None)
    theta, free = model.theta.copy(), model.free.copy()
    theta[0] = float(np.average(measured.log_gain, weights=problem.weights))
    theta[2], free[2] = (0.01, True) if coupling else (0.0, False)
    inverted = False
    if measured.phase is not None:
        delay, turn = _coarse_delay(measured, problem.weights)
        theta[1] = 2.0 * np.pi * delay * measured.f_hz[-1]
        inverted = turn < 0.0
    return replace(model, theta=theta, free=free, inverted=inverted)


def _coarse_delay(measured: MeasuredResponse, weights: FloatArray) -> tuple[float, float]:
    """The delay at which Σ w·e^{j(φ + ωτ)} is largest, s, and the real part of its direction there.

    Points near the upper end tell the delay; weighting by frequency lets them.
    """
    assert measured.phase is not None
    f = measured.f_hz
    w = weights * f
    step = 0.4 / f[-1]
    spacing = np.diff(f)  # an even grid of step d cannot tell delays apart that differ by 1/d
    span = min(DELAY_SEARCH_SECONDS, 0.5 / float(spacing.min()), 20.0 / float(spacing.max()))
    starts = np.arange(-0.5 * span, span, DELAYS_A_TURN * step)
    turns = np.exp(2j * np.pi * step * np.arange(DELAYS_A_TURN)[:, np.newaxis] * f)
    sums = np.exp(2j * np.pi * starts[:, np.newaxis] * f) * (w * np.exp(1j * measured.phase)) @ turns.T
    delays, sums = (starts[:, np.newaxis] + step * np.arange(DELAYS_A_TURN)).ravel(), sums.ravel()
    best = int(np.argmax(np.abs(sums)))
    return float(delays[best]), float(sums[best].real)


def _simplified(problem: Problem, model: Model, named: tuple[str, ...]) -> Model:
    """The least model that the final weights allow: no idle corner or section, a named shape for a free one."""
    for _ in range(2):
        model, _ = solve(reweighted(problem, model), model)
    base = tried(problem, model).criterion
    weighted = reweighted(problem, model)
    for trial in _lesser(weighted, model, named):
        solved, _ = solve(weighted, trial)
        if tried(problem, solved).criterion < base + NEEDED_GAIN / 2.0:
            return _simplified(problem, solved, named)
    return model


def _lesser(problem: Problem, model: Model, named: tuple[str, ...]) -> Iterator[Model]:
    """Models with fewer parameters than this one."""
    if model.free[2]:
        yield _without_corner(model)
    for i in range(len(model.shapes)):
        yield model.without_section(i)
    vectors = model.vectors()
    for i, shape in enumerate(model.shapes):
        if shape == "peaking" and vectors[i][2] < NOTCH_FROM_DB:  # pole Q = q·10^(gain/40)
            f0, q, gain = vectors[i]
            yield model.without_section(i).with_section("notch", np.array([f0, q + gain * math.log(10.0) / 40.0]))
        if shape == FREE and named:
            one_more = with_one_more([problem], [model.without_section(i)], Effort(named, 3, 2))
            yield one_more[0]
            yield with_one_more([problem] * len(one_more), one_more, Effort(FIRST_ORDER, 2))[0]
    for i, j in combinations(range(len(vectors)), 2):  # two that lie close may be one
        if named and abs(vectors[i][0] - vectors[j][0]) < MERGE_OCTAVES * math.log(2.0):
            yield with_one_more([problem], [model.without_section(j).without_section(i)], Effort(named, 3))[0]


def _without_corner(model: Model) -> Model:
    theta, free = model.theta.copy(), model.free.copy()
    theta[2], free[2] = 0.0, False
    return replace(model, theta=theta, free=free)
