"""Scope, extra sections, auto, masks and advice through a design file and `a2d convert`."""

import json

import pytest

from a2d.cli import main
from a2d.conversion import convert
from a2d.design.read import parse_design
from a2d.errors import DesignError

DESK = """
[design]
name = "quay_eq"
sample_rates = ["48 kHz"]
{design}
{limits}
[[section]]
name = "body"
kind = "peaking"
f0 = "120 Hz"
q = 0.8
gain = "5 dB"
[[section]]
name = "air"
kind = "peaking"
f0 = "13 kHz"
q = 1.1
gain = "9 dB"
"""


def design(extra="", limits=""):
    return parse_design(DESK.format(design=extra, limits=limits))


def test_scope_chain_and_extra_sections():
    alone = convert(design('method = "minimax"')).judged[0]
    together = convert(design('method = "minimax"\nscope = "chain"\nextra_sections = 1')).judged[0]
    assert len(alone.twin) == 2 == len(alone.proofs)
    assert together.twin.names == ("body", "air", "added.1")
    assert abs(together.comparison.magnitude_db.worst) < 0.05 * abs(alone.comparison.magnitude_db.worst)
    assert together.sections == () == together.proofs


def test_auto_says_which_and_why(tmp_path, capsys):
    file = tmp_path / "quay.toml"
    file.write_text(DESK.format(design='method = "auto"', limits='[limits]\nmagnitude = "0.1 dB"'), encoding="utf-8")
    assert main(["convert", str(file), "--out", str(tmp_path / "out")]) == 0
    found = json.loads((tmp_path / "out" / "quay_eq.twin.json").read_text(encoding="utf-8"))
    sections = found["twins"][0]["sections"]
    assert [s["method"] for s in sections] == ["bilinear", "minimax"]
    assert "bilinear" in sections[1]["why"]
    assert "minimax" in sections[1]["why"]
    assert sections[1]["certificate"]["alternations"] >= sections[1]["certificate"]["alternations_needed"] == 6
    assert "simplest" in capsys.readouterr().out


def test_a_broken_limit_is_answered_with_what_keeps_it(tmp_path, capsys):
    file = tmp_path / "quay.toml"
    file.write_text(DESK.format(design="", limits='[limits]\nmagnitude = "0.1 dB"'), encoding="utf-8")
    assert main(["convert", str(file), "--out", str(tmp_path / "out")]) == 1
    errors = capsys.readouterr().err
    assert 'method = "minimax" would keep it: magnitude error' in errors
    [advice] = [
        a for a in convert(design(limits='[limits]\nmagnitude = "0.1 dB"')).judged[0].advice if "minimax" in a.change
    ]
    measured = convert(design('method = "minimax"')).judged[0].comparison.magnitude_db
    assert advice.comparison.magnitude_db == measured


def test_advice_goes_on_to_scope_and_sections_and_says_when_nothing_serves():
    fine = convert(design('method = "minimax"', '[limits]\nmagnitude = "0.001 dB"')).judged[0]
    assert fine.breaches
    assert any("scope" in remedy.change and not remedy.breaches for remedy in fine.advice)
    hopeless = convert(design('method = "minimax"', '[limits]\nmagnitude = "0.0000001 dB"')).judged[0]
    [nearest] = hopeless.advice
    assert nearest.breaches
    assert "comes nearer" in str(nearest)


def test_a_broken_phase_limit_is_answered_with_a_phase_weight_or_nothing(tmp_path, capsys):
    phase = convert(design('method = "minimax"', '[limits]\nphase = "12 deg"')).judged[0]
    remedy = phase.advice[0]
    assert "weight_phase" in remedy.change
    assert remedy.breaches == ()
    assert abs(remedy.comparison.phase_deg.worst) <= 12.0
    file = tmp_path / "quay.toml"
    file.write_text(DESK.format(design="", limits='[limits]\nphase = "0.001 deg"'), encoding="utf-8")
    assert main(["convert", str(file), "--out", str(tmp_path / "out")]) == 1
    found = capsys.readouterr().err
    assert "comes nearer" in found


def test_fewest_sections_keep_the_limit():
    judged = convert(design('method = "minimax"\nscope = "fewest"', '[limits]\nmagnitude = "0.5 dB"')).judged[0]
    assert judged.breaches == ()
    assert len(judged.twin) <= 2


def test_a_table_is_judged():
    table = '[limits]\ntable = [["20 Hz", "-0.5 dB", "0.5 dB"], ["20 kHz", "-0.5 dB", "0.5 dB"]]'
    assert convert(design(limits=table)).judged[0].breaches
    assert convert(design('method = "minimax"', table)).judged[0].breaches == ()


@pytest.mark.parametrize(
    ("extra", "limits", "message"),
    [
        ('scope = "chain"', "", 'scope = "chain" needs method = "minimax"'),
        ("extra_sections = 1", "", 'extra_sections needs scope = "chain"'),
        ("weight_phase = 1.0", "", "weight_phase is not used"),
        ('method = "minimax"\nscope = "fewest"', "", "needs a limit of magnitude"),
        ('method = "minimax"\nextra_sections = 9\nscope = "chain"', "", "allowed 0 to 8"),
        ("", '[limits]\nmask = "fractional_octave_class_1"', "midband is missing"),
        ("", '[limits]\nmask = "disc_replay"', "takes it as its tolerance"),
        ("", "[limits]\nbandwidth = 3", "belong to the fractional_octave masks"),
        ("", '[limits]\ntable = [["20 Hz", "-1 dB", "1 dB"]]', "two rows or more"),
        ("", '[limits]\ntable = [["20 Hz", "1 dB", "-1 dB"], ["30 Hz", "0 dB", "0 dB"]]', "lower not above the upper"),
        ("", '[limits]\nmask = "a_weighting"', "a_weighting_class_2"),
    ],
)
def test_what_makes_no_sense_is_a_fault_of_the_file(extra, limits, message):
    with pytest.raises(DesignError, match=message):
        design(extra, limits)
