"""The same network in ngspice: written from the design's structs, of nothing that the solver uses."""

import subprocess

import numpy as np

from a2d.design.network import (
    Capacitor,
    ControlledCurrent,
    ControlledVoltage,
    Inductor,
    OpAmp,
    Potentiometer,
    Resistor,
    Switch,
    Transformer,
)

IDEAL_GAIN = 1e9  # stands for an infinite one
SHORT = 1e-4  # Ω, stands for none at a pot's end: a smaller one costs ngspice, which adds conductances up, its digits


def response(network, ngspice, folder, decade=20, start=1.0, stop=1e5):
    """f_hz [F], H [F] of ngspice's small-signal analysis, 20 points a decade from 1 Hz to 100 kHz."""
    out = folder / "response.txt"
    deck = folder / "network.cir"
    minus = network.exit.minus
    wanted = f"v({node(network.exit.node)})" + ("" if minus == "gnd" else f"-v({node(minus)})")
    lines = ["* network", *parts(network)]
    lines += [
        ".control",
        "set numdgt=16",
        "set wr_singlescale",
        f"ac dec {decade} {start} {stop}",
        f"let h={wanted}",
        f"wrdata {out} real(h) imag(h)",
        "quit",
        ".endc",
        ".end",
    ]
    deck.write_text("\n".join(lines) + "\n")
    done = subprocess.run([ngspice, "-b", str(deck)], capture_output=True, text=True, timeout=60, check=False)
    assert out.exists(), done.stdout + done.stderr
    f, real, imag = np.loadtxt(out).T
    return f, real + 1j * imag


def node(name):
    return "0" if name == "gnd" else f"n_{name}"


def parts(network):
    yield f"Vsource {'src' if network.entry.source else node(network.entry.node)} 0 ac 1"
    if network.entry.source:
        yield f"Rsource src {node(network.entry.node)} {network.entry.source:.17g}"
    if network.exit.load is not None:
        yield f"Rload {node(network.exit.node)} {node(network.exit.minus)} {network.exit.load:.17g}"
    for name, part in network.parts.items():
        yield from WRITERS[type(part)](name, part)


def resistor(name, part):
    a, b = map(node, part.nodes)
    yield f"R{name} {a} {b} {part.resistor:.17g}"


def capacitor(name, part):
    a, b = map(node, part.nodes)
    if part.series_resistance > 0:
        yield f"R{name}s {a} {name}_in {part.series_resistance:.17g}"
        a = f"{name}_in"
    if part.leakage_resistance is not None:
        yield f"R{name}p {a} {b} {part.leakage_resistance:.17g}"
    yield f"C{name} {a} {b} {part.capacitor:.17g}"


def inductor(name, part):
    a, b = map(node, part.nodes)
    inner = f"{name}_in" if part.resistance else a
    if part.resistance:
        yield f"R{name} {a} {inner} {part.resistance:.17g}"
    yield f"L{name} {inner} {b} {part.inductor:.17g}"
    if part.parallel_capacitance > 0:
        yield f"C{name} {a} {b} {part.parallel_capacitance:.17g}"


def potentiometer(name, part):
    """By the law as the docs give it, written out again."""
    first, wiper, last = map(node, part.nodes)
    p = float(part.position)
    if part.taper in ("logarithmic", "reverse_logarithmic"):
        k = (1 / part.mid - 1) ** 2
        p = (k**p - 1) / (k - 1)
    elif part.taper == "two_slope":
        p = 2 * p * part.mid if p < 0.5 else part.mid + (2 * p - 1) * (1 - part.mid)
    elif part.taper == "table":
        low, high = next((a, b) for a, b in zip(part.table, part.table[1:], strict=False) if a[0] <= p <= b[0])
        p = low[1] + (high[1] - low[1]) * (p - low[0]) / (high[0] - low[0])
    track = part.potentiometer - 2 * part.end_resistance
    yield f"R{name}a {first} {wiper} {max(part.end_resistance + p * track, SHORT):.17g}"
    yield f"R{name}b {wiper} {last} {max(part.end_resistance + (1 - p) * track, SHORT):.17g}"


def switch(name, part):
    a, b = map(node, part.nodes)
    if part.switch == "closed":
        yield f"R{name} {a} {b} {max(part.resistance, SHORT):.17g}"


def op_amp(name, part):
    plus, minus, out = map(node, part.terminals())
    if part.opamp == "ideal":
        yield f"E{name} {out} 0 {plus} {minus} {IDEAL_GAIN}"
        return
    model = part.opamp
    gain = 1e12 if model.dc_gain is None else 10 ** (model.dc_gain / 20)
    yield f"G{name} 0 {name}_x {plus} {minus} 1"
    yield f"R{name}x {name}_x 0 {gain:.17g}"
    yield f"C{name}x {name}_x 0 {1 / (2 * np.pi * model.gain_bandwidth):.17g}"
    inner = f"{name}_y" if model.output_resistance else out
    yield f"E{name} {inner} 0 {name}_x 0 1"
    if model.output_resistance:
        yield f"R{name}y {inner} {out} {model.output_resistance:.17g}"


def controlled_voltage(name, part):
    plus, minus, out, back = map(node, part.terminals())
    yield f"E{name} {out} {back} {plus} {minus} {part.voltage_gain:.17g}"


def controlled_current(name, part):
    plus, minus, out, back = map(node, part.terminals())
    yield f"G{name} {back} {out} {plus} {minus} {part.transconductance:.17g}"


def transformer(name, part):
    a, b, c, d = map(node, part.nodes)
    yield f"E{name} {a} {name}_x {c} {d} {part.transformer:.17g}"
    yield f"V{name} {name}_x {b} 0"
    yield f"F{name} {d} {c} V{name} {part.transformer:.17g}"


WRITERS = {
    Resistor: resistor,
    Capacitor: capacitor,
    Inductor: inductor,
    Potentiometer: potentiometer,
    Switch: switch,
    OpAmp: op_amp,
    ControlledVoltage: controlled_voltage,
    ControlledCurrent: controlled_current,
    Transformer: transformer,
}
