"""Twins of what a group of controls moves: at its positions, and what interpolation between them is worth."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import partial

import numpy as np

from a2d import checks
from a2d.analog.axis import Group
from a2d.analog.sections import Sections
from a2d.analog.sweep import EntrySweep, sweep_entry
from a2d.arrays import FloatArray
from a2d.compare.between import Between, between_error
from a2d.compare.errors import band_of
from a2d.design.model import Design
from a2d.digital.methods import EXACT_AT_MATCH, METHODS
from a2d.digital.refusal import SectionRefused
from a2d.errors import ConversionError, ParameterError

MOST_POSITIONS = 65536


@dataclass(frozen=True, eq=False)
class GroupSweep:
    """A group of controls with the analog sections of every entry that it moves."""

    group: Group
    entries: tuple[EntrySweep, ...]


def sweep_group(design: Design, group: Group) -> GroupSweep:
    """Every entry that the group moves, at all positions.

    Raises
    ------
    ParameterError
        A position cannot be built; there are too many.
    """
    count = int(np.prod(group.shape))
    if count > MOST_POSITIONS:
        raise ParameterError(f'"{group.name}" has {count} positions in all combinations (allowed {MOST_POSITIONS})')
    return GroupSweep(group, tuple(sweep_entry(design, group, entry) for entry in group.entries))


def band_at(design: Design, rate: float) -> FloatArray:
    """The band to judge in at a sample rate, Hz, shape [2]."""
    return band_of(rate, design.limits.band if design.limits is not None else None)


def twins_of(design: Design, entry: EntrySweep, sections: Sections, rate: float) -> FloatArray:
    """Digital sections of one entry's `sections` [..., S, 3]; shape [..., S, 6].

    Raises
    ------
    ConversionError, ParameterError
        A section has no twin at one of the positions.
    """
    section, band = design.sections[entry.entry], band_at(design, rate)
    name = section.method or design.design.method
    match = _match(sections.f0_hz, section.match, entry.tracked is not None, float(band[1]))
    if name not in METHODS:
        raise ParameterError(f"there is no method {name!r} for a control (allowed: {', '.join(METHODS)})")
    if name in EXACT_AT_MATCH:
        checks.below_half_rate(f'the match frequency of section "{section.name}" along its control', match, rate)
    try:
        return METHODS[name](sections.b, sections.a, np.asarray(rate), match, band)
    except SectionRefused as error:
        raise ConversionError(f'{error.reason} (section "{section.name}" along its control at {rate:g} Hz)') from error


def _match(f0_hz: FloatArray, stated_hz: float | None, found: bool, top_hz: float) -> FloatArray:
    """`a2d.digital.match.match_points` for the sections of one entry at many positions, [..., S]."""
    if stated_hz is not None:
        return np.full(f0_hz.shape, float(stated_hz))
    return np.minimum(f0_hz, top_hz) if found else f0_hz


class TwinsBetween:
    """Between the positions: the twins made for any scale, each set of scales built once for all sample rates."""

    def __init__(self, design: Design, sweep: GroupSweep) -> None:
        self._design, self._sweep = design, sweep
        self._known: dict[tuple[int, bytes], Sections] = {}

    def error(self, tables: Sequence[FloatArray], rate: float) -> Between:
        """The worst error of interpolating `tables`, one an entry; those of several entries add, whatever their signs.

        Where no control has anything between its positions the error is zero.
        """
        stepped = [axis.control.stepped for axis in self._sweep.group.axes]
        found = []
        for entry, table in zip(self._sweep.entries, tables, strict=True):
            moving = self._sweep.group.moving(entry.entry)
            knots = [a.knots if m else a.knots[:1] for a, m in zip(self._sweep.group.axes, moving, strict=True)]
            band = band_at(self._design, rate)
            found.append(between_error(knots, stepped, table, partial(self._at, entry, rate), band, rate))
        worst = max(found, key=lambda one: one.worst_db)
        return replace(worst, worst_db=sum(one.worst_db for one in found))

    def _at(self, entry: EntrySweep, rate: float, scales: FloatArray) -> FloatArray:
        key = (entry.entry, scales.tobytes())
        if key not in self._known:
            self._known[key] = entry.at(scales)
        return twins_of(self._design, entry, self._known[key], rate)
