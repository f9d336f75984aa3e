"""What each sort of part adds to a network's equations; one function a sort, all with one signature."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

from a2d.analog.network.layout import Layout
from a2d.analog.network.taper import track_fraction
from a2d.arrays import FloatArray
from a2d.design.network import (
    Capacitor,
    ControlledCurrent,
    ControlledVoltage,
    Inductor,
    Network,
    OpAmp,
    OpAmpModel,
    Part,
    Potentiometer,
    Resistor,
    Switch,
    Transformer,
)

SOURCE, LOAD = "source", "load"  # the names of the input's and the output's own resistors


def lay_out(network: Network) -> Layout:
    """The network's equations.

    Notes
    -----
    C.-W. Ho, A. Ruehli, P. Brennan, "The modified nodal approach to network analysis", IEEE Trans. Circuits and
    Systems CAS-22 (1975) 504-509.
    """
    layout = Layout(impedance=_usual_impedance(network))
    _input(layout, network)
    for name, part in network.parts.items():
        PARTS[type(part)](layout, name, part)
    _output(layout, network)
    return layout


def _usual_impedance(network: Network) -> float:
    """The power of two nearest the geometric mean of the resistances, so that scaling rounds nothing."""
    ohms = [p.resistor for p in network.parts.values() if isinstance(p, Resistor)]
    ohms += [p.potentiometer for p in network.parts.values() if isinstance(p, Potentiometer)]
    return float(2.0 ** np.round(np.mean(np.log2(ohms)))) if ohms else 1024.0


def _input(layout: Layout, network: Network) -> None:
    """v(node) + source·i = 1."""
    k = layout.branch(layout.node(network.entry.node), -1, "source#current")
    if network.entry.source > 0.0:
        _resistance_term(layout, k, layout.value(SOURCE, network.entry.source))
    layout.e = {k: 1.0}


def _output(layout: Layout, network: Network) -> None:
    plus, minus = layout.node(network.exit.node), layout.node(network.exit.minus)
    if network.exit.load is not None:
        layout.conductance(plus, minus, _conductance(layout, LOAD, network.exit.load))
    layout.out = {plus: 1.0, minus: -1.0}


def _conductance(layout: Layout, name: str, ohm: float) -> int:
    i, impedance = layout.value(name, ohm), layout.impedance
    return layout.quantity(lambda values: impedance / values[..., i])


def _scaled(layout: Layout, value: int, factor: float) -> int:
    return layout.quantity(lambda values: values[..., value] * factor)


def _resistance_term(layout: Layout, branch: int, value: int) -> None:
    layout.add(branch, branch, -1.0, _scaled(layout, value, 1.0 / layout.impedance))


def _resistor(layout: Layout, name: str, part: Resistor) -> None:
    a, b = map(layout.node, part.nodes)
    layout.conductance(a, b, _conductance(layout, name, part.resistor))


def _capacitor(layout: Layout, name: str, part: Capacitor) -> None:
    a, b = map(layout.node, part.nodes)
    if part.series_resistance > 0.0:
        inner = layout.unknown(f"{name}#inside")
        ohm = f"{name}.series_resistance"
        layout.conductance(a, inner, _conductance(layout, ohm, part.series_resistance))
        a = inner
    if part.leakage_resistance is not None:
        layout.conductance(a, b, _conductance(layout, f"{name}.leakage_resistance", part.leakage_resistance))
    _capacitance(layout, a, b, name, layout.value(name, part.capacitor))


def _capacitance(layout: Layout, a: int, b: int, name: str, value: int) -> None:
    """s·C·(v(a) - v(b)) - i = 0: with the current as an unknown a large s·C never swallows a conductance beside it."""
    k = layout.unknown(f"{name}#current")
    layout.add(a, k, 1.0)
    layout.add(b, k, -1.0)
    layout.add(k, k, -1.0)
    layout.react({k: 1.0}, {a: 1.0, b: -1.0}, _scaled(layout, value, layout.impedance))


def _inductor(layout: Layout, name: str, part: Inductor) -> None:
    """v(a) - v(b) - (resistance + s·L)·i = 0."""
    a, b = map(layout.node, part.nodes)
    k = layout.branch(a, b, f"{name}#current")
    henry = layout.value(name, part.inductor)
    layout.react({k: -1.0}, {k: 1.0}, _scaled(layout, henry, 1.0 / layout.impedance))
    if part.resistance > 0.0:
        _resistance_term(layout, k, layout.value(f"{name}.resistance", part.resistance))
    if part.parallel_capacitance > 0.0:
        parallel = f"{name}.parallel_capacitance"
        _capacitance(layout, a, b, parallel, layout.value(parallel, part.parallel_capacitance))


def _potentiometer(layout: Layout, name: str, part: Potentiometer) -> None:
    """Two branches, since either side of the wiper may be without any resistance."""
    first, wiper, last = map(layout.node, part.nodes)
    ohm, position = layout.value(name, part.potentiometer), layout.value(f"{name}.position", part.position)
    impedance, end = layout.impedance, float(part.end_resistance)

    def before_wiper(values: FloatArray) -> FloatArray:
        fraction = track_fraction(part, values[..., position])
        return np.asarray((end + fraction * (values[..., ohm] - 2.0 * end)) / impedance)

    def after_wiper(values: FloatArray) -> FloatArray:
        fraction = 1.0 - track_fraction(part, values[..., position])
        return np.asarray((end + fraction * (values[..., ohm] - 2.0 * end)) / impedance)

    layout.resistance(first, wiper, f"{name}#before_wiper", layout.quantity(before_wiper))
    layout.resistance(wiper, last, f"{name}#after_wiper", layout.quantity(after_wiper))


def _switch(layout: Layout, name: str, part: Switch) -> None:
    a, b = map(layout.node, part.nodes)
    if part.switch == "open":
        return
    k = layout.branch(a, b, f"{name}#current")
    if part.resistance > 0.0:
        _resistance_term(layout, k, layout.value(f"{name}.resistance", part.resistance))


def _opamp(layout: Layout, name: str, part: OpAmp) -> None:
    plus, minus, out = map(layout.node, part.terminals())
    if isinstance(part.opamp, OpAmpModel):
        _one_pole(layout, name, part.opamp, (plus, minus, out))
        return
    k = layout.unknown(f"{name}#current")
    layout.add(out, k, 1.0)
    layout.add(k, plus, 1.0)
    layout.add(k, minus, -1.0)


def _one_pole(layout: Layout, name: str, model: OpAmpModel, nodes: tuple[int, int, int]) -> None:
    """(1/A0 + s/(2π·gain_bandwidth))·v(inside) - v(plus) + v(minus) = 0, with the output resistance behind it."""
    plus, minus, out = nodes
    inside = out
    if model.output_resistance > 0.0:
        inside = layout.unknown(f"{name}#inside")
        ohm = _scaled(layout, layout.value(f"{name}.output_resistance", model.output_resistance), 1 / layout.impedance)
        layout.resistance(inside, out, f"{name}#output", ohm)
    k = layout.unknown(f"{name}#current")
    layout.add(inside, k, 1.0)
    layout.add(k, plus, -1.0)
    layout.add(k, minus, 1.0)
    if model.dc_gain is not None:
        gain_db = layout.value(f"{name}.dc_gain", model.dc_gain)
        layout.add(k, inside, 1.0, layout.quantity(lambda values: 10.0 ** (-values[..., gain_db] / 20.0)))
    band = layout.value(f"{name}.gain_bandwidth", model.gain_bandwidth)
    layout.react({k: 1.0}, {inside: 1.0}, layout.quantity(lambda values: 1.0 / (2.0 * np.pi * values[..., band])))


def _controlled_voltage(layout: Layout, name: str, part: ControlledVoltage) -> None:
    plus, minus, out, back = map(layout.node, part.terminals())
    k = layout.branch(out, back, f"{name}#current")
    gain = _scaled(layout, layout.value(name, part.voltage_gain), 1.0)
    layout.add(k, plus, -1.0, gain)
    layout.add(k, minus, 1.0, gain)


def _controlled_current(layout: Layout, name: str, part: ControlledCurrent) -> None:
    plus, minus, out, back = map(layout.node, part.terminals())
    siemens = _scaled(layout, layout.value(name, part.transconductance), layout.impedance)
    for row, sign in ((out, -1.0), (back, 1.0)):
        layout.add(row, plus, sign, siemens)
        layout.add(row, minus, -sign, siemens)


def _transformer(layout: Layout, name: str, part: Transformer) -> None:
    """v1 - turns·v2 = 0; the current i into the first winding leaves the second as turns·i."""
    a, b, c, d = map(layout.node, part.nodes)
    turns = _scaled(layout, layout.value(name, part.transformer), 1.0)
    k = layout.branch(a, b, f"{name}#current")
    for node, sign in ((c, -1.0), (d, 1.0)):
        layout.add(k, node, sign, turns)
        layout.add(node, k, sign, turns)


PARTS: dict[type[Part], Callable[[Layout, str, Any], None]] = {
    Resistor: _resistor,
    Capacitor: _capacitor,
    Inductor: _inductor,
    Potentiometer: _potentiometer,
    Switch: _switch,
    OpAmp: _opamp,
    ControlledVoltage: _controlled_voltage,
    ControlledCurrent: _controlled_current,
    Transformer: _transformer,
}
