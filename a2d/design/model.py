"""The design file's model: one class a table, with the rules that hold between its keys."""

from __future__ import annotations

import re
from itertools import pairwise
from typing import Literal, TypeAlias

import msgspec

from a2d.design import hardware, kinds  # noqa: F401  (they register the sorts of section)
from a2d.design.c_words import C_WORDS
from a2d.design.control import Control
from a2d.design.firmware import Firmware
from a2d.design.moves import control_faults, measured_faults
from a2d.design.quantities import Decibel, Degree, Hertz, PositiveDecibel, SampleRate, Seconds, Weight
from a2d.design.section import MethodName, Section
from a2d.design.spread import Spread
from a2d.design.structs import DesignStruct

_IDENTIFIER = re.compile(r"[A-Za-z][A-Za-z0-9_]{0,62}")


MaskName: TypeAlias = Literal[
    "a_weighting_class_1",
    "a_weighting_class_2",
    "c_weighting_class_1",
    "c_weighting_class_2",
    "fractional_octave_class_1",
    "fractional_octave_class_2",
    "disc_replay",
    "disc_replay_amended",
]


class DesignTable(DesignStruct, frozen=True, kw_only=True):
    """`[design]`: what the design is called and what it is made for."""

    name: str
    sample_rates: tuple[SampleRate, ...]
    title: str = ""
    method: MethodName = "bilinear"
    scope: Literal["section", "chain", "fewest"] = "section"
    extra_sections: int = 0
    weight_phase: Weight = Weight(0.0)

    def __post_init__(self) -> None:
        if not _IDENTIFIER.fullmatch(self.name) or self.name in C_WORDS:
            raise ValueError(
                f"name is not a C identifier ({self.name!r}, allowed a letter, then letters, digits and _, up to 63, "
                "and no word of C or C++)"
            )
        if not self.sample_rates:
            raise ValueError("sample_rates is empty (allowed one or more)")
        if len(set(self.sample_rates)) < len(self.sample_rates):
            raise ValueError("sample_rates has one twice (allowed each once)")
        if not 0 <= self.extra_sections <= 8:
            raise ValueError(f"extra_sections is out of range ({self.extra_sections}, allowed 0 to 8)")
        if self.extra_sections and self.scope != "chain":
            raise ValueError('extra_sections needs scope = "chain"')
        if self.scope != "section" and self.method not in ("minimax", "auto"):
            raise ValueError(f'scope = "{self.scope}" needs method = "minimax" (method is "{self.method}")')


class Limits(DesignStruct, frozen=True, kw_only=True):
    """`[limits]`: the band that matters and what the error may be in it."""

    band: tuple[Hertz, Hertz] | None = None
    magnitude: PositiveDecibel | None = None
    phase: Degree | None = None
    group_delay: Seconds | None = None
    mask: MaskName | None = None
    midband: Hertz | None = None
    bandwidth: int | None = None
    table: tuple[tuple[Hertz, Decibel, Decibel], ...] = ()

    def __post_init__(self) -> None:
        if self.band is not None and not self.band[0] < self.band[1]:
            raise ValueError(f"band must rise ({self.band[0]:g} Hz to {self.band[1]:g} Hz)")
        self._check_mask()
        rows = self.table
        if len(rows) == 1 or any(not low[0] < high[0] for low, high in pairwise(rows)):
            raise ValueError("table needs two rows or more with frequencies that rise")
        if any(not row[1] <= row[2] for row in rows):
            raise ValueError("a row of table is [frequency, lower limit, upper limit], the lower not above the upper")

    @property
    def has_magnitude(self) -> bool:
        """Whether anything limits the magnitude."""
        return self.magnitude is not None or self.mask is not None or bool(self.table)

    def _check_mask(self) -> None:
        """What a mask needs is there, and nothing is there that no mask uses."""
        octaves = self.mask is not None and self.mask.startswith("fractional_octave")
        if octaves and self.midband is None:
            raise ValueError(f"midband is missing (mask {self.mask!r} needs the filter's mid-band frequency)")
        if not octaves and (self.midband is not None or self.bandwidth is not None):
            raise ValueError("midband and bandwidth belong to the fractional_octave masks")
        if self.bandwidth is not None and not 1 <= self.bandwidth <= 24:
            raise ValueError(f"bandwidth is the b of a 1/b-octave filter ({self.bandwidth}, allowed 1 to 24)")
        if self.mask is not None and self.mask.startswith("disc_replay") and self.magnitude is None:
            raise ValueError(f"magnitude is missing (mask {self.mask!r} takes it as its tolerance)")


class Design(DesignStruct, frozen=True, kw_only=True):
    """A whole design file."""

    design: DesignTable
    sections: tuple[Section, ...] = msgspec.field(name="section")
    limits: Limits | None = None
    firmware: Firmware = Firmware()
    controls: tuple[Control, ...] = msgspec.field(name="control", default=())
    spread: Spread | None = None

    def __post_init__(self) -> None:
        if not self.sections:
            raise ValueError("there is no section (allowed one or more)")
        names = [section.name for section in self.sections]
        twice = next((n for n in names if names.count(n) > 1), None)
        if twice is not None:
            raise ValueError(f'two sections are called "{twice}" (allowed each name once)')
        faults = control_faults(self.sections, self.controls)
        faults += measured_faults(self.sections, self.spread.measured if self.spread is not None else {})
        if faults:
            raise ValueError("; ".join(faults))
        self._check_fit()

    def _check_fit(self) -> None:
        """What only some methods use is used, and controls move sections that stay sections."""
        methods = {section.method or self.design.method for section in self.sections}
        if self.design.weight_phase and not methods & {"minimax", "auto"}:
            raise ValueError('weight_phase is not used: it needs a section with method = "minimax"')
        if self.controls and (self.design.scope != "section" or "auto" in methods or self.design.weight_phase):
            raise ValueError(
                'a design with a control needs scope = "section", no weight_phase and a fixed method for each section'
            )
        if self.design.scope == "fewest" and (self.limits is None or not self.limits.has_magnitude):
            raise ValueError('scope = "fewest" needs a limit of magnitude in [limits]')
