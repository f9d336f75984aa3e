"""Order and scaling of the sections: the best signal-to-noise ratio with no boundary louder than the output.

Every boundary inside the cascade is scaled so that a sine reaches there what it reaches at the output (Jackson 1970,
see `noise`). The noise of a section then depends only on which sections come before it, and the best of all orders is
found by dynamic programming over the sets of sections already placed (Held and Karp 1962, J. SIAM 10(1)).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cache

import numpy as np

from a2d.arrays import ComplexArray, FloatArray
from a2d.wordlength.noise import boundary_peaks, circle_grid, mean_over_circle, noise_gains, squared_responses

ALL_ORDERS_UP_TO = 8  # 1024 placings; the work more than doubles with each section
MOVES_UP_TO = 14  # beyond, only neighbours are swapped


@dataclass(frozen=True, eq=False)
class Arrangement:
    """A cascade in a certain order and scaling.

    Parameters
    ----------
    order
        Which of the original sections stands where.
    sos
        Shape [S, 6].
    peaks
        Shape [S]: the largest |H| from the input to each section's output.
    noise
        The power gain from the sections' rounding to the output, summed.
    """

    order: tuple[int, ...]
    sos: FloatArray
    peaks: FloatArray
    noise: float

    @property
    def boundary_db(self) -> FloatArray:
        """Each boundary's peak re the output's, dB; shape [S], the last is 0."""
        return np.asarray(20.0 * np.log10(self.peaks / self.peaks[-1]))

    @property
    def signal_to_noise_db(self) -> float:
        """The largest undistorted sine at the output over the noise there, in dB re one rounding's noise.

        A boundary louder than the output costs signal: the input has to be that much lower.
        """
        loss = max(0.0, float(np.max(self.boundary_db)))
        return float(-10.0 * np.log10(self.noise)) - loss


def as_it_is(
    placed: FloatArray, order: tuple[int, ...] | None = None, structure: str = "direct_form_1", error_feedback: int = 0
) -> Arrangement:
    """The figures of sections `placed` [S, 6], which already stand in `order`."""
    noise = float(np.sum(noise_gains(placed, structure, error_feedback)))
    return Arrangement(tuple(range(len(placed))) if order is None else order, placed, boundary_peaks(placed), noise)


def scaled(
    sos: FloatArray, order: tuple[int, ...], structure: str = "direct_form_1", error_feedback: int = 0
) -> Arrangement:
    """The sections in an order, every boundary scaled to the output's peak; the whole response stays what it was."""
    placed = sos[list(order)].copy()
    level = boundary_peaks(placed)
    cumulative = level[-1] / level
    placed[:, :3] *= (cumulative / np.concatenate([[1.0], cumulative[:-1]]))[:, np.newaxis]
    return as_it_is(placed, order, structure, error_feedback)


def best_arrangement(sos: FloatArray, structure: str = "direct_form_1", error_feedback: int = 0) -> Arrangement:
    """The order with the best signal-to-noise ratio, scaled.

    Parameters
    ----------
    sos
        Shape [S, 6]. All orders are compared for up to `ALL_ORDERS_UP_TO` sections; beyond, orders are improved by
        moving one section at a time until no move helps.
    structure, error_feedback
        What rounds, and so where its noise enters.
    """
    cost = _cost_of_placing(sos, structure, error_feedback)
    search = _all_orders if len(sos) <= ALL_ORDERS_UP_TO else _moves
    return scaled(sos, search(len(sos), cost), structure, error_feedback)


Cost = Callable[[int, int], float]


def _cost_of_placing(sos: FloatArray, structure: str, error_feedback: int) -> Cost:
    """cost(before, k): the noise at the output of section k after the set `before` (a bit a section), scaled.

    The noise of section k passes the sections that are not yet placed; scaling makes it (peak up to k)²/(peak of all)²
    of what it was.
    """
    count = len(sos)
    w, u = circle_grid(sos)
    shaped, passed = squared_responses(sos, u, structure, error_feedback)

    @cache
    def through(placed: int) -> FloatArray:
        return np.asarray(np.prod(passed[[j for j in range(count) if placed >> j & 1]], axis=0))

    def cost(before: int, k: int) -> float:
        placed = before | 1 << k
        after = ((1 << count) - 1) & ~placed
        return float(mean_over_circle(shaped[k] * through(after), w) * np.max(through(placed)))

    return cost


def _all_orders(count: int, cost: Cost) -> tuple[int, ...]:
    best: dict[int, tuple[float, tuple[int, ...]]] = {0: (0.0, ())}
    for placed in range(1, 1 << count):
        choices = []
        for k in range(count):
            if placed >> k & 1:
                before = placed & ~(1 << k)
                choices.append((best[before][0] + cost(before, k), (*best[before][1], k)))
        best[placed] = min(choices)
    return best[(1 << count) - 1][1]


def _moves(count: int, cost: Cost) -> tuple[int, ...]:
    """From a few orders, move one section at a time (or swap two neighbours) as long as that helps."""
    starts = (tuple(range(count)), tuple(reversed(range(count))), _greedy(count, cost))
    found = [_improved(start, cost) for start in starts]
    return min(found)[1]


def _improved(order: tuple[int, ...], cost: Cost) -> tuple[float, tuple[int, ...]]:
    count = len(order)
    reach = count if count <= MOVES_UP_TO else 1
    known = cache(cost)

    def total(candidate: tuple[int, ...]) -> float:
        before, noise = 0, 0.0
        for k in candidate:
            noise += known(before, k)
            before |= 1 << k
        return noise

    noise = total(order)
    while True:
        moves = [(i, j) for i in range(count) for j in range(count) if 0 < abs(i - j) <= reach]
        best = min((_moved(order, i, j) for i, j in moves), key=total)
        if not total(best) < noise:
            return noise, order
        order, noise = best, total(best)


def _greedy(count: int, cost: Cost) -> tuple[int, ...]:
    order: tuple[int, ...] = ()
    before = 0
    while len(order) < count:
        k = min((k for k in range(count) if not before >> k & 1), key=lambda k: cost(before, k))
        order, before = (*order, k), before | 1 << k
    return order


def _moved(order: tuple[int, ...], i: int, j: int) -> tuple[int, ...]:
    rest = order[:i] + order[i + 1 :]
    return rest[:j] + (order[i],) + rest[j:]


def nearest_zeros(sos: FloatArray) -> tuple[int, ...]:
    """For each section's poles, the section whose zeros they should take: the poles closest to the circle choose first.

    The usual rule (e.g. Oppenheim and Schafer, Discrete-Time Signal Processing, 3rd ed., section 6.9.3). `sos` [S, 6].
    """
    zeros, poles = _upper_root(sos[:, :3]), _upper_root(sos[:, 3:])
    free, chosen = list(range(len(sos))), [0] * len(sos)
    for k in np.argsort(-np.abs(poles), kind="stable").tolist():
        chosen[k] = min(free, key=lambda j, k=k: (abs(zeros[j] - poles[k]), j != k))  # type: ignore[misc]
        free.remove(chosen[k])
    return tuple(chosen)


def _upper_root(c: FloatArray) -> ComplexArray:
    """The root of c0·z² + c1·z + c2 in the upper half plane (or the larger real one); c [S, 3] -> [S]."""
    found = []
    for row in c:
        roots = np.roots(np.trim_zeros(row, "f"))
        found.append(max(roots, key=lambda r: (r.imag, abs(r))) if len(roots) else 0.0)
    return np.array(found, dtype=np.complex128)
