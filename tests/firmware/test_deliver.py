"""From a design to its firmware files, and back to the design through the header."""

from __future__ import annotations

import numpy as np
import pytest

from a2d.analog.build import build_chain
from a2d.design.read import parse_design
from a2d.digital.twin import default_band_hz, make_twin
from a2d.errors import DesignError, RoundingError
from a2d.firmware.deliver import Delivery, deliver
from a2d.firmware.read_header import read_header

DESIGN = """
[design]
name = "cove_eq"
title = "Cove desk"
sample_rates = ["48 kHz", "96 kHz"]
[limits]
magnitude = "1 dB"
[[section]]
name = "body"
kind = "peaking"
f0 = "120 Hz"
q = 1.1
gain = "-6 dB"
[[section]]
name = "presence"
kind = "peaking"
f0 = "3k2"
q = 1.4
gain = "4.5 dB"
"""


def delivered(firmware: str = "", text: str = DESIGN) -> Delivery:
    design = parse_design(text + firmware)
    chain = build_chain(design)
    twins = tuple(make_twin(chain, rate) for rate in design.design.sample_rates)
    bands = tuple(tuple(default_band_hz(t.sample_rate_hz).tolist()) for t in twins)
    return deliver(design, "ab" * 32, chain, twins, bands)


def test_float32_header_holds_the_twins() -> None:
    made = delivered()
    header = read_header(made.files["cove_eq.h"])
    assert header == made.header
    assert header.section_names == ("body", "presence")
    assert header.f0_hz == pytest.approx((120.0, 3200.0), rel=1e-12)
    for table, twin, comparison in zip(header.tables, made.twins, made.comparisons, strict=True):
        np.testing.assert_array_equal(np.array(table.values), twin.sos[:, [0, 1, 2, 4, 5]])
        assert table.proof[0].worst == comparison.magnitude_db.worst
    assert made.breaches == ((), ())


def test_the_terminal_lines_say_what_rounding_did() -> None:
    line = delivered("[firmware]\nnumber = { bits = 32 }\nsection_order = 'as_designed'\n").lines[0]
    assert "32-bit words, 31 fraction bits, direct form I, shift 1: 1 fraction bits lost" in line
    assert "rounding moves the level by at most" in line
    assert "margin to the unit circle" in line


def test_a_wide_deviation_is_flagged() -> None:
    slow = DESIGN.replace('"120 Hz"', '"20 Hz"').replace("q = 1.1", "q = 4").replace('"-6 dB"', '"12 dB"')
    made = delivered("[firmware]\nrounding = 'nearest'\n", slow.replace("96 kHz", "192 kHz"))
    assert any("5.1 dB at 192000 Hz" in warning for warning in made.warnings)
    with pytest.raises(RoundingError, match='section "body" is unstable'):
        delivered("[firmware]\nnumber = { bits = 16, fraction = 14 }\n", slow)


@pytest.mark.parametrize(
    ("firmware", "message"),
    [
        ("number = 'flot32'", 'nearest is "float32"'),
        ("number = { bits = 40 }", "bits must lie from 8 to 32"),
        ("number = { bits = 16, fraction = 16 }", "fraction must lie from 0 to 15"),
        ("number = { bits = 32 }\nsample = { bits = 32 }", "overflow the accumulator"),
        ("order = ['b0', 'b0', 'b1', 'a1', 'a2']", "order has a name twice"),
        ("error_feedback = 1", "are for fixed-point numbers"),
        ("number = { bits = 16 }\nstructure = 'delta'\nerror_feedback = 1", "error_feedback is for direct_form_1"),
    ],
)
def test_faults_in_the_table(firmware: str, message: str) -> None:
    with pytest.raises(DesignError, match=message):
        parse_design(DESIGN + "[firmware]\n" + firmware)
