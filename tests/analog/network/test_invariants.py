"""What must hold for any network: scaling, renaming, reordering, passivity."""

import random

import msgspec
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from a2d.analog.network.parts import lay_out
from a2d.analog.network.pencil import direct_response
from a2d.analog.network.roots import zero_pole
from a2d.analog.network.solve import CHECK_HZ, solve_network
from a2d.analog.response import chain_response
from a2d.design.network import Capacitor, Inductor, Potentiometer, Resistor
from tests.support.networks import c, coil, network, one_pole, opamp, pot, r

ohms = st.floats(50.0, 2e5)
farads = st.floats(5e-10, 5e-6)
henries = st.floats(2e-4, 2.0)


@st.composite
def ladders(draw):
    """Passive two-ports: series and shunt arms of one or two parts, two to five of them."""
    parts, node = {}, "in"
    for i in range(draw(st.integers(2, 5))):
        series = draw(st.booleans())
        following = f"n{i}" if series else node
        a, b = (node, following) if series else (node, "gnd")
        kind = draw(st.sampled_from(["r", "c", "l", "rc", "rl"]))
        middle = f"m{i}" if len(kind) == 2 else b
        if "r" in kind:
            parts[f"R{i}"] = r(draw(ohms), a, middle)
            a, middle = middle, b
        if "c" in kind:
            parts[f"C{i}"] = c(draw(farads), a, b)
        if "l" in kind:
            parts[f"L{i}"] = coil(draw(henries), a, b, resistance=draw(st.floats(0.5, 50.0)))
        node = following
    return network(parts, source=draw(ohms), load=draw(ohms), end=node)


@st.composite
def active(draw):
    """An inverting stage with a pot between input and output, of any values and an op-amp of any speed."""
    model = draw(st.sampled_from(["ideal", one_pole(1e6), one_pole(8e6, dc_gain=100.0, output_resistance=100.0)]))
    parts = {
        "R1": r(draw(ohms), "in", "a"),
        "P1": pot(draw(ohms), "a", "w", "b", draw(st.floats(0.001, 0.999))),
        "R2": r(draw(ohms), "b", "out"),
        "C1": c(draw(farads), "a", "w"),
        "C2": c(draw(farads), "w", "b"),
        "R3": r(draw(ohms), "w", "m"),
        "U1": opamp("gnd", "m", "out", model),
    }
    return network(parts, load=draw(ohms))


def scaled(net, ohm=1.0, farad=1.0, henry=1.0):
    """Every resistance times `ohm`, and so on."""
    parts = {name: scaled_part(part, ohm, farad, henry) for name, part in net.parts.items()}
    load = None if net.exit.load is None else net.exit.load * ohm
    return network(parts, source=net.entry.source * ohm, load=load, start=net.entry.node, end=net.exit.node)


def scaled_part(part, ohm, farad, henry):
    if isinstance(part, Resistor):
        return r(part.resistor * ohm, *part.nodes)
    if isinstance(part, Capacitor):
        return c(part.capacitor * farad, *part.nodes)
    if isinstance(part, Inductor):
        return coil(part.inductor * henry, *part.nodes, resistance=part.resistance * ohm)
    if isinstance(part, Potentiometer):
        return pot(part.potentiometer * ohm, *part.nodes, part.position)
    if part.opamp == "ideal":
        return part
    model = msgspec.structs.replace(part.opamp, output_resistance=part.opamp.output_resistance * ohm)
    return msgspec.structs.replace(part, opamp=model)


def sections(net):
    solution = solve_network(net)
    return chain_response(solution.b, solution.a, CHECK_HZ)


def close(h, other):
    """To the 1e-8 that each of the two is checked against its own network with, doubled; and its floor."""
    return np.all(np.abs(h - other) <= 2e-8 * np.abs(h) + 2e-14 * np.abs(h).max())


@settings(max_examples=30, deadline=None)
@given(st.one_of(ladders(), active()), st.floats(1e-2, 1e2))
def test_scaling_every_impedance_leaves_h_unchanged(net, k):
    assert close(sections(net), sections(scaled(net, ohm=k, farad=1 / k, henry=k)))


@settings(max_examples=30, deadline=None)
@given(ladders(), st.floats(0.1, 10.0))
def test_scaling_every_reactance_moves_every_root_by_its_inverse(net, k):
    """The products and sums of all poles and of all zeros: single roots may be ill-conditioned, these are not."""
    slow = scaled(net, farad=k, henry=k)
    one, other = (zero_pole(lay_out(n).pencil(np.array(lay_out(n).nominal))) for n in (net, slow))
    for before, after in ((one.poles, other.poles), (one.zeros, other.zeros)):
        assert len(before) == len(after)
        assert np.sum(after) * k == pytest.approx(np.sum(before), rel=1e-8)
        assert np.prod(after * k / 1e4) == pytest.approx(np.prod(before / 1e4), rel=1e-8)


@settings(max_examples=30, deadline=None)
@given(st.one_of(ladders(), active()), st.randoms(use_true_random=False))
def test_renaming_nodes_and_reordering_parts_changes_nothing(net, rng: random.Random):
    names = sorted({n for p in net.parts.values() for n in p.terminals()} - {"gnd"})
    shuffled = list(names)
    rng.shuffle(shuffled)
    renamed = {"gnd": "gnd"} | {old: f"x{new}" for old, new in zip(names, shuffled, strict=True)}
    items = list(net.parts.items())
    rng.shuffle(items)
    parts = {name: renamed_part(part, renamed) for name, part in items}
    other = network(parts, net.entry.source, net.exit.load, start=renamed[net.entry.node], end=renamed[net.exit.node])
    assert close(sections(net), sections(other))


def renamed_part(part, names):
    if isinstance(part.nodes, tuple):
        return msgspec.structs.replace(part, nodes=tuple(names[n] for n in part.nodes))
    nodes = {key: names[getattr(part.nodes, key)] for key in ("plus", "minus", "out")}
    return msgspec.structs.replace(part, nodes=type(part.nodes)(**nodes))


@settings(max_examples=30, deadline=None)
@given(ladders())
def test_a_passive_network_takes_no_more_than_there_is(net):
    """|H|² <= load/(4·source), the power available at the load; without coils |H| <= 1 besides."""
    h = np.abs(sections(net))
    assert np.all(h**2 <= net.exit.load / (4 * net.entry.source) * (1 + 1e-7))
    if not any(isinstance(part, Inductor) for part in net.parts.values()):
        assert np.all(h <= 1 + 1e-7)


@settings(max_examples=30, deadline=None)
@given(ladders())
def test_a_reciprocal_network_is_the_same_from_behind(net):
    """Source and load change places: the current in the load for one volt stays (reciprocity)."""
    behind = network(net.parts, net.exit.load, net.entry.source, start=net.exit.node, end=net.entry.node)
    assert close(sections(net) / net.exit.load, sections(behind) / net.entry.source)


@settings(max_examples=30, deadline=None)
@given(st.one_of(ladders(), active()))
def test_sections_agree_with_the_network(net):
    layout = lay_out(net)
    assert close(sections(net), direct_response(layout.pencil(np.array(layout.nominal)), CHECK_HZ))
