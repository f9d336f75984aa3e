"""Linear interpolation between the positions of a table: its error, and that it is stable.

A second-order denominator 1 + a1·z⁻¹ + a2·z⁻² is stable exactly where (a1, a2) lies inside the triangle |a2| < 1,
|a1| < 1 + a2. A triangle is convex: whatever lies between stable corners, in a cell of any number of axes, is stable.
"""

from __future__ import annotations

import itertools
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import TypeAlias

import numpy as np

from a2d.arrays import FloatArray, IntArray
from a2d.compare.positions import MAGNITUDE, Piece, position_errors

TwinAt: TypeAlias = Callable[[FloatArray], FloatArray]
# Where each cell is sampled first, by the number of axes; (0.5,) beyond.
_INNER = {1: (0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9), 2: (0.5,)}
_NEAR = 0.85  # of the largest sample: a sample's own cell has at most that much more
_FEWEST, _MOST_CANDIDATES = 4, {1: 64, 2: 12}
_ZOOMS = 3
_ALLOWANCE = 1.005  # on the error found, for what the search leaves between its last points


@dataclass(frozen=True)
class Between:
    """The largest level difference between interpolated coefficients and the twin made for the same position.

    Attributes
    ----------
    worst_db
        Its modulus, dB, never exceeded between positions.
    at_hz
        Where it is found, Hz.
    at
        The controls' scales there.
    """

    worst_db: float
    at_hz: float
    at: tuple[float, ...]


def triangle_margin(sos: FloatArray) -> FloatArray:
    """How far inside the stability triangle the poles of `sos` [..., 6] lie: min(1 - |a2|, 1 + a2 - |a1|), [...].

    It is a concave function of the coefficients: between two positions it is no less than interpolated itself.
    """
    a1, a2 = sos[..., 4], sos[..., 5]
    return np.minimum(1.0 - np.abs(a2), 1.0 + a2 - np.abs(a1))


def interpolate(table: FloatArray, knots: Sequence[FloatArray], scales: FloatArray) -> FloatArray:
    """The table [P1, ..., PK, ...] at `scales` [N, K], linear along each axis; shape [N, ...].

    `knots` are the positions on each scale; an axis of one position does not matter. Scales lie within the knots.
    """
    cells = [_cell(k, scales[:, i]) for i, k in enumerate(knots)]
    out = np.zeros((len(scales), *table.shape[len(knots) :]))
    for corner in itertools.product((0, 1), repeat=len(knots)):
        weight = np.ones(len(scales))
        index = []
        for side, (low, part) in zip(corner, cells, strict=True):
            weight = weight * (part if side else 1.0 - part)
            index.append(np.where(part > 0.0, low + side, low) if side else low)
        out += weight.reshape(-1, *[1] * (out.ndim - 1)) * table[tuple(index)]
    return out


def _cell(knots: FloatArray, scale: FloatArray) -> tuple[IntArray, FloatArray]:
    """The knot below, and which part of the way to the next."""
    if len(knots) == 1:
        return np.zeros(len(scale), dtype=np.int64), np.zeros(len(scale))
    sign = 1.0 if knots[-1] > knots[0] else -1.0
    low = np.clip(np.searchsorted(sign * knots, sign * scale, side="right") - 1, 0, len(knots) - 2).astype(np.int64)
    return low, (scale - knots[low]) / (knots[low + 1] - knots[low])


def between_error(
    knots: Sequence[FloatArray],
    stepped: Sequence[bool],
    table: FloatArray,
    twin_at: TwinAt,
    band_hz: FloatArray,
    rate_hz: float,
) -> Between:
    """The worst error of interpolation over all cells of a table.

    Parameters
    ----------
    knots, stepped
        One an axis: its positions, and whether there is nothing between them.
    table
        Shape [P1, ..., PK, T, 6].
    twin_at
        From scales [N, K] to the twins [N, T, 6] made for those positions.
    band_hz, rate_hz
        Hz.
    """

    def errors(scales: FloatArray) -> tuple[FloatArray, FloatArray]:
        piece = Piece(twin_at(scales), interpolate(table, knots, scales), np.arange(len(scales)))
        found = position_errors([piece], band_hz, rate_hz, rate_hz, magnitude_only=True)
        return np.abs(found.worst[MAGNITUDE]), found.at_hz[MAGNITUDE]

    free = [i for i, s in enumerate(stepped) if not s and len(knots[i]) > 1]
    if not free:
        return Between(0.0, float(band_hz[0]), tuple(float(k[0]) for k in knots))
    scales = _lattice(knots, free)
    worst, at_hz = errors(scales)
    best = _candidates(worst, len(free))
    found = [(float(worst[k]), float(at_hz[k]), scales[k]) for k in best]
    width = 1.0 / (len(_INNER.get(len(free), (0.5,))) + 1)
    for _ in range(_ZOOMS):
        trial = np.stack([_around(knots, free, point, width) for _, _, point in found])
        worst, at_hz = (e.reshape(trial.shape[:2]) for e in errors(trial.reshape(-1, len(knots))))
        peaks = np.argmax(worst, axis=-1)
        rows = [(float(worst[c, k]), float(at_hz[c, k]), trial[c, k]) for c, k in enumerate(peaks)]
        found = [max(pair, key=lambda row: row[0]) for pair in zip(found, rows, strict=True)]
        width /= 4.0
    most = max(found, key=lambda row: row[0])
    return Between(most[0] * _ALLOWANCE, most[1], tuple(float(v) for v in most[2]))


def _candidates(worst: FloatArray, axes: int) -> IntArray:
    """The sampled points whose surroundings may hold the largest error, the largest first."""
    ranked = np.argsort(worst)[::-1][: _MOST_CANDIDATES[min(axes, 2)]]
    near = worst[ranked] >= _NEAR * worst[ranked[0]]
    return np.asarray(ranked[near | (np.arange(len(ranked)) < _FEWEST)])


def _lattice(knots: Sequence[FloatArray], free: Sequence[int]) -> FloatArray:
    """Points between the positions [N, K]: inside the cells and on their edges."""
    inner = _INNER.get(len(free), (0.5,))
    lines, is_knot = [], []
    for axis, k in enumerate(knots):
        if axis in free:
            parts = np.array([0.0, *inner])
            line = (k[:-1, np.newaxis] + np.diff(k)[:, np.newaxis] * parts).ravel()
            lines.append(np.append(line, k[-1]))
            is_knot.append(np.append(np.tile(parts == 0.0, len(k) - 1), True))
        else:
            lines.append(k)
            is_knot.append(np.ones(len(k), dtype=np.bool_))
    points = np.array(list(itertools.product(*lines)))
    known = np.all(np.array(list(itertools.product(*is_knot))), axis=-1)
    return np.asarray(points[~known])


def _around(knots: Sequence[FloatArray], free: Sequence[int], scales: FloatArray, width: float) -> FloatArray:
    """A small lattice around one point, `width` in parts of its cell, kept inside the travel."""
    steps = np.linspace(-1.0, 1.0, 9 if len(free) == 1 else 5) * width
    lines = []
    for axis, k in enumerate(knots):
        if axis in free:
            low = int(_cell(k, scales[axis : axis + 1])[0][0])
            line = scales[axis] + steps * (k[low + 1] - k[low])
            lines.append(np.clip(line, min(k[0], k[-1]), max(k[0], k[-1])))
        else:
            lines.append(scales[axis : axis + 1])
    return np.array(list(itertools.product(*lines)))
