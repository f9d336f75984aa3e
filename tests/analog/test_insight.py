"""What is said of a circuit: f0, Q, gains, and what op-amps, source and load change."""

import math

import numpy as np
import pytest

from a2d.analog.circuits import CIRCUITS
from a2d.analog.insight import EVERYDAY_OP_AMP, changes, figures
from a2d.analog.network.change import with_ends, with_op_amps
from tests.support.networks import c, network, one_pole, opamp, r

BAND = (20.0, 20_000.0)


def test_figures_of_a_bandpass():
    w, q, h0 = 2 * np.pi * 800.0, 3.0, 5.0
    f = figures(np.array([0, h0 / (q * w), 0]), np.array([1 / w**2, 1 / (q * w), 1]))
    assert (f.f0_hz, f.q) == pytest.approx((800.0, 3.0))
    assert f.gain_f0_db == pytest.approx(20 * math.log10(5))
    assert f.gain_0_db == f.gain_inf_db == -math.inf


def test_figures_of_first_order_and_of_a_plain_gain():
    f = figures(np.array([0, 2e-3, 0.5]), np.array([0, 1e-3, 1.0]))
    assert f.f0_hz == pytest.approx(1e3 / (2 * math.pi))
    assert f.q is None
    assert (f.gain_0_db, f.gain_inf_db) == pytest.approx((-6.0206, 6.0206), abs=1e-4)
    assert figures(np.array([0, 0, 2.0]), np.array([0, 0, 1.0])).f0_hz is None


def test_finite_gain_bandwidth_of_an_inverting_stage():
    """Gain -10 with 1 MHz: the pole lies at 1 MHz/11, so 20 kHz loses 10·log10(1 + 0.22²) dB."""
    parts = {"R1": r(1e3, "in", "m"), "R2": r(1e4, "m", "out"), "U1": opamp("gnd", "m", "out", one_pole(1e6))}
    (change,) = changes(network(parts), BAND)
    assert change.worst_db == pytest.approx(-10 * math.log10(1 + 0.22**2), abs=1e-3)
    assert change.at_hz == pytest.approx(20e3)


def test_ideal_op_amps_are_held_against_everyday_ones():
    parts = {"R1": r(1e3, "in", "m"), "R2": r(1e4, "m", "out"), "U1": opamp("gnd", "m", "out")}
    (change,) = changes(network(parts), BAND)
    assert change.what.startswith("op-amps of 3 MHz")
    real = with_op_amps(network(parts), EVERYDAY_OP_AMP)
    assert changes(real, BAND)[0].worst_db == pytest.approx(change.worst_db)
    # the pole at 3 MHz/11, and 11/10^5 less gain at all frequencies
    expected = -10 * math.log10(1 + (20e3 * 11 / 3e6) ** 2) - 20 * math.log10(1 + 11e-5)
    assert change.worst_db == pytest.approx(expected, abs=1e-5)


def test_everyday_op_amps_that_would_make_a_circuit_unstable():
    """Tow-Thomas at 15.9 kHz with Q 50: the delay of 3 MHz op-amps raises Q by 1/(1 - 4·Q·f0/GBW) (from memory), here
    beyond all bounds, since 4·Q·f0 is above 3 MHz; with Q 10 it is not.
    """
    values = {"R1": 1e4, "R2": 5e5, "R3": 1e4, "R4": 1e4, "R5": 1e4, "R6": 1e4, "C1": 1e-9, "C2": 1e-9}
    circuit = CIRCUITS["tow_thomas_bandpass"]
    (change,) = changes(circuit.build(circuit.parts(**values)), BAND)
    assert change.worst_db == math.inf
    assert change.at_hz == pytest.approx(15.9e3, rel=0.05)
    (calm,) = changes(circuit.build(circuit.parts(**{**values, "R2": 1e5})), BAND)
    assert math.isfinite(calm.worst_db)


def test_source_and_load():
    """600 Ω into 600 Ω halves; the load's own change is that of the whole divider, and so is the source's."""
    parts = {"R1": r(1e6, "in", "gnd"), "C1": c(1e-12, "in", "gnd")}
    told = changes(with_ends(network(parts, end="in"), 600.0, 600.0), BAND)
    assert [t.what for t in told] == ["the source of 600 Ω", "the load of 600 Ω"]
    assert [t.worst_db for t in told] == pytest.approx([-6.02, -6.02], abs=0.01)


def test_every_circuit_says_where_its_equation_comes_from():
    for name, circuit in CIRCUITS.items():
        assert circuit.equation, name
        assert circuit.textbook is None or circuit.formulas.startswith("f0"), name
