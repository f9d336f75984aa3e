"""Which part does how much: sensitivities, first-order spread, worst-case corners."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from a2d.analog.spread import SpreadModel
from a2d.analog.spread_draws import DEVIATIONS
from a2d.arrays import FloatArray

_STEP = 1e-4  # relative: the difference's own error is some 1e-8, rounding over it 1e-11
_ALL_CORNERS = 10  # independent parts up to which every combination of ends is tried


@dataclass(frozen=True)
class Sensitivity:
    """What one part, or a group of matched ones, does.

    Attributes
    ----------
    name
        The part; several names of matched parts.
    db_per_percent
        The largest change of level for 1 % of the value, with its sign.
    at_hz
        Where.
    tolerance
        As a fraction; the largest of a group.
    contribution_db
        The largest change of level, either way, at the end of the tolerance, to first order.
    """

    name: str
    db_per_percent: float
    at_hz: float
    tolerance: float
    contribution_db: float


def slopes_db(model: SpreadModel) -> FloatArray:
    """d(level)/d(relative deviation) of each part in dB, [n, F], by central differences."""
    n = len(model.parts)
    steps = np.concatenate([1.0 + _STEP * np.eye(n), 1.0 - _STEP * np.eye(n)])
    levels = model.level_db(steps)
    return np.asarray((levels[:n] - levels[n:]) / (2.0 * _STEP))


def group_slopes_db(model: SpreadModel, slopes: FloatArray) -> FloatArray:
    """d(level)/d(deviation as a share of the tolerance) of each group, [groups, F]."""
    out = np.zeros((model.groups, slopes.shape[1]))
    np.add.at(out, [part.group for part in model.parts], slopes * model.tolerances[:, np.newaxis])
    return out


def sensitivities(model: SpreadModel) -> list[Sensitivity]:
    """Every part or matched group, the one that moves the response furthest within its tolerance first."""
    of_group = group_slopes_db(model, slopes_db(model))
    rows = []
    for group, curve in enumerate(of_group):
        parts = [part for part in model.parts if part.group == group]
        k = int(np.argmax(np.abs(curve)))
        tolerance = max(part.tolerance for part in parts)
        rows.append(
            Sensitivity(
                name=" + ".join(part.name for part in parts),
                db_per_percent=float(curve[k] / (100.0 * tolerance)),
                at_hz=float(model.f_hz[k]),
                tolerance=tolerance,
                contribution_db=float(abs(curve[k])),
            )
        )
    return sorted(rows, key=lambda row: -row.contribution_db)


def first_order_deviation_db(model: SpreadModel) -> FloatArray:
    """Standard deviation of the level to first order, [F]: sqrt(Σ (slope·σ)²) over independent groups.

    JCGM 100:2008 (Guide to the expression of uncertainty in measurement), equation 10.
    """
    of_group = group_slopes_db(model, slopes_db(model))
    kinds = {part.group: part.distribution for part in reversed(model.parts)}
    sigma = np.array([DEVIATIONS[kinds[g]] for g in range(model.groups)])
    return np.asarray(np.sqrt(np.sum((of_group * sigma[:, np.newaxis]) ** 2, axis=0)))


@dataclass(frozen=True, eq=False)
class Corners:
    """The worst cases: all parts at one end of their tolerance or the other.

    Attributes
    ----------
    factors
        Shape [C, n]: the corners that were tried.
    lowest_db, highest_db
        Shape [F]: the extremes over them.
    lowest_at, highest_at
        Shape [F]: by which corner.
    """

    factors: FloatArray
    lowest_db: FloatArray
    highest_db: FloatArray
    lowest_at: FloatArray
    highest_at: FloatArray


def corners(model: SpreadModel) -> Corners:
    """Worst-case corners: all combinations of ends for few parts, else those that the signs of the slopes point at.

    With more than ten independent parts each frequency's own worst case is taken to be where every part goes the way
    that its slope says. Either is the worst case as long as no slope changes its sign within the tolerances; where one
    does (a track of 20 % can do it), the extreme lies inside, and the drawn units show it.
    """
    if model.groups <= _ALL_CORNERS:
        signs = np.array(list(np.ndindex(*(2,) * model.groups)), dtype=np.float64) * 2.0 - 1.0
    else:
        directions = np.sign(group_slopes_db(model, slopes_db(model)).T)
        directions[directions == 0.0] = 1.0
        signs = np.unique(np.concatenate([directions, -directions]), axis=0)
    groups = [part.group for part in model.parts]
    factors = 1.0 + model.tolerances * signs[:, groups]
    levels = model.level_db(factors)
    return Corners(factors, levels.min(axis=0), levels.max(axis=0), levels.argmin(axis=0), levels.argmax(axis=0))
