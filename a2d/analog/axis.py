"""A control as an axis: its scale, its positions on it, and what it moves to where."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np

from a2d.arrays import ArrayLike, FloatArray
from a2d.design.control import Control
from a2d.design.model import Design
from a2d.design.moves import Move, Value, read_value, resolve, with_value
from a2d.design.section import Section

FIRST_GUESS = 2  # positions to start from where the file gives an error instead of their number


@dataclass(frozen=True, eq=False)
class Axis:
    """One control.

    Attributes
    ----------
    control, moves
        What the file says, and what its paths point at.
    knots
        Shape [P], strictly monotonic: the positions on the control's scale, which is the value of the first path (so
        travel for a potentiometer, dB for a gain, Hz for a frequency), or 0, 1, 2 ... for a switch.
    """

    control: Control
    moves: tuple[Move, ...]
    knots: FloatArray

    @property
    def name(self) -> str:
        """The control's name."""
        return self.control.name

    @property
    def unit(self) -> str:
        """The scale's unit; empty for travel and for a switch."""
        return "" if self.control.stepped else self.moves[0].unit

    @cached_property
    def _ends(self) -> list[tuple[float, float]]:
        """What the file says of the two ends, for each path."""
        ends = [(move, self.control.ends(i)) for i, move in enumerate(self.moves)]
        return [(float(read_value(move, start)), float(read_value(move, stop))) for move, (start, stop) in ends]

    @cached_property
    def _steps(self) -> list[tuple[Value, ...]]:
        """What the file says of a switch's positions, for each path."""
        rows = [(move, self.control.at_positions(i)) for i, move in enumerate(self.moves)]
        return [tuple(read_value(move, value) for value in values) for move, values in rows]

    def at(self, scale: float, entry: int | None = None) -> list[tuple[Move, Value]]:
        """What each path (of one `[[section]]` entry) is moved to where the control stands at `scale`."""
        mine = [(i, move) for i, move in enumerate(self.moves) if entry is None or move.entry == entry]
        if self.control.stepped:
            return [(move, self._steps[i][round(scale)]) for i, move in mine]
        travel = self._travel(scale)
        return [(move, self._value(i, travel)) for i, move in mine]

    def _travel(self, value: float) -> float:
        """How far along the way the first path has `value`, 0 to 1."""
        start, stop = self._ends[0]
        if self.control.spacing == "logarithmic":
            return math.log(value / start) / math.log(stop / start)
        return (value - start) / (stop - start)

    def _value(self, index: int, travel: float) -> float:
        """The ends themselves at the ends, whatever rounding says, and never beyond them."""
        start, stop = self._ends[index]
        if self.control.spacing == "logarithmic":
            between = start * (stop / start) ** travel
        else:
            between = start + (stop - start) * travel
        return float(min(max(between, min(start, stop)), max(start, stop)))

    def spaced(self, travels: ArrayLike) -> Axis:
        """The same control with its positions at `travels` [P], 0 to 1 along the way."""
        return replace(self, knots=np.array([self._value(0, float(t)) for t in np.asarray(travels)]))

    def cell(self, scale: float) -> tuple[int, float]:
        """The position below, and which part of the way to the next; a switch is at a position."""
        if self.control.stepped or len(self.knots) == 1:
            return int(np.argmin(np.abs(self.knots - scale))), 0.0
        sign = 1.0 if self.knots[-1] > self.knots[0] else -1.0
        low = int(np.searchsorted(sign * self.knots, sign * scale, side="right")) - 1
        low = min(max(low, 0), len(self.knots) - 2)
        part = (scale - self.knots[low]) / (self.knots[low + 1] - self.knots[low])
        return low, float(min(max(part, 0.0), 1.0))

    @property
    def nearest_to_now(self) -> int:
        """The position nearest to what the design file has."""
        if self.control.stepped:
            here = [m.now for m in self.moves]
            same = [sum(v == n for (_, v), n in zip(self.at(k), here, strict=True)) for k in self.knots]
            return int(np.argmax(same))
        now = self.moves[0].now
        return int(np.argmin(np.abs(self.knots - now))) if isinstance(now, float) else 0


@dataclass(frozen=True, eq=False)
class Group:
    """Controls that are swept together in all combinations, or one alone.

    Attributes
    ----------
    name
        The grid's, or the lone control's.
    axes
        K of them; a table of the group has the shape [P1, ..., PK, ...].
    """

    name: str
    axes: tuple[Axis, ...]

    @property
    def shape(self) -> tuple[int, ...]:
        """Positions of each axis."""
        return tuple(len(axis.knots) for axis in self.axes)

    @property
    def entries(self) -> tuple[int, ...]:
        """The indices of the `[[section]]` entries that the group moves, rising."""
        return tuple(sorted({move.entry for axis in self.axes for move in axis.moves}))

    def moving(self, entry: int) -> tuple[bool, ...]:
        """Whether each axis moves that entry."""
        return tuple(any(move.entry == entry for move in axis.moves) for axis in self.axes)

    def section_at(self, design: Design, entry: int, scales: FloatArray) -> Section:
        """The entry with the controls at `scales` [K]; everything else as in the design."""
        section = design.sections[entry]
        for axis, scale in zip(self.axes, scales, strict=True):
            for move, value in axis.at(float(scale), entry):
                section = with_value(section, move, value)
        return section


def axis_of(design: Design, control: Control) -> Axis:
    """A control of a checked design as an axis."""
    moves = tuple(resolve(design.sections, path) for path in control.moves)
    axis = Axis(control, moves, np.arange(float(len(control.values or ()))))
    return axis if control.stepped else axis.spaced(np.linspace(0.0, 1.0, control.positions or FIRST_GUESS))


def groups_of(design: Design) -> tuple[Group, ...]:
    """The design's controls, those of one grid together, in the order of the file."""
    names: dict[str, list[Axis]] = {}
    for control in design.controls:
        names.setdefault(control.grid or control.name, []).append(axis_of(design, control))
    return tuple(Group(name, tuple(axes)) for name, axes in names.items())
