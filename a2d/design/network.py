"""A network of parts as a design file holds it; the solver works on these very structs.

A part is told by the key that carries its value: `{ resistor = "11k", nodes = ["in", "b1"] }`. The reference node is
`gnd`.
"""

from __future__ import annotations

import re
from typing import Any, ClassVar, Literal, TypeAlias

from a2d.design.quantities import (
    Decibel,
    Factor,
    Farad,
    FaradOrZero,
    Fraction,
    Henry,
    Hertz,
    Number,
    Ohm,
    OhmOrZero,
    Siemens,
)
from a2d.design.structs import DesignStruct, Unrecognised, nearest

GROUND = "gnd"
MOST_PARTS = 300
_NAME = re.compile(r"[A-Za-z][A-Za-z0-9_]*")
TwoNodes: TypeAlias = tuple[str, str]
ThreeNodes: TypeAlias = tuple[str, str, str]
FourNodes: TypeAlias = tuple[str, str, str, str]
Taper: TypeAlias = Literal["linear", "logarithmic", "reverse_logarithmic", "two_slope", "table"]


class Part(DesignStruct, frozen=True, kw_only=True):
    """A part of a network; `tolerance` is its spread either way, for the parts that have one."""

    by_key: ClassVar[dict[str, type[Part]]] = {}

    @classmethod
    def choose(cls, table: dict[str, Any]) -> type[Part]:
        """The class that reads `table`, told by the one key that names a sort of part."""
        present = [key for key in cls.by_key if key in table]
        if len(present) == 1:
            return cls.by_key[present[0]]
        if present:
            raise Unrecognised(f"a part has exactly one of: {', '.join(cls.by_key)} ({' and '.join(present)})")
        strange = next((k for k in table if k not in ("nodes", "tolerance")), "")
        raise Unrecognised(f'there is no part "{strange}"{nearest(strange, cls.by_key)}')

    @classmethod
    def variants(cls) -> tuple[type[DesignStruct], ...]:
        """All sorts of part."""
        return tuple(cls.by_key.values()) if cls is Part else (cls,)

    def terminals(self) -> tuple[str, ...]:
        """The nodes that the part is connected to, in its own order."""
        return tuple(getattr(self, "nodes"))  # noqa: B009  (declared by the subclasses, each with its own count)


class Resistor(Part, frozen=True, kw_only=True):
    """A resistor."""

    resistor: Ohm
    nodes: TwoNodes
    tolerance: Fraction | None = None


class Capacitor(Part, frozen=True, kw_only=True):
    """A capacitor, with a resistance in series and a leakage resistance across it where those matter."""

    capacitor: Farad
    nodes: TwoNodes
    series_resistance: OhmOrZero = OhmOrZero(0.0)
    leakage_resistance: Ohm | None = None
    tolerance: Fraction | None = None


class Inductor(Part, frozen=True, kw_only=True):
    """An inductor with its winding's resistance in series, and the winding's own capacitance across both."""

    inductor: Henry
    nodes: TwoNodes
    resistance: OhmOrZero = OhmOrZero(0.0)
    parallel_capacitance: FaradOrZero = FaradOrZero(0.0)
    tolerance: Fraction | None = None


class Potentiometer(Part, frozen=True, kw_only=True):
    """A potentiometer; `nodes` are the end at position 0, the wiper, the end at position 1.

    Between the first end and the wiper lies `end_resistance + f(position)·(R - 2·end_resistance)`. f is the position
    itself (linear); (k^p - 1)/(k - 1) with f(1/2) = `mid` (logarithmic), the same seen from the other end
    (reverse_logarithmic, `mid` above 1/2); two straight lines that meet at (1/2, `mid`) (two_slope); or straight lines
    through `table`, pairs of position and fraction from [0, 0] to [1, 1].
    """

    potentiometer: Ohm
    nodes: ThreeNodes
    position: Fraction
    taper: Taper = "linear"
    mid: Fraction | None = None
    table: tuple[tuple[Fraction, Fraction], ...] | None = None
    end_resistance: OhmOrZero = OhmOrZero(0.0)
    tolerance: Fraction | None = None

    def __post_init__(self) -> None:
        self._check_mid()
        self._check_table()
        if 2.0 * self.end_resistance >= self.potentiometer:
            raise ValueError(f"end_resistance is half the track or more ({self.end_resistance:g} Ω, allowed less)")

    def _check_mid(self) -> None:
        if (self.taper in ("logarithmic", "reverse_logarithmic", "two_slope")) != (self.mid is not None):
            need = "has no meaning for" if self.mid is not None else "is missing; it is needed for"
            raise ValueError(f'mid, the fraction at mid travel, {need} taper = "{self.taper}"')
        low, high = {"logarithmic": (0.0, 0.5), "reverse_logarithmic": (0.5, 1.0)}.get(self.taper, (0.0, 1.0))
        if self.mid is not None and not low < self.mid < high:
            raise ValueError(f"mid is out of range ({self.mid:g}, allowed between {low:g} and {high:g} for this taper)")

    def _check_table(self) -> None:
        if (self.taper == "table") != (self.table is not None):
            need = "has no meaning for" if self.table is not None else "is missing; it is needed for"
            raise ValueError(f'table {need} taper = "{self.taper}"')
        if self.table is None:
            return
        rising = all(a[0] < b[0] and a[1] <= b[1] for a, b in zip(self.table, self.table[1:], strict=False))
        if len(self.table) < 2 or not rising or (*self.table[0], *self.table[-1]) != (0.0, 0.0, 1.0, 1.0):
            raise ValueError("table must rise from [0, 0] to [1, 1] with rising positions")


class Switch(Part, frozen=True, kw_only=True):
    """A switch; `resistance` is that of its closed contact."""

    switch: Literal["open", "closed"]
    nodes: TwoNodes
    resistance: OhmOrZero = OhmOrZero(0.0)


class OpAmpModel(DesignStruct, frozen=True, kw_only=True):
    """An op-amp with one pole, A(s) = 1/(1/A0 + s/(2π·gain_bandwidth)); A0 is infinite when `dc_gain` is absent."""

    gain_bandwidth: Hertz
    dc_gain: Decibel | None = None
    output_resistance: OhmOrZero = OhmOrZero(0.0)


class OpAmpNodes(DesignStruct, frozen=True, kw_only=True):
    """Where an op-amp is connected."""

    plus: str
    minus: str
    out: str


class OpAmp(Part, frozen=True, kw_only=True):
    """An op-amp, ideal or with one pole."""

    opamp: OpAmpModel | Literal["ideal"]
    nodes: OpAmpNodes

    def terminals(self) -> tuple[str, ...]:
        return (self.nodes.plus, self.nodes.minus, self.nodes.out)


class ControlledNodes(DesignStruct, frozen=True, kw_only=True):
    """Where a controlled source is connected: v(plus) - v(minus) controls what is between `out` and `back`."""

    plus: str
    out: str
    minus: str = GROUND
    back: str = GROUND


class ControlledVoltage(Part, frozen=True, kw_only=True):
    """A voltage source: v(out) - v(back) = voltage_gain·(v(plus) - v(minus))."""

    voltage_gain: Factor
    nodes: ControlledNodes

    def terminals(self) -> tuple[str, ...]:
        return (self.nodes.plus, self.nodes.minus, self.nodes.out, self.nodes.back)


class ControlledCurrent(Part, frozen=True, kw_only=True):
    """A current source: transconductance·(v(plus) - v(minus)) flows out of the part into the node `out`."""

    transconductance: Siemens
    nodes: ControlledNodes

    def terminals(self) -> tuple[str, ...]:
        return (self.nodes.plus, self.nodes.minus, self.nodes.out, self.nodes.back)


class Transformer(Part, frozen=True, kw_only=True):
    """An ideal transformer: `transformer` turns of the first winding for one of the second.

    `nodes` are start and end of the first winding, start and end of the second.
    """

    transformer: Number
    nodes: FourNodes

    def __post_init__(self) -> None:
        if self.transformer == 0.0:
            raise ValueError("transformer, the ratio of turns, is zero (allowed any other number)")


Part.by_key.update(
    {
        "resistor": Resistor,
        "capacitor": Capacitor,
        "inductor": Inductor,
        "potentiometer": Potentiometer,
        "switch": Switch,
        "opamp": OpAmp,
        "voltage_gain": ControlledVoltage,
        "transconductance": ControlledCurrent,
        "transformer": Transformer,
    }
)


class Input(DesignStruct, frozen=True, kw_only=True):
    """Where the signal enters: an ideal source between `gnd` and `node`, behind the resistance `source`."""

    node: str
    source: OhmOrZero = OhmOrZero(0.0)


class Output(DesignStruct, frozen=True, kw_only=True):
    """What is measured: v(node) - v(minus), with the resistance `load` between the two."""

    node: str
    minus: str = GROUND
    load: Ohm | None = None


class Network(DesignStruct, frozen=True, kw_only=True):
    """A linear network: parts by name, and between which nodes its H(s) is taken.

    `input` and `output` are a node's name, or a table that adds a source resistance or a load.
    """

    input: Input | str
    output: Output | str
    parts: dict[str, Part]

    def __post_init__(self) -> None:
        if not 1 <= len(self.parts) <= MOST_PARTS:
            raise ValueError(f"parts has {len(self.parts)} parts (allowed 1 to {MOST_PARTS})")
        wrong = next((name for name in self.parts if not _NAME.fullmatch(name)), None)
        if wrong is not None:
            raise ValueError(f"{wrong!r} cannot name a part (allowed a letter, then letters, digits and _)")

    @property
    def entry(self) -> Input:
        """The input as a table."""
        return Input(node=self.input) if isinstance(self.input, str) else self.input

    @property
    def exit(self) -> Output:
        """The output as a table."""
        return Output(node=self.output) if isinstance(self.output, str) else self.output
