"""`[[control]]`: a knob or switch of the panel, and which values of the design it moves."""

from __future__ import annotations

import re
from typing import Literal, TypeAlias

import msgspec

from a2d.design.c_words import C_WORDS
from a2d.design.quantities import PositiveDecibel
from a2d.design.structs import DesignStruct

Plain: TypeAlias = str | int | float
PlainList: TypeAlias = tuple[Plain, ...]
_IDENTIFIER = re.compile(r"[A-Za-z][A-Za-z0-9_]{0,30}")
MOST_POSITIONS = 4096


class Control(DesignStruct, frozen=True, kw_only=True):
    """A control that sweeps one or more values.

    Attributes
    ----------
    name
        A C identifier: it becomes part of the tables' names.
    moves
        Paths to values: `presence.gain`, `tone.P1.position`, `tone.R4`. More than one: they are ganged.
    start, stop
        The values at the two ends of the travel, one for all or a list with one a path.
    positions
        How many positions of the table, both ends included.
    error
        Instead of `positions`: the smallest table whose linear interpolation stays within this many decibels.
    spacing
        How the swept value runs along the travel: `even`, or `logarithmic` (equal ratios; for frequencies).
    values
        Instead of start, stop and positions, for a switch: the value at each of its positions, or a list a position
        with one value a path. There is nothing between the positions of a switch.
    grid
        Controls of the same grid are swept together, in all combinations; one without stands alone.
    """

    name: str
    moves: tuple[str, ...]
    start: PlainList | str | int | float | None = msgspec.field(name="from", default=None)
    stop: PlainList | str | int | float | None = msgspec.field(name="to", default=None)
    positions: int | None = None
    error: PositiveDecibel | None = None
    spacing: Literal["even", "logarithmic"] = "even"
    values: tuple[PlainList | str | int | float, ...] | None = None
    grid: str | None = None

    def __post_init__(self) -> None:
        for key, text in (("name", self.name), ("grid", self.grid)):
            if text is not None and (not _IDENTIFIER.fullmatch(text) or text in C_WORDS):
                raise ValueError(
                    f"{key} is not a C identifier ({text!r}, allowed a letter, then letters, digits and _, up to 31)"
                )
        if not self.moves:
            raise ValueError('moves is empty (allowed one or more paths such as "presence.gain")')
        if len(set(self.moves)) < len(self.moves):
            raise ValueError("moves has a path twice (allowed each once)")
        if self.values is not None:
            self._check_switch()
        else:
            self._check_knob()

    def _check_switch(self) -> None:
        others = {"from": self.start, "to": self.stop, "positions": self.positions, "error": self.error}
        given = next((key for key, value in others.items() if value is not None), None)
        if given is not None:
            raise ValueError(f"{given} has no meaning beside values (leave out one of the two)")
        if self.spacing != "even":
            raise ValueError("spacing has no meaning beside values (leave out one of the two)")
        if not 2 <= len(self.values or ()) <= MOST_POSITIONS:
            raise ValueError(f"values has {len(self.values or ())} positions (allowed 2 to {MOST_POSITIONS})")

    def _check_knob(self) -> None:
        if self.start is None or self.stop is None:
            missing = "from" if self.start is None else "to"
            raise ValueError(f"{missing} is missing (a knob has from and to; a switch has values)")
        if (self.positions is None) == (self.error is None):
            raise ValueError("a knob has either positions or error (one of them, not both and not none)")
        if self.positions is not None and not 2 <= self.positions <= MOST_POSITIONS:
            raise ValueError(f"positions is out of range ({self.positions}, allowed 2 to {MOST_POSITIONS})")

    @property
    def stepped(self) -> bool:
        """Whether it is a switch."""
        return self.values is not None

    def ends(self, index: int) -> tuple[Plain, Plain]:
        """What the file says of both ends for the path number `index`."""
        return _pick(self.start, index, len(self.moves), "from"), _pick(self.stop, index, len(self.moves), "to")

    def at_positions(self, index: int) -> tuple[Plain, ...]:
        """What the file says of each switch position for the path number `index`."""
        return tuple(_pick(value, index, len(self.moves), "values") for value in self.values or ())


def _pick(value: PlainList | Plain | None, index: int, count: int, key: str) -> Plain:
    if isinstance(value, tuple):
        if len(value) != count:
            raise ValueError(f"{key} has {len(value)} values (allowed {count}, one a path in moves)")
        return value[index]
    assert value is not None  # the struct's own check
    return value
