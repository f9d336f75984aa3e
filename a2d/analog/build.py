"""From the design file's sections to the analog chain."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any

import numpy as np

from a2d.analog.bank import Bank, cascade_of
from a2d.analog.chain import AnalogChain, numbered
from a2d.analog.hardware import network_sections
from a2d.analog.kinds import sections_of
from a2d.analog.sections import Sections, natural_frequency_hz, scaled
from a2d.design.hardware import BankSection, CircuitSection, NetworkSection
from a2d.design.model import Design
from a2d.design.section import Section
from a2d.errors import A2dError, DesignError, Fault, NetworkError


def build_chain(design: Design, ready: Mapping[int, Sections] | None = None) -> AnalogChain:
    """The cascade of all sections of a design; several sections of one entry are called `name.1`, `name.2`.

    Parameters
    ----------
    design
        The design.
    ready
        Sections of entries that are known already, by the entry's index.

    Raises
    ------
    DesignError
        Sections that cannot be built, all of them.
    """
    names: list[str] = []
    owners: list[int] = []
    built: list[Sections] = []
    faults: list[Fault] = []
    for index, section in enumerate(design.sections):
        try:
            sections = ready[index] if ready and index in ready else build_section(section)
        except A2dError as error:
            faults.append(Fault(str(error), f'section "{section.name}"'))
            continue
        count = len(sections.f0_hz)
        names += numbered(section.name, count)
        owners += [index] * count
        built.append(sections)
    if faults:
        raise DesignError(faults)
    b, a, f0 = (np.concatenate(parts) for parts in zip(*built, strict=True))
    return AnalogChain.of(names, b, a, f0, owners)


def build_section(section: Section) -> Sections:
    """The analog sections of one entry, its factor included."""
    builder = next(build for kind, build in BUILDERS.items() if isinstance(section, kind))
    return scaled(builder(section), section.factor)


def bank_of(section: BankSection) -> Bank:
    """The bands of a bank with their weights, the section's factor not included."""
    bands = tuple(_band(band) for band in section.band)
    mix = np.array([band.mix for band in section.band], dtype=np.float64)
    return Bank(tuple(band.name for band in section.band), bands, mix, float(section.direct))


def _band(band: Section) -> Sections:
    try:
        return build_section(band)
    except A2dError as error:
        raise NetworkError(f'band "{band.name}": {error}') from error


def bank_sections(section: BankSection) -> Sections:
    """The sum of a bank's bands as a cascade."""
    b, a, _ = cascade_of(bank_of(section))
    return Sections(b, a, natural_frequency_hz(b, a))


# How each sort of [[section]] becomes analog sections: the first class that fits.
BUILDERS: dict[type[Section], Callable[[Any], Sections]] = {
    NetworkSection: network_sections,
    CircuitSection: network_sections,
    BankSection: bank_sections,
    Section: sections_of,
}
