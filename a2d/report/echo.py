"""The design as it was read: every value of every table, in its unit."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import msgspec

from a2d.analog.circuits import CIRCUITS
from a2d.analog.kinds import KINDS
from a2d.design.model import Design
from a2d.design.quantities import Quantity
from a2d.design.section import Section

_PREFIXES = ((1e9, "G"), (1e6, "M"), (1e3, "k"), (1.0, ""), (1e-3, "m"), (1e-6, "µ"), (1e-9, "n"), (1e-12, "p"))


@dataclass(frozen=True)
class Echo:
    """A table of the file: its heading, the equation where its kind has one, and (key, value) pairs."""

    heading: str
    equation: str
    values: tuple[tuple[str, str], ...]


def echo(design: Design) -> tuple[Echo, ...]:
    """`[design]` and whatever other tables the file has, then the sections in their order."""
    others = [f for f in msgspec.structs.fields(design) if f.name != "sections" and getattr(design, f.name)]
    tables = tuple(_table(f"[{f.encode_name}]", getattr(design, f.name)) for f in others)
    return tables + tuple(_section(section) for section in design.sections)


def _section(section: Section) -> Echo:
    kind = KINDS.get(getattr(section, "kind", "")) or CIRCUITS.get(getattr(section, "circuit", ""))
    pairs = [(key, value) for key, value in flat(section) if key != "name"]
    pairs.sort(key=lambda pair: pair[0] not in ("kind", "circuit"))  # what it is comes first, the rest as declared
    return Echo(section.name, kind.equation if kind else "", tuple(pairs))


def _table(heading: str, value: object) -> Echo:
    return Echo(heading, "", tuple(flat(value)))


def flat(value: object, path: str = "") -> Iterator[tuple[str, str]]:
    """(dotted key, value in its unit) of everything below `value`; what is absent is left out."""
    if isinstance(value, msgspec.Struct):
        for info in msgspec.structs.fields(value):
            yield from flat(getattr(value, info.name), _below(path, info.encode_name))
    elif isinstance(value, dict):
        for key, item in value.items():
            yield from flat(item, _below(path, str(key)))
    elif isinstance(value, tuple | list) and any(isinstance(v, msgspec.Struct | dict | tuple | list) for v in value):
        for index, item in enumerate(value, 1):
            yield from flat(item, _below(path, str(index)))
    elif isinstance(value, tuple | list):
        if value:
            yield path, ", ".join(shown(item) for item in value)
    elif value is not None:
        yield path, shown(value)


def _below(path: str, key: str) -> str:
    return f"{path}.{key}" if path else key


def shown(value: object) -> str:
    """A value in its unit, with all digits that the double holds beyond rounding.

    >>> from a2d.design.quantities import Farad, Hertz, Ohm
    >>> shown(Hertz(3200.0)), shown(Farad(1.5e-8)), shown(Ohm(4700.0)), shown("bilinear")
    ('3.2 kHz', '15 nF', '4.7 kΩ', 'bilinear')
    """
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, Quantity):
        return _quantity(value)
    if isinstance(value, float):
        return f"{value:.12g}".replace("-", "−")
    return str(value)


def _quantity(value: Quantity) -> str:
    number, prefix = float(value), ""
    if value.prefixed and value.unit and number != 0.0:
        factor, prefix = next((p for p in _PREFIXES if abs(number) >= p[0] * (1.0 - 1e-12)), _PREFIXES[-1])
        number /= factor
    return f"{number:.12g} {prefix}{value.unit}".replace("-", "−").strip()
