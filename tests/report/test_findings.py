"""Rounding, headroom and sound on the report, against scipy."""

from __future__ import annotations

import io

import msgspec
import numpy as np
import pytest
import soundfile
from scipy import signal

from a2d.commands.delivery import delivery_of
from a2d.conversion import convert
from a2d.design.read import parse_design
from a2d.design.spread import Spread
from a2d.report.examples import LEVEL_DBFS, SECONDS, examples
from a2d.report.findings import control, headroom, rounding
from a2d.report.spread_finding import spread_finding
from a2d.report.text import error_text
from tests.report.test_report_page import DESIGN, LIMITS, conversion


def level(cell: str) -> float:
    return float(cell.removesuffix(" dB").replace("−", "-"))


def test_headroom_against_scipy() -> None:
    delivery = delivery_of(conversion(), "00")
    rows = headroom(delivery).rows
    assert [row[0] for row in rows] == ["presence", "air", "hum", "anywhere, any signal"]
    f = np.linspace(0.0, np.pi, 200_001)
    for column, twin in enumerate(delivery.twins, 1):
        sums = []
        for count in range(1, 4):
            _, h = signal.sosfreqz(twin.sos[:count], f)
            # Two places are shown; the even grid finds a peak to far better than half of the last.
            assert level(rows[count - 1][column]) == pytest.approx(20.0 * np.log10(np.abs(h).max()), abs=6e-3)
            unit = np.zeros(200_000)
            unit[0] = 1.0
            sums.append(np.sum(np.abs(signal.sosfilt(twin.sos[:count], unit))))
        assert level(rows[3][column]) == pytest.approx(20.0 * np.log10(max(sums)), abs=6e-3)


def test_rounding_states_each_rate_and_the_verdict() -> None:
    without_notch = DESIGN.rpartition("[[section]]")[0].format(title="Quay", section="presence", limits=LIMITS)
    delivery = delivery_of(convert(parse_design(without_notch)), "00")
    table = rounding(delivery, limits_stated=True)
    assert table.passed is False
    assert [row[0] for row in table.rows] == ["48 kHz", "96 kHz"]
    assert "allowed 1 dB either way" in table.rows[0][-1]
    assert table.rows[1][-1] == "kept"
    assert "float32" in table.lines[0]
    assert rounding(delivery, limits_stated=False).passed is None


def test_sound_is_what_the_twin_makes_of_the_input() -> None:
    made = conversion()
    recordings = examples(made)
    assert len(recordings) == 3
    sound = [soundfile.read(io.BytesIO(recording.audio)) for recording in recordings]
    assert {rate for _, rate in sound} == {48_000}
    given, analog, twin = (samples for samples, _ in sound)
    assert len(given) == round(SECONDS * 48_000)
    rms_dbfs = 10.0 * np.log10(2.0 * np.mean(given**2))  # a full-scale sine has a mean square of 1/2
    assert rms_dbfs == pytest.approx(LEVEL_DBFS, abs=0.1)  # the faded ends take a little
    # Dither and rounding of both files: at most 1.5 steps each, the input's times the sections' largest Σ|h| of 4.
    step = 2.0**-15
    assert np.abs(signal.sosfilt(made.judged[0].twin.sos, given) - twin).max() < 1.5 * step * 5.0
    assert 0.01 < np.sqrt(np.mean((analog - twin) ** 2)) / np.sqrt(np.mean(twin**2)) < 0.5


CONTROL = """
[[control]]
name = "lift"
moves = ["presence.gain"]
from = "-6 dB"
to = "6 dB"
positions = 5
"""


def test_controls_state_the_worst_position() -> None:
    text = DESIGN.rpartition("[[section]]")[0].format(
        title="Quay", section="presence", limits='[limits]\nmagnitude = "1 dB"'
    )
    made = convert(parse_design(text + CONTROL))
    table = control(made.controls[0], limits_stated=True)
    assert table.title == "Control: lift"
    assert table.passed is False
    assert [row[0] for row in table.rows] == ["48 kHz", "96 kHz"]
    # The 16 kHz bell stands still: with the other bell flat the error is its own; the loop finds the worst of five.
    worst = []
    for gain in (-6.0, -3.0, 0.0, 3.0, 6.0):
        at = convert(parse_design(text.replace("4.5 dB", f"{gain} dB")))
        worst.append(at.judged[0].comparison.magnitude_db)
    largest = max(worst, key=lambda w: abs(w.worst))
    assert table.rows[0][1] == error_text(largest.worst, "dB", largest.at_hz)
    assert table.rows[0][4] == "5 of 5 positions over"


NETWORK = """
[design]
name = "jetty"
sample_rates = ["48 kHz"]
[[section]]
name = "rc"
[section.network]
input = "in"
output = "out"
[section.network.parts]
R1 = { resistor = "10k", nodes = ["in", "out"], tolerance = "1 %" }
C1 = { capacitor = "3n3", nodes = ["out", "gnd"], tolerance = "5 %" }
"""


def test_spread_of_an_rc_by_hand() -> None:
    found, reason = spread_finding(convert(parse_design(NETWORK)))
    assert found is not None
    assert reason == ""
    # R and C move the corner alike: d|H|/dB for +1 % is -20·lg|(1 + j·1.01·x)/(1 + jx)|, largest at the band's end.
    x = 2.0 * np.pi * 20_000.0 * 10e3 * 3.3e-9
    per_percent = -20.0 * np.log10(np.abs((1.0 + 1.01j * x) / (1.0 + 1j * x)))
    assert [row[0] for row in found.rows] == ["rc.C1", "rc.R1"]
    for row in found.rows:
        value, _, place = row[2].partition(" at ")
        assert level(value) == pytest.approx(per_percent, rel=0.01)  # a derivative against a step of 1 %
        assert place == "20 kHz"
    assert "1000 units" in found.text


def test_no_tolerances_no_spread() -> None:
    plain = parse_design(NETWORK.replace(', tolerance = "1 %"', "").replace(', tolerance = "5 %"', ""))
    assert spread_finding(convert(plain)) == (None, "")
    asked = msgspec.structs.replace(plain, spread=Spread())
    assert spread_finding(convert(asked))[1].startswith("No spread: no part varies")
