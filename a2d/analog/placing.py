"""Sharing out roots among sections: near the poles, couples together, nowhere more zeros than poles."""

from __future__ import annotations

import itertools
from dataclasses import dataclass
from functools import cache

import numpy as np

from a2d.analog.tracking import exchanged
from a2d.arrays import BoolArray, FloatArray, IntArray

APART = 1e3  # the cost of a couple in two sections
IMPROPER = 1e6  # of a section with more zeros than poles at one position
_TRY_ALL = 6  # places up to which every arrangement is tried


@dataclass(frozen=True, eq=False)
class Placing:
    """n roots on n places.

    Attributes
    ----------
    cost
        Shape [n, n]: of each root on each place.
    owner
        Shape [n]: the section of each place.
    couples
        Pairs of roots that belong into one section.
    finite
        Shape [N, n]: whether each root is finite at each position.
    capacity
        Shape [N, sections]: how many finite roots each section may hold there.
    """

    cost: FloatArray
    owner: IntArray
    couples: list[tuple[int, int]]
    finite: BoolArray
    capacity: IntArray

    def totals(self, places: IntArray) -> FloatArray:
        """The cost of arrangements [M, n] (the place of each root); shape [M]."""
        total = np.take_along_axis(self.cost[np.newaxis], places[..., np.newaxis], axis=-1)[..., 0].sum(axis=-1)
        sections = self.owner[places]
        for i, j in self.couples:
            total += APART * (sections[:, i] != sections[:, j])
        for section in range(self.capacity.shape[1]):
            held = (sections == section).astype(np.float64) @ self.finite.T
            total += IMPROPER * np.maximum(held - self.capacity[:, section], 0.0).sum(axis=-1)
        return np.asarray(total)

    def best(self, start: IntArray | None = None) -> tuple[IntArray, float]:
        """The cheapest arrangement and its cost; beyond six roots the cheapest that exchanging two at a time finds."""
        n = len(self.owner)
        if n <= _TRY_ALL:
            trials = _arrangements(n)
            totals = self.totals(trials)
            k = int(np.argmin(totals))
            return trials[k].copy(), float(totals[k])
        taken = exchanged(self.cost) if start is None else start
        least = float(self.totals(taken[np.newaxis])[0])
        for _ in range(n * n):
            trials = np.array([_swapped(taken, i, j) for i in range(n) for j in range(i)])
            totals = self.totals(trials)
            k = int(np.argmin(totals))
            if totals[k] >= least - 1e-9:
                break
            taken, least = trials[k], float(totals[k])
        return taken, least

    def distinct(self) -> list[tuple[IntArray, float]]:
        """Arrangements that differ in more than the order within a section, each with its cost, the cheapest first."""
        n = len(self.owner)
        trials = _arrangements(n) if n <= _TRY_ALL else self.best(np.arange(n))[0][np.newaxis]
        totals = self.totals(trials)
        order = np.argsort(totals, kind="stable")
        _, first = np.unique(self.owner[trials[order]], axis=0, return_index=True)
        return [(trials[order[k]], float(totals[order[k]])) for k in np.sort(first)]


@cache
def _arrangements(n: int) -> IntArray:
    return np.array(list(itertools.permutations(range(n))), dtype=np.int64).reshape(-1, n)


def _swapped(places: IntArray, i: int, j: int) -> IntArray:
    changed = places.copy()
    changed[i], changed[j] = places[j], places[i]
    return changed


def pairings(items: list[int]) -> list[tuple[tuple[int, ...], ...]]:
    """Every way to share out items in twos, one alone where their number is odd; [(0, 1), (2,)], ..."""
    if len(items) <= 1:
        return [tuple((k,) for k in items)]
    first, rest = items[0], items[1:]
    found = [((first, other), *more) for k, other in enumerate(rest) for more in pairings(rest[:k] + rest[k + 1 :])]
    return found + ([((first,), *more) for more in pairings(rest)] if len(items) % 2 else [])
