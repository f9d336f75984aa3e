"""Sections given by component values: `[[section]]` with `network`, `circuit`, or bands in parallel."""

from __future__ import annotations

from functools import cache
from typing import Any, Literal

import msgspec

from a2d.design.circuits import PARTS_OF, CircuitParts
from a2d.design.network import Network, OpAmpModel
from a2d.design.quantities import Factor, Mix, Ohm, OhmOrZero
from a2d.design.section import Section, has_bands
from a2d.design.structs import Unrecognised, nearest

MOST_BANDS = 100


class NetworkSection(Section, frozen=True, kw_only=True):
    """A section given as a network of parts."""

    network: Network


class CircuitSection(Section, frozen=True, kw_only=True):
    """A section given as a ready circuit with its parts.

    `opamp` stands for all of the circuit's op-amps; `source` and `load` are resistances at its ends.
    """

    circuit: str
    parts: CircuitParts
    opamp: OpAmpModel | Literal["ideal"] = "ideal"
    source: OhmOrZero = OhmOrZero(0.0)
    load: Ohm | None = None

    @classmethod
    def choose(cls, table: dict[str, Any]) -> type[Section]:
        """The class whose `parts` are those of the circuit that `table` names."""
        name = table.get("circuit")
        if not isinstance(name, str) or name not in PARTS_OF:
            raise Unrecognised(f"there is no circuit {name!r}{nearest(str(name), PARTS_OF)}")
        return circuit_section(name)

    @classmethod
    def variants(cls) -> tuple[type[Section], ...]:
        """One class a circuit."""
        return tuple(map(circuit_section, PARTS_OF)) if cls is CircuitSection else (cls,)


@cache
def circuit_section(name: str) -> type[CircuitSection]:
    """The class of sections made by the ready circuit `name`."""
    fields: list[Any] = [("circuit", Literal[name]), ("parts", PARTS_OF[name])]
    derived: type[CircuitSection] = _derived(f"{name}_section", fields, CircuitSection)
    return derived


class Band(Section, frozen=True, kw_only=True):
    """A band of a bank: a section of any sort and `mix`, its weight in the sum."""

    mix: Mix = Mix(1.0)

    @classmethod
    def choose(cls, table: dict[str, Any]) -> type[Section]:
        """The class of the band's own sort, with `mix` added."""
        if has_bands(table):
            raise Unrecognised("a band is not itself a bank (allowed: kind, circuit or network)")
        return band_of(Section.choose(table))

    @classmethod
    def variants(cls) -> tuple[type[Section], ...]:
        """Every sort of section but a bank, with `mix` added."""
        sorts = [*Section.by_kind.values(), *CircuitSection.variants(), NetworkSection]
        return tuple(map(band_of, sorts)) if cls is Band else (cls,)


@cache
def band_of(section: type[Section]) -> type[Section]:
    """The class of bands that are sections of the sort `section`."""
    derived: type[Section] = _derived(f"{section.__name__}_band", [("mix", Mix, Mix(1.0))], section)
    return derived


def _derived(name: str, fields: list[Any], base: type[Section]) -> Any:
    return msgspec.defstruct(
        name, fields, bases=(base,), frozen=True, kw_only=True, namespace={"__doc__": base.__doc__}, module=__name__
    )


class BankSection(Section, frozen=True, kw_only=True):
    """Bands in parallel with a direct path, summed.

    As a `cascade` the sum is factored into sections; as `parallel` the twin keeps one branch a band, so that firmware
    moves a band by one multiplier.
    """

    direct: Factor = Factor(0.0)
    form: Literal["cascade", "parallel"] = "cascade"
    band: tuple[Band, ...]

    def __post_init__(self) -> None:
        super().__post_init__()
        if not 1 <= len(self.band) <= MOST_BANDS:
            raise ValueError(f"band has {len(self.band)} tables (allowed 1 to {MOST_BANDS})")
        names = [band.name for band in self.band]
        twice = next((n for n in names if names.count(n) > 1), None)
        if twice is not None:
            raise ValueError(f'two bands are called "{twice}" (allowed each name once)')
        set_alone = next((b.name for b in self.band if b.match is not None or b.method is not None), None)
        if set_alone is not None and self.form == "cascade":
            raise ValueError(
                f'match or method of band "{set_alone}" has no meaning in a cascade, whose sections are not the bands '
                '(leave it out, or set form = "parallel")'
            )


Section.by_key.update({"network": NetworkSection, "circuit": CircuitSection, "band": BankSection})
