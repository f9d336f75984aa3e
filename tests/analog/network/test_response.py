"""The response for many sets of values against one direct solve a set, and what it refuses."""

import numpy as np
import pytest

from a2d.analog.network.parts import lay_out
from a2d.analog.network.pencil import direct_response
from a2d.analog.network.response import network_response, nominal_values, value_names
from a2d.design.network import ControlledCurrent, ControlledNodes
from a2d.errors import NetworkError, ParameterError
from tests.support.networks import bs468, c, coil, lowpass_ladder, network, one_pole, opamp, pot, r, sallen_key_cascade

F = np.geomspace(1.0, 1e5, 41)


def presence_band():
    return network(
        {
            "R1": r(1e4, "in", "b"),
            "R2": r(1e4, "b", "out"),
            "P1": pot(1e4, "in", "w", "out", 0.3, taper="logarithmic", mid=0.15, end_resistance=3.0),
            "C1": c(39e-9, "w", "x", series_resistance=0.5, leakage_resistance=1e9),
            "L1": coil(13e-3, "x", "gnd", resistance=4.0, parallel_capacitance=40e-12),
            "U1": opamp("gnd", "b", "out", one_pole(3e6, dc_gain=100.0, output_resistance=60.0)),
        },
        source=50.0,
        load=1e4,
    )


def one_by_one(net, sets):
    layout = lay_out(net)
    return np.array([direct_response(layout.pencil(values), F) for values in sets])


@pytest.mark.parametrize("net", [bs468(), presence_band(), lowpass_ladder(9), sallen_key_cascade(3)])
def test_many_sets_are_what_one_solve_a_set_gives(net):
    nominal = nominal_values(net)
    sets = nominal * np.random.default_rng(4).uniform(0.8, 1.2, (30, len(nominal)))
    expected = one_by_one(net, sets)
    error = np.abs(network_response(net, sets, F) - expected)
    # a rounding of 1e-16 of the largest response, times the condition of K (below 1e3 for these)
    assert error.max() < 1e-12 * np.abs(expected).max()


def test_leading_axes_are_kept():
    net = bs468()
    sets = np.broadcast_to(nominal_values(net), (2, 3, 9))
    assert network_response(net, sets, F).shape == (2, 3, 41)
    assert network_response(net, nominal_values(net), 1e3).shape == (1,)


def test_a_wiper_at_ground_gives_zero():
    """H is zero at every frequency, so nothing may be divided by it."""
    net = network({"P1": pot(1e4, "gnd", "out", "in", 0.5), "C1": c(1e-9, "out", "gnd"), "R1": r(1e3, "in", "gnd")})
    sets = np.array([nominal_values(net)] * 3)
    sets[:, value_names(net).index("P1.position")] = [0.0, 1e-9, 1.0]
    h = network_response(net, sets, F)
    # the first: to the rounding of the response that is added and taken away again, 1
    assert np.abs(h[0]).max() < 1e-15
    assert np.abs(h[1]) == pytest.approx(np.full(41, 1e-9), rel=1e-5)
    assert np.abs(h[2]) == pytest.approx(np.ones(41), rel=1e-12)


def test_value_names():
    assert value_names(presence_band()) == (
        "source",
        "R1",
        "R2",
        "P1",
        "P1.position",
        "C1.series_resistance",
        "C1.leakage_resistance",
        "C1",
        "L1",
        "L1.resistance",
        "L1.parallel_capacitance",
        "U1.output_resistance",
        "U1.dc_gain",
        "U1.gain_bandwidth",
        "load",
    )


def test_a_network_beyond_the_fast_way_is_solved_directly():
    """Picofarads drive 800 µF: H is below 4e-7 everywhere, and the fast way 1e-8 of that off."""
    parts = {
        "R0": r(7.6, "gnd", "n0"),
        "C1": c(9.5e-12, "n0", "in"),
        "C2": c(4.4e-10, "n0", "in"),
        "C3": c(2.2e-11, "n0", "out"),
        "C4": c(8e-4, "gnd", "out"),
        "R5": r(5.1, "n0", "out"),
    }
    net = network(parts)
    sets = np.array([nominal_values(net)] * 3)
    expected = one_by_one(net, sets)
    scale = np.abs(expected).max(axis=-1, keepdims=True)
    assert np.all(np.abs(network_response(net, sets, F) - expected) <= 1e-10 * scale)


def test_refusals():
    net = bs468()
    with pytest.raises(ParameterError, match=r"a set has 8 values \(allowed 9: source, C1"):
        network_response(net, np.ones(8), F)
    with pytest.raises(ParameterError, match="not a finite number"):
        network_response(net, np.full(9, np.nan), F)
    with pytest.raises(NetworkError, match="one connection only"):
        network_response(network({**net.parts, "RX": r(1.0, "out", "x")}), np.ones(8), F)


def test_a_set_without_a_solution_is_refused():
    """A negative conductance of 1/1024 S beside a resistor of 1024 Ω leaves the output open."""
    source = ControlledCurrent(transconductance=1e-4, nodes=ControlledNodes(plus="out", out="out"))
    net = network({"R1": r(1024.0, "in", "out"), "G1": source})
    assert network_response(net, [1024.0, 2.0**-11], F) == pytest.approx(np.full(41, 2.0))
    with pytest.raises(NetworkError, match="without a unique solution"):
        network_response(net, [1024.0, 2.0**-10], F)
