"""What textbooks say of a circuit in closed form, and short ways to write its network."""

from __future__ import annotations

from dataclasses import dataclass

from a2d.design.network import (
    Capacitor,
    Inductor,
    Network,
    OpAmp,
    OpAmpNodes,
    Part,
    Potentiometer,
    Resistor,
)
from a2d.design.quantities import Farad, Fraction, Henry, Ohm, OhmOrZero


@dataclass(frozen=True)
class Textbook:
    """The closed form of a circuit with ideal op-amps, source and load.

    Parameters
    ----------
    f0_hz
        Hz: the frequency of the pole (pair).
    q
        Of the pole pair; None for first order.
    gain
        As a factor with its sign: in the pass band; of a notch far from it; of a shelf at 0 Hz.
    """

    f0_hz: float
    q: float | None
    gain: float


def resistor(ohm: float, a: str, b: str) -> Resistor:
    """A resistor of `ohm` Ω between nodes a and b."""
    return Resistor(resistor=Ohm(ohm), nodes=(a, b))


def capacitor(farad: float, a: str, b: str) -> Capacitor:
    """A capacitor of `farad` F between nodes a and b."""
    return Capacitor(capacitor=Farad(farad), nodes=(a, b))


def inductor(henry: float, a: str, b: str, ohm: float = 0.0) -> Inductor:
    """An inductor of `henry` H between nodes a and b, its winding's resistance `ohm` in series."""
    return Inductor(inductor=Henry(henry), nodes=(a, b), resistance=OhmOrZero(ohm))


def potentiometer(ohm: float, first: str, wiper: str, last: str, position: float) -> Potentiometer:
    """A linear potentiometer; at position 1 the wiper is at `last`."""
    return Potentiometer(potentiometer=Ohm(ohm), nodes=(first, wiper, last), position=Fraction(position))


def op_amp(plus: str, minus: str, out: str) -> OpAmp:
    """An ideal op-amp."""
    return OpAmp(opamp="ideal", nodes=OpAmpNodes(plus=plus, minus=minus, out=out))


def network(out: str = "out", /, **parts: Part) -> Network:
    """A network from `in` to `out`."""
    return Network(input="in", output=out, parts=parts)
