"""Short ways to write parts in tests."""

from a2d.design.network import (
    Capacitor,
    Inductor,
    Input,
    Network,
    OpAmp,
    OpAmpModel,
    OpAmpNodes,
    Output,
    Potentiometer,
    Resistor,
)


def r(ohm, a, b):
    return Resistor(resistor=ohm, nodes=(a, b))


def c(farad, a, b, **more):
    return Capacitor(capacitor=farad, nodes=(a, b), **more)


def coil(henry, a, b, **more):
    return Inductor(inductor=henry, nodes=(a, b), **more)


def pot(ohm, first, wiper, last, position, **more):
    return Potentiometer(potentiometer=ohm, nodes=(first, wiper, last), position=position, **more)


def opamp(plus, minus, out, model="ideal"):
    return OpAmp(opamp=model, nodes=OpAmpNodes(plus=plus, minus=minus, out=out))


def one_pole(gain_bandwidth, **more):
    return OpAmpModel(gain_bandwidth=gain_bandwidth, **more)


def network(parts, source=0.0, load=None, start="in", end="out"):
    return Network(input=Input(node=start, source=source), output=Output(node=end, load=load), parts=parts)


def bs468():
    """The weighting network of Rec. ITU-R BS.468-4, Annex 1, figure 1a, between 600 Ω and 600 Ω."""
    parts = {
        "C1": c(13.85e-9, "in", "gnd"),
        "L1": coil(12.88e-3, "in", "b"),
        "C2": c(26.82e-9, "b", "gnd"),
        "C3": c(33.06e-9, "b", "c"),
        "C4": c(9.21e-9, "c", "gnd"),
        "L2": coil(26.49e-3, "c", "out"),
        "C5": c(31.47e-9, "out", "gnd"),
    }
    return network(parts, source=600.0, load=600.0)


def lowpass_ladder(order, ohm=1e3):
    """An LC ladder between equal resistances, every value a little different."""
    parts, node = {}, "in"
    for i in range(order):
        if i % 2 == 0:
            parts[f"C{i}"] = c(1e-8 * (1 + 0.03 * i), node, "gnd")
        else:
            parts[f"L{i}"] = coil(1e-2 * (1 + 0.05 * i), node, f"n{i}")
            node = f"n{i}"
    return network(parts, source=ohm, load=ohm, end=node)


def highpass_ladder(order, ohm=1e3):
    """The mirror of `lowpass_ladder`."""
    parts, node = {}, "in"
    for i in range(order):
        if i % 2 == 0:
            parts[f"C{i}"] = c(1e-8 * (1 + 0.03 * i), node, f"n{i}")
            node = f"n{i}"
        else:
            parts[f"L{i}"] = coil(1e-2 * (1 + 0.05 * i), node, "gnd")
    return network(parts, source=ohm, load=ohm, end=node)


def sallen_key_cascade(stages, model="ideal"):
    """Equal second-order low-pass stages one after the other: every pole occurs `stages` times."""
    parts, node = {}, "in"
    for i in range(stages):
        parts |= {
            f"R1{i}": r(1e4, node, f"a{i}"),
            f"R2{i}": r(1e4, f"a{i}", f"b{i}"),
            f"Ca{i}": c(2e-8, f"a{i}", f"o{i}"),
            f"Cb{i}": c(1e-8, f"b{i}", "gnd"),
            f"U{i}": opamp(f"b{i}", f"o{i}", f"o{i}", model),
        }
        node = f"o{i}"
    return network(parts, end=node)
