"""The coefficients whose largest error in dB over the band is the least there is."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from a2d.arrays import BoolArray, ComplexArray, FloatArray, IntArray
from a2d.digital import warped
from a2d.digital.allpass import fit_allpass
from a2d.digital.exponential import own_poles
from a2d.digital.rational.descent import descend
from a2d.digital.rational.exchange import Exchanged, alternation, exchange
from a2d.digital.rational.lawson import State
from a2d.digital.rational.level import level
from a2d.digital.rational.problem import Problem
from a2d.digital.rational.reference import first_reference
from a2d.digital.rational.setting import (
    Setting,
    free_zeros,
    frequencies,
    known_roots,
    problem_of,
    resonates_above,
    split_zeros,
    up_to_resonance,
    whole_numerator,
)
from a2d.digital.rational.steps import NYQUIST_MARGIN
from a2d.digital.refusal import refuse
from a2d.digital.shapes import Shape, gain_at_zero, shape_of

ROUNDS, LAST_ROUNDS = 12, 4
SOLVED, NOISE = 1.01, 2e-9
"""Worst error over its lower bound that counts as solved, and an error (of ln |H|²) too small to tell."""
OTHER_ROOTS = (-0.1, -0.01)
"""t of the roots in further guesses at the reference."""
BETWEEN = 4
"""Points added on each side of an extremum, up to the next point of the grid."""
FREE = ((2, 2), (1, 2), (0, 2), (1, 1), (0, 1))
"""Free zeros and poles of the shapes there are."""


def minimax(
    b: FloatArray, a: FloatArray, sample_rate_hz: FloatArray, match_hz: FloatArray, band_hz: FloatArray
) -> FloatArray:
    """Stable second-order sections with the least largest error in dB over the band.

    Zeros at 0 Hz and pairs of zeros on the axis below half the rate stay exactly where they are; the other zeros lie
    inside the circle where the analog ones lie in the left half-plane, and outside where those lie in the right.
    All-pass sections are fitted in phase. The match frequency may lie anywhere, also above half the rate.

    Parameters
    ----------
    b, a
        Shape [..., 3], coefficients of s², s, 1; s in rad/s.
    sample_rate_hz
        Shape [...] or broadcastable to it, Hz.
    match_hz
        Not used by this method.
    band_hz
        Shape [..., 2] or broadcastable to it, Hz: where the error counts; its end below half the rate. A section
        that resonates below the band is fitted down to half its lowest root's frequency.

    Returns
    -------
    Shape [..., 6]: b0, b1, b2, 1, a1, a2.

    Raises
    ------
    SectionRefused
        More zeros than poles, a pole that is not in the left half-plane, or a band that ends at half the rate.

    Notes
    -----
    A rational Chebyshev approximation of |H|² in t = tan²(w/2), each section started from the levelled error on the
    extrema that its own poles suggest and finished by Remez' exchange: docs/fidelity.md.
    """
    del match_hz
    return weighted_minimax(b, a, sample_rate_hz, band_hz, None)


def weighted_minimax(
    b: FloatArray, a: FloatArray, sample_rate_hz: FloatArray, band_hz: FloatArray, weight: FloatArray | None
) -> FloatArray:
    """`minimax` of an error that counts more at some frequencies than at others.

    Parameters
    ----------
    b, a, sample_rate_hz, band_hz
        As for `minimax`.
    weight
        Shape [2, W]: frequencies in Hz, rising, and factors above zero on the error in dB, between which it runs
        straight; None for 1 everywhere. All-pass sections are fitted without it.
    """
    lead = np.broadcast_shapes(b.shape[:-1], sample_rate_hz.shape, band_hz.shape[:-1])
    shape = shape_of(*(np.broadcast_to(c, (*lead, 3)).reshape(-1, 3) for c in (b, a)))
    rate = np.broadcast_to(sample_rate_hz, lead).ravel()
    band = np.broadcast_to(band_hz, (*lead, 2)).reshape(-1, 2)
    refuse(shape.improper, "minimax needs as many poles as zeros: the section has more zeros")
    refuse(~shape.stable, "minimax needs poles in the left half-plane")
    refuse(band[:, 1] >= 0.5 * rate, "minimax needs a band that ends below half the sample rate")
    sos = np.zeros((len(rate), 6))
    sos[:, 3] = 1.0
    sos[:, 0] = np.where(shape.gain, gain_at_zero(shape.b, shape.a), 0.0)
    sos[shape.allpass] = fit_allpass(
        Shape(shape.b[shape.allpass], shape.a[shape.allpass]), rate[shape.allpass], band[shape.allpass]
    )
    same = np.flatnonzero(shape.own_poles_only)
    sos[same] = own_poles(Shape(shape.b[same], shape.a[same]), rate[same])
    for setting, rows in _settings(shape, rate, band, weight):
        best = solve(setting)
        first_order = np.full(len(best.b), setting.poles == 1)
        sos[rows] = warped.to_sos(whole_numerator(setting, best.b), best.a, first_order)
    return sos.reshape(*lead, 6)


def _settings(
    shape: Shape, rate: FloatArray, band: FloatArray, weight: FloatArray | None
) -> list[tuple[Setting, BoolArray]]:
    """The sections that are to be approximated, those of one shape together, and which they are."""
    zeros, poles = free_zeros(shape, rate), np.where(shape.second_order, 2, 1)
    wanted = ~(shape.gain | shape.allpass | shape.own_poles_only)
    found = []
    for free in FREE:
        rows = np.asarray(wanted & (zeros == free[0]) & (poles == free[1]))
        if np.any(rows):
            part = Shape(shape.b[rows], shape.a[rows])
            found.append((Setting(part, rate[rows], band[rows], *free, weight), rows))
    return found


def solve(setting: Setting) -> Exchanged:
    """The free part of the numerator and the denominator, in v, of the best approximation of N sections."""
    f_hz = frequencies(setting)
    problem = problem_of(setting, f_hz)
    split, roots = np.where(split_zeros(setting), -1.0, 1.0), known_roots(setting)
    best = exchange(problem, *_levelled_start(problem, roots, split), ROUNDS)
    for guess in OTHER_ROOTS:
        left = _unsolved(best)
        if len(left):
            start = _levelled_start(problem.rows(left), np.full_like(roots[left], guess), split[left])
            _keep_better(best, left, exchange(problem.rows(left), *start, ROUNDS))
    left = _unsolved(best)
    above = resonates_above(setting.rows(left))
    beyond, rest = left[above], left[~above]
    if len(rest):
        _slower_ways(setting, problem, best, rest)
    best = _between(setting, problem, f_hz, best)
    if len(beyond):
        for kept, new in zip(best, solve(up_to_resonance(setting.rows(beyond))), strict=True):
            kept[beyond] = new
    return best


def _unsolved(best: Exchanged) -> IntArray:
    """The sections whose worst error lies above the lower bound by more than SOLVED."""
    return np.flatnonzero(~(best.worst <= SOLVED * best.bound + NOISE))


def _slower_ways(setting: Setting, problem: Problem, best: Exchanged, rows: IntArray) -> None:
    """Improve the sections `rows` of `best`: with a root at the edge of what is allowed, then by descent."""
    split, roots = np.where(split_zeros(setting), -1.0, 1.0), known_roots(setting)
    for free in _fewer(setting):
        start = _edge_start(setting, problem.rows(rows), roots[rows], free)
        _keep_better(best, rows, exchange(problem.rows(rows), *start, ROUNDS))
    wanted = np.zeros(len(best.worst), dtype=np.bool_)
    wanted[rows] = True
    unsolved = _unsolved(best)
    left = unsolved[wanted[unsolved]]
    if len(left):
        start = descend(setting.rows(left), problem.rows(left), split[left])
        _keep_better(best, left, exchange(problem.rows(left), *start, ROUNDS))


def _keep_better(best: Exchanged, rows: IntArray, other: Exchanged) -> None:
    """Replace the sections `rows` of `best` by `other` where that is better."""
    lower = other.worst < best.worst[rows]
    for kept, new in zip(best, other, strict=True):
        kept[rows[lower]] = new[lower]


def _fewer(setting: Setting) -> list[tuple[int, int]]:
    """Numbers of free zeros and poles where one of either, or of both, goes to z = -1."""
    zeros, poles = setting.zeros, setting.poles
    tried = [(zeros - 1, poles), (zeros, poles - 1), (zeros - 1, poles - 1)] if poles == 2 else [(zeros - 1, poles)]
    return [free for free in tried if free[0] >= 0]


def _edge_start(setting: Setting, problem: Problem, roots: ComplexArray, free: tuple[int, int]) -> State:
    """The best with a zero at z = -1, or a pole as near to it as may be.

    For sections whose best lies at that edge: the problem with a root less, solved by the same means.
    """
    zeros, poles = free
    edge = np.where(poles < setting.poles, NYQUIST_MARGIN, 0.0)
    reduced = replace(problem, zeros=zeros, poles=poles, target=problem.target + np.log1p(edge**2 * problem.t))
    kept = np.concatenate([roots[:, :zeros], roots[:, setting.zeros : setting.zeros + poles]], axis=1)
    done = exchange(reduced, *_levelled_start(reduced, kept, np.ones(len(roots))), ROUNDS)
    a = done.a + edge * np.stack([done.a[:, 1], done.a[:, 2], np.zeros(len(roots))], axis=-1)
    return State(done.b, a)


def _levelled_start(problem: Problem, roots: ComplexArray, split: FloatArray) -> State:
    """The levelled error on the first reference; a flat response where there is none."""
    start = level(problem.at(first_reference(problem, roots)))
    middle = start.b[:, 1] ** 2 + 2.0 * (split - 1.0) * start.b[:, 2] * start.b[:, 0]
    found = start.found & ((middle > 0.0) | (split > 0.0))
    b = np.stack([split * start.b[:, 0], np.sqrt(np.maximum(middle, 0.0)), start.b[:, 2]], axis=-1)
    flat_b, flat_a = (
        np.where(np.arange(2, -1, -1) <= degree, 1.0, 0.0)
        * np.stack([turn, np.full(len(turn), 4.0), np.ones(len(turn))], -1)
        for degree, turn in ((problem.zeros, split), (problem.poles, np.ones(len(split))))
    )
    return State(np.where(found[:, np.newaxis], b, flat_b), np.where(found[:, np.newaxis], start.a, flat_a))


def _between(setting: Setting, problem: Problem, f_hz: FloatArray, best: Exchanged) -> Exchanged:
    """Some more exchange with points between those of the grid, about the extrema.

    A section whose best has a zero at z = -1 stays there: its problem has a zero less.
    """
    on_edge = best.b[:, 2 - setting.zeros] == 0.0 if setting.zeros else np.zeros(len(f_hz), dtype=np.bool_)
    done = Exchanged(*(np.empty_like(part) for part in best))
    for rows, zeros in ((~on_edge, setting.zeros), (on_edge, setting.zeros - 1)):
        if np.any(rows):
            part = Exchanged(*(values[rows] for values in best))
            shorter = replace(problem.rows(rows), zeros=zeros)
            finer = problem_of(setting.rows(rows), _finer(shorter, f_hz[rows], part))
            found = exchange(replace(finer, zeros=zeros), part.b, part.a, LAST_ROUNDS, close=1e-6)
            for whole, values in zip(done, found, strict=True):
                whole[rows] = values
    return done


def _finer(problem: Problem, f_hz: FloatArray, best: Exchanged) -> FloatArray:
    """The grid in Hz with points added on both sides of each extremum."""
    points = alternation(problem.error(best.b, best.a), problem.references).points
    last = f_hz.shape[1] - 1
    part = np.linspace(0.0, 1.0, BETWEEN + 1)[:-1]
    centre = np.take_along_axis(f_hz, points, axis=1)[..., np.newaxis]
    sides = [np.take_along_axis(f_hz, np.clip(points + side, 0, last), axis=1)[..., np.newaxis] for side in (-1, 1)]
    extra = [(centre + part * (side - centre)).reshape(len(f_hz), -1) for side in sides]
    return np.sort(np.concatenate([f_hz, *extra], axis=1), axis=1)
