"""`[spread]`: how far the parts of real units lie from their nominal values."""

from __future__ import annotations

from typing import Literal, TypeAlias

import msgspec

from a2d.design.quantities import Fraction
from a2d.design.structs import DesignStruct

Distribution: TypeAlias = Literal["uniform", "normal"]
MOST_UNITS = 1_000_000


class PartSpread(DesignStruct, frozen=True, kw_only=True):
    """What one part has of its own; the rest is as for its sort."""

    tolerance: Fraction | None = None
    distribution: Distribution | None = None


class Spread(DesignStruct, frozen=True, kw_only=True):
    """The spread of component values.

    Attributes
    ----------
    resistors, capacitors, inductors, potentiometers
        Tolerance of parts that state none themselves; those of a sort without one do not vary.
    distribution
        `uniform` within the tolerance, or `normal` with the tolerance as three standard deviations, nothing beyond it.
    units, seed
        How many units are drawn, and from which random numbers: the same seed draws the same units.
    parts
        By path such as "tone.C1": what that part has of its own.
    matched
        Groups of paths whose parts deviate alike, each by the same share of its own tolerance.
    measured
        By path: the values measured in one unit.
    """

    resistors: Fraction | None = None
    capacitors: Fraction | None = None
    inductors: Fraction | None = None
    potentiometers: Fraction | None = None
    distribution: Distribution = "uniform"
    units: int = 1000
    seed: int = 1
    parts: dict[str, PartSpread] = msgspec.field(default_factory=dict)
    matched: tuple[tuple[str, ...], ...] = ()
    measured: dict[str, str | int | float] = msgspec.field(default_factory=dict)

    def __post_init__(self) -> None:
        if not 10 <= self.units <= MOST_UNITS:
            raise ValueError(f"units is out of range ({self.units}, allowed 10 to {MOST_UNITS})")
        if not 0 <= self.seed < 2**63:
            raise ValueError(f"seed is out of range ({self.seed}, allowed 0 to 2^63 - 1)")
        names = [name for group in self.matched for name in group]
        twice = next((name for name in names if names.count(name) > 1), None)
        if twice is not None:
            raise ValueError(f'matched has "{twice}" twice (allowed once)')
        if any(len(group) < 2 for group in self.matched):
            raise ValueError("matched has a group of one part (allowed two or more)")
