"""Sections fitted together, so that their errors compensate; more sections than the chain has, or fewer."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from a2d.analog.response import chain_response, section_response
from a2d.arrays import BoolArray, ComplexArray, FloatArray, rising
from a2d.digital.cascade import Cascade, back_to_sos, groups_of, in_v
from a2d.digital.minimax import minimax
from a2d.digital.rational.lawson import State, lawson, size
from a2d.digital.rational.polish import polish
from a2d.digital.rational.setting import Setting, frequencies
from a2d.digital.shapes import shape_of

STEPS, ROUNDS = 100, 20
STEPS_OF_ONE = 300
"""Lawson's steps for several sections from one start with nothing to be added.

A long fit would leave an added section in a narrow valley.
"""
CARRIED_ON = 2
"""How many of several tries, the best, are carried on twice as long."""
ADDED_AT = (0.15, 0.5, 1.0, 2.0, 4.0, 10.0)
"""tan(w/2) where an added section starts, its zeros upon its poles; each is tried and the best is kept."""
NEPER_DB = 20.0 / np.log(10.0)
BOTTOM = 1e-7
"""Part of the largest response below which, at the bottom of a notch, no error is taken."""


@dataclass(frozen=True, eq=False)
class ChainFit:
    """T sections that together come as near to a chain as was found.

    Parameters
    ----------
    sos
        Shape [T, 6].
    worst
        The largest error on the fit's own grid, dB: of magnitude, or of the weighted complex ratio.
    bound
        No cascade of the same shape has a smaller one, dB; 0 where the error alternates too seldom to tell, or where
        the phase counts.
    added
        How many of the last sections have no analog original.
    by_count
        The largest error in dB with each number of sections tried on the way, (sections, error).
    """

    sos: FloatArray
    worst: float
    bound: float
    added: int
    by_count: tuple[tuple[int, float], ...] = ()


@dataclass(frozen=True, eq=False)
class Task:
    """What the fits of one chain have in common: the grid in Hz [G], the analog response there, weights, rate."""

    f_hz: FloatArray
    target: ComplexArray
    weight: FloatArray
    rate: float
    weight_phase: float


def fit_chain(
    b: FloatArray,
    a: FloatArray,
    sample_rate_hz: float,
    band_hz: FloatArray,
    *,
    extra_sections: int = 0,
    weight_phase: float = 0.0,
    weight: FloatArray | None = None,
) -> ChainFit:
    """The chain's sections, and `extra_sections` more, fitted together to the response of the whole.

    Parameters
    ----------
    b, a
        Shape [S, 3], coefficients of s², s, 1; s in rad/s.
    sample_rate_hz, band_hz
        Hz; the band of shape [2].
    extra_sections
        Sections added one after another, each from several starts.
    weight_phase
        0 fits the magnitude, 1 the modulus of ln(twin/analog), whose angle is the phase error in radians.
    weight
        Factors on the error, a table of shape [2, W]: frequencies in Hz, rising, and factors between which it is
        interpolated.

    Notes
    -----
    Zeros at 0 Hz and on the axis keep their place, and every coefficient its sign, so poles stay inside the circle.
    Each section starts as its own minimax fit.
    """
    start = minimax(b, a, np.asarray(sample_rate_hz), np.asarray(0.0), band_hz)
    task = task_of(b, a, float(sample_rate_hz), band_hz, weight_phase, weight)
    allpass = shape_of(b, a).allpass
    best = fit_from(task, start, allpass, 0, STEPS if extra_sections or len(b) == 1 else STEPS_OF_ONE)
    by_count = [(len(best.sos), best.worst)]
    for added in range(1, extra_sections + 1):
        best = add_section(task, best, allpass, added)
        by_count.append((len(best.sos), best.worst))
    return replace(best, by_count=tuple(by_count))


def task_of(
    b: FloatArray, a: FloatArray, rate: float, band: FloatArray, weight_phase: float, weight: FloatArray | None
) -> Task:
    """The grid of all sections together, without the bottoms of notches."""
    shape = shape_of(b, a)
    every = Setting(shape, np.full(len(b), rate), np.broadcast_to(band, (len(b), 2)), 2, 2)
    points = rising(frequencies(every).ravel())
    f_hz = np.sort(np.concatenate([points, 0.5 * (points[1:] + points[:-1])]))
    response = section_response(b, a, f_hz)
    clear = np.all(np.abs(response) > BOTTOM * np.abs(response).max(axis=-1, keepdims=True), axis=0)
    f_hz = f_hz[clear]
    factors = np.ones_like(f_hz) if weight is None else np.interp(f_hz, weight[0], weight[1])
    return Task(f_hz, chain_response(b, a, f_hz), factors, rate, weight_phase)


def fit_from(task: Task, sos: FloatArray, allpass: BoolArray, added: int, steps: int = STEPS) -> ChainFit:
    """The best near `sos` [T, 6], after so many of Lawson's steps."""
    b, a, first_order = in_v(sos)
    return _best(task, State(b[np.newaxis], a[np.newaxis]), first_order, allpass, added, steps)


def add_section(task: Task, fit: ChainFit, allpass: BoolArray, added: int) -> ChainFit:
    """The best with one section more than `fit`."""
    b, a, first_order = in_v(fit.sos)
    flat = np.array([[0.5 / k, 1.0, 0.5 * k] for k in ADDED_AT])[:, np.newaxis]
    tries = State(*(np.concatenate([np.tile(c, (len(flat), 1, 1)), flat], axis=1) for c in (b, a)))
    return _best(task, tries, np.append(first_order, False), np.append(allpass, [False] * added), added, STEPS)


def _best(task: Task, start: State, first_order: BoolArray, allpass: BoolArray, added: int, steps: int) -> ChainFit:
    """The best of M tries, after Lawson's steps and, where the magnitude alone counts, the exchange."""
    groups = groups_of(allpass, start.b[0], start.a[0], task.weight_phase)
    omega = np.tan(np.pi * task.f_hz / task.rate)
    model = Cascade(omega, task.target, groups, task.weight, task.weight_phase)
    state = lawson(model, start, steps)
    if len(state.b) > 1:
        first = np.argsort(size(model.error(state)).max(axis=1), kind="stable")[:CARRIED_ON]
        state = lawson(model, State(state.b[first], state.a[first]), 2 * steps)
    bound = np.zeros(len(state.b))
    if not task.weight_phase:
        sections = len(first_order)
        state, _, bound = polish(model, state, len(groups) - (sections - 1) + 1, ROUNDS)
    worst = size(model.error(state)).max(axis=1)
    row = int(np.argmin(worst))
    sos = back_to_sos(state, row, first_order)
    return ChainFit(sos, float(NEPER_DB * worst[row]), float(NEPER_DB * bound[row]), added)
