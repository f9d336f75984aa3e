"""A slower way to the best ratio, for sections whose first reference has no positive solution."""

from __future__ import annotations

from dataclasses import dataclass
from typing import cast

import numpy as np

from a2d.arrays import FloatArray
from a2d.digital.rational.lawson import State, lawson
from a2d.digital.rational.problem import Problem
from a2d.digital.rational.setting import Setting
from a2d.digital.rational.steps import Directions, directions, jacobian, move

STEPS = 60
HIGHEST_START = 0.8
"""Of the band's end: where the bilinear start is exact for sections above it."""


@dataclass(frozen=True, eq=False)
class SectionModel:
    """The sections of a `Problem`, as `lawson` takes them."""

    problem: Problem

    def error(self, state: State) -> FloatArray:
        """Shape [N, 1, G]."""
        return self.problem.error(state.b, state.a)[:, np.newaxis]

    def slopes(self, state: State) -> tuple[FloatArray, object]:
        """Shape [N, 1, G, K], and the `Directions`."""
        ways = directions(self.problem, state.b, state.a)
        return jacobian(self.problem, state.b, state.a, ways)[:, np.newaxis], ways

    def move(self, state: State, ways: object, step: FloatArray) -> State:
        """Positive polynomials stay positive."""
        return State(*move(state.b, state.a, cast(Directions, ways), step))


def descend(setting: Setting, problem: Problem, split: FloatArray) -> State:
    """Positive N and D near the best, from the prewarped bilinear transform; `split` [N] is -1 where c2 is negative."""
    return lawson(SectionModel(problem), bilinear_start(setting, split), STEPS)


def bilinear_start(setting: Setting, split: FloatArray) -> State:
    """Numerator and denominator in v by the bilinear transform, terms that s lacks filled in; each [N, 3]."""
    shape = setting.shape
    a = _scaled(shape.a, setting)
    b = np.abs(_scaled(shape.b, setting)) / np.abs(a).max(axis=-1, keepdims=True)
    a = a / np.abs(a).max(axis=-1, keepdims=True)
    free = np.zeros_like(b)
    kept = {0: b.max(axis=-1)[:, np.newaxis], 1: b[:, _pair_of_terms(setting)], 2: b[:, ::-1]}[setting.zeros]
    free[:, 2 - np.arange(setting.zeros + 1)] = kept
    for power in range(1, setting.zeros + 1):
        column, below = 2 - power, 3 - power
        free[:, column] = np.where(free[:, column] > 0.0, free[:, column], 0.3 * free[:, below])
    free[:, 0] *= split
    return State(free, a)


def _pair_of_terms(setting: Setting) -> list[int]:
    """The terms that one free zero has: of v² and v where a zero stays at 0, of v and 1 in a first-order section."""
    return [1, 0] if setting.poles == 2 else [2, 1]


def _scaled(c: FloatArray, setting: Setting) -> FloatArray:
    """`c` with s = k·v, k prewarped at the resonance or below the band's end."""
    a = setting.shape.a
    two = a[:, 0] != 0.0
    own = np.where(
        two, np.sqrt(np.abs(a[:, 2]) / np.where(two, a[:, 0], 1.0)), np.abs(a[:, 2]) / np.where(two, 1.0, a[:, 1])
    )
    w = np.minimum(own, 2.0 * np.pi * HIGHEST_START * setting.band[:, 1])
    k = w / np.tan(0.5 * w / setting.rate)
    return c * np.stack([k * k, k, np.ones_like(k)], axis=-1)
