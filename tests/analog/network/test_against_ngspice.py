"""Networks against ngspice, a general circuit simulator: complex response at 20 points a decade, 1 Hz to 100 kHz."""

import numpy as np
import pytest

from a2d.analog.circuits import CIRCUITS
from a2d.analog.network.change import with_ends, with_op_amps
from a2d.analog.network.response import network_response, nominal_values
from a2d.analog.network.solve import solve_network
from a2d.analog.response import chain_response
from a2d.design.circuits import SeriesResonantBand, SimulatedInductorBand
from a2d.design.network import (
    ControlledCurrent,
    ControlledNodes,
    ControlledVoltage,
    Network,
    Output,
    Switch,
    Transformer,
)
from tests.support import spice
from tests.support.networks import (
    bs468,
    c,
    coil,
    highpass_ladder,
    lowpass_ladder,
    network,
    one_pole,
    opamp,
    pot,
    r,
    sallen_key_cascade,
)
from tests.support.tools import need

AUDIO_OP_AMP = one_pole(3e6, dc_gain=100.0, output_resistance=100.0)
FAST_OP_AMP = one_pole(10e6, dc_gain=110.0)


def ready(circuit, **values):
    return CIRCUITS[circuit].build(CIRCUITS[circuit].parts(**values))


def bands(positions, kind=SimulatedInductorBand):
    """Interacting bands of the ten-band sort: octaves from 62.5 Hz, simulated or real inductors."""
    made = []
    for i, position in enumerate(positions):
        c1 = 3.3e-6 / 2**i
        if kind is SimulatedInductorBand:
            made.append(kind(P1=1e4, C1=c1, R1=510.0, R2=68e3, C2=56e-9 / 2**i, position=position))
        else:
            made.append(kind(P1=1e4, C1=c1, L1=1.9 / 2**i, R1=510.0, position=position))
    return tuple(made)


def tone_control(**positions):
    values = {"R1": 11e3, "R2": 3.6e3, "R3": 11e3, "C1": 51e-9, "C2": 5.1e-9, "P1": 100e3, "P2": 500e3}
    return ready("baxandall", **values, **positions)


def tapered():
    """Every taper, end resistances, a switch and a loaded output."""
    parts = {
        "P1": pot(1e4, "gnd", "a", "in", 0.35, taper="logarithmic", mid=0.12, end_resistance=2.0),
        "R1": r(2.2e3, "a", "b"),
        "C1": c(22e-9, "b", "gnd", series_resistance=1.5, leakage_resistance=2e6),
        "P2": pot(5e4, "b", "d", "gnd", 0.8, taper="reverse_logarithmic", mid=0.85),
        "P3": pot(2e4, "d", "e", "gnd", 0.3, taper="two_slope", mid=0.2),
        "P4": pot(2e4, "e", "out", "gnd", 0.6, taper="table", table=((0.0, 0.0), (0.4, 0.1), (1.0, 1.0))),
        "S1": Switch(switch="closed", nodes=("e", "f"), resistance=0.05),
        "S2": Switch(switch="open", nodes=("out", "f")),
        "L1": coil(0.22, "f", "gnd", resistance=120.0, parallel_capacitance=180e-12),
    }
    return network(parts, source=75.0, load=47e3)


def controlled():
    """Controlled sources and a transformer, the output between two nodes."""
    parts = {
        "E1": ControlledVoltage(voltage_gain=-3.0, nodes=ControlledNodes(plus="a", minus="b", out="d", back="b")),
        "R1": r(1e3, "in", "a"),
        "C1": c(1e-7, "a", "b"),
        "R2": r(2.2e3, "b", "gnd"),
        "G1": ControlledCurrent(transconductance=2e-3, nodes=ControlledNodes(plus="d", out="e")),
        "R3": r(4.7e3, "e", "gnd"),
        "T1": Transformer(transformer=4.0, nodes=("e", "gnd", "s1", "s2")),
        "R4": r(150.0, "s1", "x"),
        "C2": c(1e-6, "x", "s2"),
        "R5": r(1e4, "s2", "gnd"),
    }
    return Network(input="in", output=Output(node="x", minus="s2"), parts=parts)


IDEAL = {
    "weighting network": bs468(),
    "Baxandall, boost and cut": tone_control(bass=0.9, treble=0.2),
    "Baxandall, wipers at the ends": tone_control(bass=1.0, treble=0.0),
    "passive tone control": ready(
        "passive_tone",
        R1=1e4, R2=1e3, R3=1e4, C1=22e-9, C2=220e-9, C3=2.2e-9, C4=22e-9, P1=1e5, P2=1e5, bass=0.4, treble=0.7,
    ),
    "ten interacting bands": ready(
        "simulated_inductor_bands", R1=3e3, R2=3e3, band=bands([1, 0, 0.7, 0.3, 0.5, 0.9, 0.1, 0.6, 0.45, 0.8])
    ),
    "five bands with coils": ready(
        "series_resonant_bands", R1=3.3e3, R2=3.3e3, band=bands([1, 0.2, 0.5, 0.7, 0.0], SeriesResonantBand)
    ),
    "tapers and a switch": tapered(),
    "controlled sources and transformer": controlled(),
    "ladder of order 9": lowpass_ladder(9),
    "high-pass ladder of order 7": highpass_ladder(7),
    "state-variable": ready(
        "state_variable_bandpass",
        R1=22e3, R2=12e3, R3=8.2e3, R4=56e3, R5=2.7e3, R6=18e3, R7=5.6e3, C1=3.3e-9, C2=15e-9,
    ),
    "disc replay": ready("disc_replay_active", R1=340.0, R2=316e3, R3=28e3, C1=33e-6, C2=10e-9, C3=2.7e-9),
    "crossover, uncorrected": ready(
        "crossover_lowpass", L1=0.5e-3, C1=12e-6, R2=6.2, L2=0.7e-3, R3=8.2, C2=10e-6, L1_resistance=0.3
    ),
}  # fmt: skip

FINITE = {
    "Baxandall": with_ends(with_op_amps(tone_control(bass=0.9, treble=0.2), AUDIO_OP_AMP), 600.0, 10e3),
    "multiple feedback": with_op_amps(
        ready("multiple_feedback_bandpass", R1=8.2e3, R2=1.5e3, R3=82e3, C1=15e-9, C2=15e-9), AUDIO_OP_AMP
    ),
    "Fliege notch": with_op_amps(
        ready(
            "fliege_notch", R1=68e3, R2=68e3, R3=1e4, R4=1e4, R5=1e4, R6=1e4, C1=15.9e-9, C2=15.9e-9
        ),
        FAST_OP_AMP,
    ),
    "three equal stages": sallen_key_cascade(3, AUDIO_OP_AMP),
    "ten interacting bands": with_op_amps(IDEAL["ten interacting bands"], FAST_OP_AMP),
    "Tow-Thomas": with_op_amps(
        ready(
            "tow_thomas_bandpass",
            R1=12e3, R2=150e3, R3=33e3, R4=8.2e3, R5=10e3, R6=15e3, C1=2.2e-9, C2=6.8e-9,
        ),
        AUDIO_OP_AMP,
    ),
    "disc replay": with_op_amps(IDEAL["disc replay"], AUDIO_OP_AMP),
    "buffered T": network(
        {
            "R1": r(1e4, "in", "a"),
            "C1": c(1e-8, "a", "gnd"),
            "U1": opamp("a", "b", "b", one_pole(1e6, output_resistance=75.0)),
            "C2": c(1e-6, "b", "out"),
            "R2": r(600.0, "out", "gnd"),
        }
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", IDEAL)
def test_with_ideal_op_amps(name, tmp_path):
    """1e-4 dB and 1e-3 degree: ngspice has 1e9 for an infinite gain, and 0.1 mΩ for none at a pot's end."""
    f, theirs = spice.response(IDEAL[name], need("ngspice"), tmp_path)
    solution = solve_network(IDEAL[name])
    ratio = chain_response(solution.b, solution.a, f) / theirs
    assert np.abs(20 * np.log10(np.abs(ratio))).max() < 1e-4
    assert np.abs(np.degrees(np.angle(ratio))).max() < 1e-3


@pytest.mark.parametrize("name", FINITE)
def test_with_one_pole_op_amps(name, tmp_path):
    """1e-6 relative: the models are the same. ngspice's own relative tolerance and printed digits are far below."""
    f, theirs = spice.response(FINITE[name], need("ngspice"), tmp_path)
    solution = solve_network(FINITE[name])
    assert np.abs(chain_response(solution.b, solution.a, f) / theirs - 1.0).max() < 1e-6
    many = network_response(FINITE[name], nominal_values(FINITE[name]), f)
    # many sets at once promise an error of the largest response, not of each
    assert np.all(np.abs(many - theirs) <= 1e-6 * np.abs(theirs) + 1e-13 * np.abs(theirs).max())
