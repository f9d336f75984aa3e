"""The design file's model: one class a table, with the rules that hold between its keys."""

from __future__ import annotations

import re

import msgspec

from a2d.design import hardware, kinds  # noqa: F401  (they register the sorts of section)
from a2d.design.c_words import C_WORDS
from a2d.design.control import Control
from a2d.design.firmware import Firmware
from a2d.design.moves import control_faults
from a2d.design.quantities import Degree, Hertz, PositiveDecibel, SampleRate, Seconds
from a2d.design.section import MethodName, Section
from a2d.design.structs import DesignStruct

_IDENTIFIER = re.compile(r"[A-Za-z][A-Za-z0-9_]{0,62}")


class DesignTable(DesignStruct, frozen=True, kw_only=True):
    """`[design]`: what the design is called and what it is made for."""

    name: str
    sample_rates: tuple[SampleRate, ...]
    title: str = ""
    method: MethodName = "bilinear"

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


class Limits(DesignStruct, frozen=True, kw_only=True):
    """`[limits]`: the band that matters and what the error may be in it."""

    band: tuple[Hertz, Hertz] | None = None
    magnitude: PositiveDecibel | None = None
    phase: Degree | None = None
    group_delay: Seconds | None = None

    def __post_init__(self) -> None:
        if self.band is not None and not self.band[0] < self.band[1]:
            raise ValueError(f"band must rise ({self.band[0]:g} Hz to {self.band[1]:g} Hz)")


class Design(DesignStruct, frozen=True, kw_only=True):
    """A whole design file."""

    design: DesignTable
    sections: tuple[Section, ...] = msgspec.field(name="section")
    limits: Limits | None = None
    firmware: Firmware = Firmware()
    controls: tuple[Control, ...] = msgspec.field(name="control", default=())

    def __post_init__(self) -> None:
        if not self.sections:
            raise ValueError("there is no section (allowed one or more)")
        names = [section.name for section in self.sections]
        twice = next((n for n in names if names.count(n) > 1), None)
        if twice is not None:
            raise ValueError(f'two sections are called "{twice}" (allowed each name once)')
        faults = control_faults(self.sections, self.controls)
        if faults:
            raise ValueError("; ".join(faults))
