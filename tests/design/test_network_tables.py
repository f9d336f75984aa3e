"""Networks in a design file: what may stand there, and the faults that are told with their place."""

import numpy as np
import pytest

from a2d.analog.build import build_chain
from a2d.design.read import parse_design
from a2d.errors import DesignError

HEAD = '[design]\nname = "demo"\nsample_rates = ["48 kHz"]\n[[section]]\nname = "tone"\n[section.network]\n'
ENDS = 'input = "in"\noutput = "out"\n[section.network.parts]\n'
RC = 'R1 = { resistor = "10k", nodes = ["in", "out"] }\nC1 = { capacitor = "15n9", nodes = ["out", "gnd"] }\n'


def test_a_network_becomes_a_section():
    chain = build_chain(parse_design(HEAD + ENDS + RC))
    assert chain.names == ("tone",)
    assert chain.f0_hz == pytest.approx([1 / (2 * np.pi * 1e4 * 15.9e-9)])


def test_every_sort_of_part_is_read():
    parts = RC + "\n".join(
        [
            'P1 = { potentiometer = "10k", nodes = ["in", "w", "gnd"], position = 0.2, '
            'taper = "logarithmic", mid = "15 %" }',
            'L1 = { inductor = "13 mH", resistance = "4.5", parallel_capacitance = "30p", nodes = ["w", "gnd"] }',
            'U1 = { opamp = { gain_bandwidth = "3 MHz", dc_gain = "100 dB" }, '
            'nodes = { plus = "w", minus = "u", out = "u" } }',
            'U2 = { opamp = "ideal", nodes = { plus = "w", minus = "v", out = "v" } }',
            'S1 = { switch = "closed", nodes = ["u", "x"], resistance = "0.1" }',
            'E1 = { voltage_gain = -2, nodes = { plus = "x", out = "y" } }',
            'G1 = { transconductance = "1 mS", nodes = { plus = "y", out = "z" } }',
            'R2 = { resistor = "1k", nodes = ["z", "gnd"] }',
            'T1 = { transformer = 4, nodes = ["z", "gnd", "s", "gnd"] }',
            'C2 = { capacitor = "1u", series_resistance = "0.5", leakage_resistance = "10M", nodes = ["s", "gnd"] }',
        ]
    )
    (section,) = parse_design(HEAD + ENDS + parts).sections
    assert len(section.network.parts) == 12
    assert section.network.parts["L1"].resistance == 4.5
    assert len(build_chain(parse_design(HEAD + ENDS + parts))) >= 1


def test_source_and_load_stand_at_the_ends():
    ends = 'input = { node = "in", source = "1k" }\noutput = { node = "out", load = "1k" }\n[section.network.parts]\n'
    chain = build_chain(parse_design(HEAD + ends + 'C1 = { capacitor = "1u", nodes = ["out", "in"] }\n'))
    assert np.abs(chain.response([1e6])) == pytest.approx([0.5], rel=1e-6)


@pytest.mark.parametrize(
    ("parts", "message"),
    [
        ('R1 = { resister = "1k", nodes = ["in", "out"] }', r'no part "resister"; nearest is "resistor"'),
        ('R1 = { resistor = "10 nF", nodes = ["in", "out"] }', r"has .nF. after the number .*parts\.R1\.resistor"),
        ('R1 = { resistor = "1k", nodes = ["in"] }', r"has 1 values \(allowed 2\)"),
        ('R1 = { resistor = "0", nodes = ["in", "out"] }', r"out of range \('0', allowed above 0"),
        (
            'R1 = { resistor = "1k", capacitor = "1n", nodes = ["in", "out"] }',
            "exactly one of: .*resistor and capacitor",
        ),
        ('P1 = { potentiometer = "1k", nodes = ["a", "b", "c"], position = 1.5 }', r"position"),
        (
            'P1 = { potentiometer = "1k", nodes = ["a", "b", "c"], position = 1, mid = 0.1 }',
            'mid, .* no meaning for taper = "linear"',
        ),
        (
            'P1 = { potentiometer = "1k", nodes = ["a", "b", "c"], position = 1, taper = "logarithmic" }',
            "mid, .* is missing",
        ),
        (
            'P1 = { potentiometer = "1k", nodes = ["a", "b", "c"], position = 1, taper = "logarithmic", mid = 0.7 }',
            r"mid is out of range \(0.7, allowed between 0 and 0.5",
        ),
        (
            'P1 = { potentiometer = "1k", nodes = ["a", "b", "c"], position = 1, taper = "table", '
            "table = [[0, 0], [1, 0.5]] }",
            r"table must rise from \[0, 0\] to \[1, 1\]",
        ),
        ('T1 = { transformer = 0, nodes = ["a", "b", "c", "d"] }', "ratio of turns, is zero"),
        ('S1 = { switch = "ajar", nodes = ["a", "b"] }', "no 'ajar'"),
    ],
)
def test_faults_name_their_place(parts, message):
    with pytest.raises(DesignError, match=message) as caught:
        parse_design(HEAD + ENDS + RC.replace("R1", "R9") + parts, "tone.toml")
    assert 'tone.toml: section "tone".network.parts.' in str(caught.value)


def test_names_and_number_of_parts():
    with pytest.raises(DesignError, match=r"'R 1' cannot name a part"):
        parse_design(HEAD + ENDS + RC.replace("R1", '"R 1"'))
    many = "".join(f'R{i} = {{ resistor = "1k", nodes = ["in", "out"] }}\n' for i in range(301))
    with pytest.raises(DesignError, match=r"parts has 301 parts \(allowed 1 to 300\)"):
        parse_design(HEAD + ENDS + many)


def test_faults_of_the_drawing_name_the_section():
    with pytest.raises(DesignError, match=r'node "x" has one connection only .* @ section "tone"'):
        build_chain(parse_design(HEAD + ENDS + RC + 'R2 = { resistor = "1k", nodes = ["out", "x"] }'))
