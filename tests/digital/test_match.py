"""Match points of sections that were found from circuits."""

import json

import numpy as np
import pytest

from a2d.conversion import convert
from a2d.design.read import parse_design
from a2d.digital.match import match_points


def test_only_found_frequencies_above_the_band_move():
    f0 = np.array([100.0, 30e3, 30e3, 30e3, 21e3])
    got = match_points(f0, [None, None, 5e3, None, None], [True, True, True, False, True], (20.0, 20e3))
    assert list(got) == [100.0, 20e3, 5e3, 30e3, 20e3]


DESIGN = """
[design]
name = "stage"
sample_rates = ["48 kHz", "192 kHz"]
[[section]]
name = "output"
[section.network]
input = "in"
output = "out"
[section.network.parts]
R1 = { resistor = "10k", nodes = ["in", "m"] }
R2 = { resistor = "10k", nodes = ["m", "out"] }
C1 = { capacitor = "47p", nodes = ["m", "out"] }
U1 = { opamp = "ideal", nodes = { plus = "gnd", minus = "m", out = "out" } }
"""


def test_a_small_capacitor_across_a_feedback_resistor():
    """47 pF and 10 kΩ: 338.6 kHz, above half of either rate. The twin is exact at 20 kHz, and says so."""
    conversion = convert(parse_design(DESIGN))
    for judged in conversion.judged:
        assert judged.twin.match_hz == pytest.approx([20e3])
        at_match = judged.twin.response([20e3]) / conversion.chain.response([20e3])
        assert at_match == pytest.approx([1.0], rel=1e-9)
        # |H| there is -0.0151 dB, and neither leaves what lies between that and 0 dB
        assert abs(judged.comparison.magnitude_db.worst) < 0.0151


def test_the_output_says_so(capsys, tmp_path):
    from a2d.cli import main

    path = tmp_path / "stage.toml"
    path.write_text(DESIGN)
    assert main(["convert", str(path), "--out", str(tmp_path / "out")]) == 0
    text = " ".join(capsys.readouterr().out.split())
    assert "at 48 kHz exact at the band's upper end, 20 kHz, for an f0 above the band: output (338.63 kHz)" in text
    assert "output 338.63 kHz first order +0.00 dB -3.01 dB none" in text
    assert "output: op-amps of 3 MHz in place of ideal ones (would change): " in text


def test_a_stated_match_is_kept_and_one_that_cannot_be_is_an_error():
    stated = DESIGN.replace('name = "output"', 'name = "output"\nmatch = "12 kHz"')
    assert convert(parse_design(stated)).judged[0].twin.match_hz == pytest.approx([12e3])


def test_a_method_that_is_exact_nowhere_claims_no_match_frequency(capsys, tmp_path):
    from a2d.cli import main

    path = tmp_path / "stage.toml"
    path.write_text(DESIGN.replace("[[section]]", 'method = "minimax"\n[[section]]', 1))
    assert main(["convert", str(path), "--out", str(tmp_path)]) == 0
    assert "exact at the band's upper end" not in " ".join(capsys.readouterr().out.split())
    name = next(tmp_path.glob("*.twin.json")).name.removesuffix(".twin.json")
    twins = json.loads((tmp_path / f"{name}.twin.json").read_text())["twins"]
    assert [section["exact_at_match"] for twin in twins for section in twin["sections"]] == [False, False]
    assert ",minimax,," in (tmp_path / f"{name}.sos.csv").read_text()
    assert "f0 338627" in (tmp_path / f"{name}.h").read_text()


def test_a_match_that_has_no_effect_is_said(capsys, tmp_path):
    from a2d.cli import main

    path = tmp_path / "stage.toml"
    stated = DESIGN.replace('name = "output"', 'name = "output"\nmatch = "12 kHz"\nmethod = "minimax"')
    for text, said in ((stated, True), (stated.replace("minimax", "magnitude_matched"), False)):
        path.write_text(text)
        assert main(["convert", str(path), "--out", str(tmp_path)]) == 0
        told = "output: match has no effect at 48 kHz, 192 kHz" in " ".join(capsys.readouterr().out.split())
        assert told is said
