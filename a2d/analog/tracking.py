"""Following poles and zeros along a sweep, so that each keeps its number from one position to the next.

A root may be infinite (a part that a control shorts takes the order down) or zero. Distances are counted in nepers
and radians, so that a step of the same ratio is the same step at every frequency.
"""

from __future__ import annotations

import numpy as np

from a2d.arrays import ComplexArray, FloatArray, IntArray

FARTHEST = np.log(1e12)  # nepers from the reference to a root at zero or at infinity
_LEAST_GAIN = 1e-9


def padded(roots: ComplexArray, count: int) -> ComplexArray:
    """The roots and as many at infinity as `count` lacks."""
    return np.concatenate([roots, np.full(count - len(roots), np.inf, dtype=np.complex128)])


def numbered(expected: ComplexArray, now: ComplexArray, reference_rad_s: float) -> ComplexArray:
    """`now` in the order of `expected`, each root where one is expected.

    The sum of the square roots of the distances is the smallest that exchanging two can reach; square roots, so that
    one long jump (to infinity) counts for less than several short ones.
    """
    return now[exchanged(np.sqrt(distances(expected, now, reference_rad_s)))]


def continued(earlier: ComplexArray, before: ComplexArray) -> ComplexArray:
    """Where roots are expected one step further: the reciprocal, a time constant, goes on in a straight line.

    Two roots that hardly notice each other are thus expected to cross. What was infinite or zero, or just became so,
    stays; nothing grows more than a hundredfold.
    """
    usable = np.isfinite(earlier) & np.isfinite(before) & (earlier != 0.0) & (before != 0.0)
    start = np.where(usable, before, 1.0)
    slowing = 2.0 - start / np.where(usable, earlier, 1.0)  # of the reciprocal, relative
    return np.where(usable, start / np.where(slowing.real > 0.01, slowing, 0.01), before)


def between(corners: ComplexArray, weights: FloatArray) -> ComplexArray:
    """Where roots are expected between positions where they are known: `corners` [C, n], `weights` [C] -> [n].

    Their time constants are interpolated; where one is zero, the roots themselves.
    """
    used, w = corners[weights > 0.0], weights[weights > 0.0][:, np.newaxis]
    zero = (used == 0.0).any(axis=0)
    plain = np.isfinite(used) & (used != 0.0)
    safe = np.where(plain, used, 1.0)
    reciprocal = np.sum(np.where(plain, w / safe, 0.0), axis=0)
    by_reciprocal = np.where(reciprocal == 0.0, np.inf, 1.0 / np.where(reciprocal == 0.0, 1.0, reciprocal))
    return np.where(zero, np.sum(np.where(plain, w * safe, 0.0), axis=0), by_reciprocal)


def distances(first: ComplexArray, second: ComplexArray, reference_rad_s: float) -> FloatArray:
    """|log of the ratio| of every root of `first` [n] and every one of `second` [m]; shape [n, m]."""
    size_1, turn_1 = _place(first, reference_rad_s)
    size_2, turn_2 = _place(second, reference_rad_s)
    return np.asarray(np.hypot(size_1[:, np.newaxis] - size_2, turn_1[:, np.newaxis] - turn_2))


def _place(roots: ComplexArray, reference_rad_s: float) -> tuple[FloatArray, FloatArray]:
    """Log modulus and angle from the negative real axis; at zero and infinity the angle is 0."""
    finite = np.isfinite(roots) & (roots != 0.0)
    safe = np.where(finite, roots, -reference_rad_s)
    edge = np.where(roots == 0.0, -FARTHEST, FARTHEST)
    size = np.where(finite, np.clip(np.log(np.abs(safe) / reference_rad_s), -FARTHEST, FARTHEST), edge)
    return size, np.angle(-safe)


def exchanged(cost: FloatArray) -> IntArray:
    """Which column each row of `cost` [n, n] takes: from the rows' own cheapest order, by exchanging two at a time."""
    n = len(cost)
    taken = _greedy(cost)
    rows = np.arange(n)
    for _ in range(n * n):
        own = cost[rows, taken]
        crossed = cost[:, taken]  # [i, j]: row i with the column of row j
        gain = own[:, np.newaxis] + own - crossed - crossed.T
        i, j = divmod(int(np.argmax(gain)), n) if n else (0, 0)
        if n == 0 or gain[i, j] <= _LEAST_GAIN:
            break
        taken[i], taken[j] = taken[j], taken[i]
    return taken


def _greedy(cost: FloatArray) -> IntArray:
    left = cost.copy()
    taken = np.zeros(len(cost), dtype=np.int64)
    for _ in range(len(cost)):
        i, j = divmod(int(np.argmin(left)), len(cost))
        taken[i] = j
        left[i, :], left[:, j] = np.inf, np.inf
    return taken
