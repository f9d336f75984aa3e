"""The positions of controls whose design states an error of interpolation instead of their number."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from a2d.analog.axis import Axis, Group
from a2d.analog.sweep import EntrySweep, sweep_entry
from a2d.arrays import FloatArray
from a2d.compare.control_twins import TwinsBetween, band_at, sweep_group, twins_of
from a2d.compare.smallest import Dense, smallest_travels
from a2d.design.model import Design
from a2d.errors import ParameterError

_DENSE = 513  # travels among which the positions of a smallest table are chosen
_ATTEMPTS = 6


def with_knots(design: Design, group: Group) -> Group:
    """The group with the fewest positions on each axis that states an error instead of their number."""
    for index, axis in enumerate(group.axes):
        if axis.control.error is not None:
            group = _smallest(design, group, index, float(axis.control.error))
    return group


def _smallest(design: Design, group: Group, index: int, limit_db: float) -> Group:
    """Positions for one axis, the others at their ends and where the design has them."""
    travels = np.linspace(0.0, 1.0, _DENSE)
    axes = [
        axis.spaced(travels) if k == index else replace(axis, knots=_few(axis.knots, axis.nearest_to_now))
        for k, axis in enumerate(group.axes)
    ]
    dense_group = replace(group, axes=tuple(axes))
    moved = [entry for entry in group.entries if dense_group.moving(entry)[index]]
    entries = tuple(sweep_entry(design, dense_group, entry) for entry in moved)
    dense = [dense_twins(design, entries, index, float(rate)) for rate in design.design.sample_rates]
    target, scales, best = 0.98 * limit_db, dense_group.axes[index].knots, np.inf
    for _ in range(_ATTEMPTS):
        chosen = smallest_travels(dense, scales, target)
        found = replace(dense_group, axes=_replaced(axes, index, group.axes[index].spaced(travels[chosen])))
        worst = _interpolated_db(design, found)
        best = min(best, worst)
        if worst <= limit_db:
            return replace(group, axes=_replaced(group.axes, index, found.axes[index]))
        target *= max(0.5, 0.97 * limit_db / worst)
    raise ParameterError(
        f'control "{group.axes[index].name}": no table found keeps the error of interpolation below '
        f"{limit_db:g} dB (the best has {best:.3g} dB; allow that, or end the travel before the ends of the track)"
    )


def _few(knots: FloatArray, now: int) -> FloatArray:
    return knots[sorted({0, now, len(knots) - 1})]


def _replaced(axes: Sequence[Axis], index: int, axis: Axis) -> tuple[Axis, ...]:
    return tuple(axis if k == index else other for k, other in enumerate(axes))


def dense_twins(design: Design, entries: tuple[EntrySweep, ...], index: int, rate: float) -> list[Dense]:
    """Each entry's twins along axis `index`, the other axes flattened to one."""
    found = []
    for entry in entries:
        both = [twins_of(design, entry, sections, rate) for sections in (entry.sections, entry.exact)]
        sos, exact = (np.moveaxis(s, index, -3).reshape(-1, s.shape[index], *s.shape[-2:]) for s in both)
        found.append(Dense.of(sos, exact, band_at(design, rate), rate))
    return found


def _interpolated_db(design: Design, group: Group) -> float:
    """The worst error of interpolation at any sample rate."""
    sweep = sweep_group(design, group)
    between = TwinsBetween(design, sweep)
    rates = [float(rate) for rate in design.design.sample_rates]
    return max(
        between.error([twins_of(design, entry, entry.sections, rate) for entry in sweep.entries], rate).worst_db
        for rate in rates
    )
