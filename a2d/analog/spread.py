"""Component spread: which parts vary, and the response of many units at once."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np

from a2d import checks
from a2d.analog.build import build_section
from a2d.analog.hardware import network_of
from a2d.analog.network.response import network_response, nominal_values, value_names
from a2d.analog.response import chain_response
from a2d.arrays import ComplexArray, FloatArray
from a2d.design.hardware import CircuitSection, NetworkSection
from a2d.design.model import Design
from a2d.design.network import Capacitor, Inductor, Network, Part, Potentiometer, Resistor
from a2d.design.spread import PartSpread, Spread
from a2d.design.structs import nearest
from a2d.errors import ParameterError

SORTS: dict[type[Part], str] = {
    Resistor: "resistors",
    Capacitor: "capacitors",
    Inductor: "inductors",
    Potentiometer: "potentiometers",
}


@dataclass(frozen=True)
class SpreadPart:
    """A part that varies.

    Attributes
    ----------
    name
        `tone.C1`.
    entry, value
        The index of its `[[section]]`, and of its value among the network's.
    tolerance
        As a fraction: the value lies from 1 - tolerance to 1 + tolerance of nominal.
    distribution
        `uniform` or `normal`.
    group
        Parts of one group deviate alike.
    """

    name: str
    entry: int
    value: int
    tolerance: float
    distribution: str
    group: int


@dataclass(frozen=True, eq=False)
class SpreadModel:
    """A design as a function of the deviations of its parts.

    Attributes
    ----------
    parts
        n of them.
    networks
        By entry: its network, its nominal values [V] and its factor.
    fixed
        Shape [F]: the response of everything that does not vary.
    f_hz
        Shape [F].
    """

    parts: tuple[SpreadPart, ...]
    networks: dict[int, tuple[Network, FloatArray, float]]
    fixed: ComplexArray
    f_hz: FloatArray

    @property
    def tolerances(self) -> FloatArray:
        """Shape [n]."""
        return np.array([part.tolerance for part in self.parts])

    @property
    def groups(self) -> int:
        """How many parts or matched groups deviate independently."""
        return 1 + max(part.group for part in self.parts)

    def response(self, factors: FloatArray) -> ComplexArray:
        """H [D, F] of units whose part values are `factors` [D, n] times nominal."""
        h = np.broadcast_to(self.fixed, (len(factors), len(self.f_hz)))
        for entry, (network, nominal, factor) in self.networks.items():
            mine = [k for k, part in enumerate(self.parts) if part.entry == entry]
            values = np.tile(nominal, (len(factors), 1))
            values[:, [self.parts[k].value for k in mine]] *= factors[:, mine]
            h = h * (factor * network_response(network, values, self.f_hz))
        return h

    def level_db(self, factors: FloatArray) -> FloatArray:
        """|H| in dB, [D, F]."""
        return np.asarray(20.0 * np.log10(np.maximum(np.abs(self.response(factors)), 1e-300)))

    def nominal_db(self) -> FloatArray:
        """|H| in dB with all parts nominal, [F]."""
        return np.asarray(self.level_db(np.ones((1, len(self.parts))))[0])


def spread_model(design: Design, f_hz: FloatArray) -> SpreadModel:
    """The model of a design's spread at `f_hz` [F].

    Raises
    ------
    ParameterError
        No part varies, or `[spread]` names a part that there is not.
    """
    f = checks.positive("f_hz", f_hz, "Hz")
    spread = design.spread if design.spread is not None else Spread()
    networks = {
        entry: (network_of(section), nominal_values(network_of(section)), float(section.factor))
        for entry, section in enumerate(design.sections)
        if isinstance(section, (NetworkSection, CircuitSection))
    }
    names = [f"{design.sections[e].name}.{p}" for e, (network, *_) in networks.items() for p in network.parts]
    _check_names(spread, names)
    parts = tuple(_numbered(_parts(design, spread, networks), spread))
    if not parts:
        raise ParameterError(
            "no part varies: give parts of a network a tolerance, or [spread] one for resistors, capacitors, "
            "inductors or potentiometers"
        )
    varied = {part.entry for part in parts}
    rest = [build_section(s) for e, s in enumerate(design.sections) if e not in varied]
    fixed = np.ones(len(f), dtype=np.complex128)
    for sections in rest:
        fixed = fixed * chain_response(sections.b, sections.a, f)
    return SpreadModel(parts, {e: n for e, n in networks.items() if e in varied}, fixed, f)


def _check_names(spread: Spread, names: list[str]) -> None:
    for name in [*spread.parts, *(n for group in spread.matched for n in group)]:
        if name not in names:
            raise ParameterError(f'[spread] names "{name}", which is no part of a network{nearest(name, names)}')


def _parts(
    design: Design, spread: Spread, networks: dict[int, tuple[Network, FloatArray, float]]
) -> Iterable[tuple[str, int, int, float, str]]:
    """Name, entry, value, tolerance and distribution of every part with a tolerance above zero."""
    for entry, (network, *_) in networks.items():
        values = value_names(network)
        for key, part in network.parts.items():
            sort = SORTS.get(type(part))
            if sort is None:
                continue
            name = f"{design.sections[entry].name}.{key}"
            own = spread.parts.get(name, PartSpread())
            stated = (own.tolerance, getattr(part, "tolerance", None), getattr(spread, sort), 0.0)
            tolerance = next(float(t) for t in stated if t is not None)
            if tolerance > 0.0:
                yield name, entry, values.index(key), tolerance, own.distribution or spread.distribution


def _numbered(parts: Iterable[tuple[str, int, int, float, str]], spread: Spread) -> Iterable[SpreadPart]:
    """The parts with the number of their group."""
    of_name: dict[str, int] = {}
    matched = {name: k for k, group in enumerate(spread.matched) for name in group}
    numbers: dict[object, int] = {}
    for name, entry, value, tolerance, distribution in parts:
        key = matched.get(name, name)
        of_name[name] = numbers.setdefault(key, len(numbers))
        yield SpreadPart(name, entry, value, tolerance, distribution, of_name[name])
