"""Faults of the drawing are told by name before anything is solved."""

import pytest

from a2d.analog.network.faults import faults
from a2d.analog.network.solve import solve_network
from a2d.design.network import ControlledNodes, ControlledVoltage, Switch, Transformer
from a2d.errors import NetworkError
from tests.support.networks import c, network, one_pole, opamp, pot, r

RC = {"R1": r(1e3, "in", "out"), "C1": c(1e-6, "out", "gnd")}


def test_a_sound_network_has_no_faults():
    assert faults(network(RC)) == ()


@pytest.mark.parametrize(
    ("more", "message"),
    [
        ({"R2": r(1e3, "out", "x")}, r'node "x" has one connection only \(part "R2"'),
        ({"R2": r(1e3, "x", "y"), "C2": c(1e-9, "x", "y")}, 'node "x" has no path to "gnd"'),
        ({"R2": r(1e3, "x", "y"), "C2": c(1e-9, "x", "y")}, 'node "y" has no path to "gnd"'),
        ({"S1": Switch(switch="closed", nodes=("in", "gnd"))}, 'part "S1" is a short across the input "in"'),
        ({"S1": Switch(switch="closed", nodes=("gnd", "in"))}, 'part "S1" is a short across the input "in"'),
        (
            {
                "U1": opamp("out", "x", "x"),
                "E1": ControlledVoltage(voltage_gain=2.0, nodes=ControlledNodes(plus="in", out="x")),
            },
            'part "E1" closes a loop of voltage sources and shorts between "x" and "gnd"',
        ),
        ({"U1": opamp("out", "gnd", "y"), "R2": r(1e3, "y", "gnd")}, 'op-amp "U1" has no feedback'),
        ({"r1": r(1e3, "in", "out")}, 'the name of part "r1" is there twice but for capitals'),
        ({"R2": r(1e3, "out", "out")}, 'part "R2" has both of its ends at node "out"'),
        ({"U1": opamp("x", "x", "y"), "R2": r(1e3, "x", "y")}, 'op-amp "U1" has both of its inputs at node "x"'),
        ({"U1": opamp("gnd", "out", "gnd")}, 'op-amp "U1" has its output at "gnd"'),
        (
            {"T1": Transformer(transformer=2.0, nodes=("in", "in", "out", "gnd"))},
            'transformer "T1" has both ends of a winding at node "in"',
        ),
        ({"P1": pot(1e4, "in", "gnd", "gnd", 0.0)}, 'part "P1" is a short across the input "in"'),
        ({"P1": pot(1e4, "gnd", "gnd", "in", 1.0)}, 'part "P1" is a short across the input "in"'),
        ({"P1": pot(1e4, "out", "x", "gnd", 0.0), "S1": Switch(switch="closed", nodes=("out", "x"))}, "closes a loop"),
        ({"load": r(1e3, "in", "out")}, 'the part "load" has a reserved name'),
    ],
)
def test_fault(more, message):
    with pytest.raises(NetworkError, match=message):
        solve_network(network({**RC, **more}))


@pytest.mark.parametrize(("nodes", "position"), [(("in", "in", "out"), 0.0), (("in", "out", "out"), 1.0)])
def test_a_wiper_tied_to_its_end(nodes, position):
    """The side that is tied off carries no current, at the end of the travel too: what is left is the whole track."""
    solution = solve_network(network({"P1": pot(1e3, *nodes, position), "C1": c(1e-6, "out", "gnd")}))
    assert solution.a[0] / solution.a[0, 2] == pytest.approx([0.0, 1e-3, 1.0], rel=1e-12)


def test_an_output_that_the_input_cannot_reach():
    parts = {**RC, "R2": r(1e3, "x", "gnd"), "C2": c(1e-9, "x", "gnd")}
    with pytest.raises(NetworkError, match='the input "in" cannot reach the output "x"'):
        solve_network(network(parts, end="x"))


def test_ends_that_are_no_nodes():
    with pytest.raises(NetworkError, match='the output "nowhere" is not a node of any part'):
        solve_network(network(RC, end="nowhere"))
    with pytest.raises(NetworkError, match='the input is "gnd" itself'):
        solve_network(network(RC, start="gnd"))


def test_all_faults_at_once():
    parts = {**RC, "R2": r(1e3, "out", "x"), "S1": Switch(switch="closed", nodes=("in", "gnd"))}
    assert len(faults(network(parts))) == 2


INVERTING = {"R1": r(1e4, "in", "m"), "R2": r(2e4, "m", "out"), "C1": c(1e-9, "m", "out")}


@pytest.mark.parametrize("model", ["ideal", one_pole(3e6), one_pole(3e6, dc_gain=100.0, output_resistance=50.0)])
def test_an_op_amp_with_its_inputs_the_wrong_way_round(model):
    """An ideal op-amp would hide it: its inputs are equal whichever is which."""
    assert len(solve_network(network({**INVERTING, "U1": opamp("gnd", "m", "out", model)})).b) >= 1
    with pytest.raises(NetworkError, match=r'unstable: .* Hz \(op-amp "U1" has its inputs the wrong way round'):
        solve_network(network({**INVERTING, "U1": opamp("m", "gnd", "out", model)}))


def test_too_much_gain_in_a_sallen_key_stage_is_unstable_at_its_frequency():
    """K = 1 + 25k/10k = 3.5 is above 3, where equal values oscillate, at 1/(2πRC) = 1592 Hz."""
    parts = {
        "R1": r(1e4, "in", "a"),
        "R2": r(1e4, "a", "p"),
        "C1": c(1e-8, "a", "out"),
        "C2": c(1e-8, "p", "gnd"),
        "RA": r(1e4, "m", "gnd"),
        "RB": r(2.5e4, "m", "out"),
        "U1": opamp("p", "m", "out"),
    }
    with pytest.raises(NetworkError, match=r"right half-plane at 159[12](\.\d+)? Hz \(look for feedback"):
        solve_network(network(parts))
