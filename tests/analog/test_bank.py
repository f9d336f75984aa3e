"""Banks: the cascade against the direct sum of the bands, and against the textbook's band-pass."""

import numpy as np
import pytest

from a2d.analog.bank import Bank, cascade_of
from a2d.analog.build import build_chain
from a2d.analog.response import chain_response
from a2d.analog.sections import Sections
from a2d.design.read import parse_design
from a2d.errors import DesignError

F = np.geomspace(0.5, 2e5, 1500)
OCTAVES = 31.25 * 2.0 ** np.arange(10)


def bandpass(f0, q):
    """H = (s/(w0 Q))/(s²/w0² + s/(w0 Q) + 1): peak 1 at f0."""
    w = 2 * np.pi * f0
    return Sections(np.array([[0, 1 / (q * w), 0]]), np.array([[1 / w**2, 1 / (q * w), 1]]), np.array([f0]))


def direct_sum(f0, q, mix, direct):
    """The sum written out, of nothing but complex arithmetic."""
    x = 1j * (F[:, None] / f0 - f0 / F[:, None])
    return direct + (mix / (1 + q * x)).sum(axis=-1)


def bank(mix, direct, q=1.4, f0=OCTAVES):
    return Bank(tuple(f"b{i}" for i in range(len(f0))), tuple(bandpass(f, q) for f in f0), np.array(mix, float), direct)


MIXES = {
    "room": (np.array([1.5, -0.3, 0.8, 0.0, -0.6, 1.1, 0.4, -0.5, 0.9, 2.0]), 1.0),
    "all up": (np.full(10, 3.0), 1.0),
    "all down": (np.full(10, -0.7), 1.0),
    "no direct path": (np.array([1.5, 0.3, 0.8, 1.0, 0.6, 1.1, 0.4, 0.5, 0.9, 2.0]), 0.0),
    "alternating": (np.array([1.0, -1.0] * 5), 0.0),
    "inverting": (np.full(10, -1.0), -0.5),
}


@pytest.mark.parametrize("name", MIXES)
@pytest.mark.parametrize("q", [0.7, 1.4, 4.3])
def test_cascade_is_the_direct_sum(name, q):
    mix, direct = MIXES[name]
    b, a, _ = cascade_of(bank(mix, direct, q))
    expected = direct_sum(OCTAVES, q, mix, direct)
    scale = np.maximum(np.abs(expected), 1e-3)  # where the bands nearly cancel: of the larger terms
    assert np.max(np.abs(chain_response(b, a, F) - expected) / scale) < 1e-9
    assert len(b) <= 10


def test_bank_response_is_the_direct_sum():
    mix, direct = MIXES["room"]
    assert bank(mix, direct).response(F) == pytest.approx(direct_sum(OCTAVES, 1.4, mix, direct), rel=1e-12)


def test_asymptotes_and_phase_of_an_inverting_band():
    """Slopes of 20 dB a decade that cross at H0/Q; phase -90, -180, -270 (any textbook's band-pass)."""
    q, h0, f0 = 5.0, 4.0, 1000.0
    b, a, _ = cascade_of(bank([-h0], 0.0, q, [f0]))
    f = np.array([f0 / 1e4, f0 / 1e3, f0, f0 * 1e3, f0 * 1e4])
    h = chain_response(b, a, f)
    level = 20 * np.log10(np.abs(h))
    assert level[1] - level[0] == pytest.approx(20.0, abs=1e-3)
    assert level[4] - level[3] == pytest.approx(-20.0, abs=1e-3)
    crossing = 20 * np.log10(h0 / q)
    assert level[0] + 80 == pytest.approx(crossing, abs=1e-3)  # four decades up the slope, at f0
    assert level[4] + 80 == pytest.approx(crossing, abs=1e-3)
    assert level[2] == pytest.approx(20 * np.log10(h0), abs=1e-9)
    phase = np.degrees(np.unwrap(np.angle(h)))
    assert phase - phase[2] == pytest.approx([90, 90, 0, -90, -90], abs=0.02)
    assert abs(phase[2]) == pytest.approx(180.0, abs=1e-9)


def test_equal_bands_fall_together():
    """Two bands alike are one with twice the weight: a pole pair of the sum has a zero pair upon it."""
    b, a, _ = cascade_of(bank([1.0, 1.0], 0.0, 1.4, [500.0, 500.0]))
    assert len(b) == 1
    assert chain_response(b, a, F) == pytest.approx(direct_sum(np.array([500.0]), 1.4, np.array([2.0]), 0.0), rel=1e-9)


HEAD = '[design]\nname = "demo"\nsample_rates = ["48 kHz"]\n[[section]]\nname = "room"\n'
BAND = '[[section.band]]\nname = "{}"\nkind = "bandpass"\nf0 = {}\nq = 1.4\n'


def test_bands_by_parameters_and_by_circuit_in_a_design_file():
    circuit = (
        '[[section.band]]\nname = "b1k"\nmix = "-6 dB"\ncircuit = "multiple_feedback_bandpass"\n'
        'parts = { R1 = "8k2", R2 = "1k5", R3 = "82k", C1 = "15n", C2 = "15n" }\n'
    )
    chain = build_chain(parse_design(HEAD + "direct = 1\n" + BAND.format("b63", 63) + 'mix = "3 dB"\n' + circuit))
    assert chain.names == ("room.1", "room.2")
    rp = 8.2e3 * 1.5e3 / 9.7e3
    s = 2j * np.pi * F
    mfb = -(s * 15e-9 * 82e3 * rp / 8.2e3) / (1 + s * rp * 30e-9 + s**2 * rp * 82e3 * 15e-9**2)
    expected = direct_sum(np.array([63.0]), 1.4, np.array([10 ** (3 / 20)]), 1.0) + 10 ** (-6 / 20) * mfb
    assert chain.response(F) == pytest.approx(expected, rel=1e-9)


@pytest.mark.parametrize(
    ("text", "message"),
    [
        (BAND.format("a", 63) + 'mix = "3 kHz"\n', r"expected a number or a level in dB.*band .a.\.mix"),
        (BAND.format("a", 63) + BAND.format("a", 80), 'two bands are called "a"'),
        (BAND.format("a", 63) + 'match = "70 Hz"\n', 'match or method of band "a" has no meaning in a cascade'),
        ('[[section.band]]\nname = "a"\ncircuit = "mfb"\n', "there is no circuit 'mfb'"),
        ('[[section.band]]\nname = "a"\nband = []\n', "a band is not itself a bank"),
        (BAND.format("a", 63).replace("bandpass", "bandpas"), 'no kind .bandpas.; nearest is "bandpass"'),
    ],
)
def test_faults(text, message):
    with pytest.raises(DesignError, match=message):
        parse_design(HEAD + text)


def test_a_circuit_with_a_part_too_many_is_told_the_right_ones():
    text = HEAD.replace("room", "body") + 'circuit = "rc_lowpass"\nparts = { R1 = "1k", C2 = "1n" }\n'
    with pytest.raises(DesignError, match=r'there is no "C2" here \(allowed: R1, C1\)') as caught:
        parse_design(text)
    assert "C1 is missing" in str(caught.value)


def test_a_band_without_weight_is_told_of():
    solution = cascade_of(bank([1.0, 0.0], 1.0, 1.4, [100.0, 1000.0]))
    assert len(solution.b) == 1
    assert solution.notes == ("a pole and a zero cancel at 1000 Hz (a pair)",)


def test_a_fault_in_a_band_names_it():
    text = (
        HEAD + '[[section.band]]\nname = "b1"\n[section.band.network]\ninput = "in"\noutput = "out"\n'
        '[section.band.network.parts]\nR1 = { resistor = "1k", nodes = ["in", "x"] }\n'
        'R2 = { resistor = "1k", nodes = ["in", "out"] }\n'
    )
    with pytest.raises(DesignError, match=r'band "b1": node "x" has one connection only .* @ section "room"'):
        build_chain(parse_design(text))


def test_source_load_and_op_amps_of_a_ready_circuit():
    text = HEAD + 'circuit = "rc_lowpass"\nparts = { R1 = "1k", C1 = "1n" }\nsource = "1k"\nload = "2k"\n'
    chain = build_chain(parse_design(text))
    assert np.abs(chain.response([1.0])) == pytest.approx([0.5], rel=1e-9)
