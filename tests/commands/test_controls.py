"""`a2d controls` and `a2d spread`, end to end, and `a2d convert` of a design with controls."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest
import soundfile

from a2d.cli import main
from tests.support.controls import HEAD, PRESENCE, TONE, control

SPREAD = """
[spread]
resistors = "1 %"
capacitors = "5 %"
units = 200
[spread.measured]
"tone.C1" = "23.1n"
"""


@pytest.fixture
def design(tmp_path: Path) -> Path:
    path = tmp_path / "cove.toml"
    limits = '[limits]\nmagnitude = "0.2 dB"\n'
    path.write_text(
        HEAD + limits + PRESENCE + TONE + control("lift", "presence.gain", 12, -12, "positions = 5") + SPREAD
    )
    return path


def test_controls_shows_the_worst_position_clicks_and_advice(
    design: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    out = tmp_path / "out"
    arguments = ["controls", str(design), "--out", str(out), "--plots", "--wav", "--level", "-20 dB"]
    assert main(arguments) == 1
    text = capsys.readouterr().out
    assert "limit broken at 48000 Hz with lift at" in text
    assert "transposed direct form II" in text
    assert "never clear the state" in text
    assert "Caution: test signals can damage hearing" in text
    names = {path.name for path in out.iterdir()}
    pictures = {f"cove.lift.{p}.{x}" for p in ("family", "error_map") for x in ("svg", "png")}
    assert names == pictures | {"cove.lift.moving.wav"}
    samples, rate = soundfile.read(out / "cove.lift.moving.wav")
    assert (rate, len(samples)) == (48000, 96000)
    # 100 Hz lies below the bell: the level stays near that of the tone at either end of the travel.
    assert np.max(np.abs(samples)) == pytest.approx(0.1, rel=0.1)


def test_convert_judges_every_position(design: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["convert", str(design), "--out", str(tmp_path / "out")]) == 1
    shown = capsys.readouterr()
    assert "Controls: twin minus analog at every position" in shown.out
    assert "limit broken at 48000 Hz with lift at" in shown.err
    assert (tmp_path / "out" / "cove_controls.h").exists()


def test_spread_says_whether_the_error_matters(
    design: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    out = tmp_path / "out"
    arguments = ["spread", str(design), "--out", str(out), "--plots", "--units", "300", "--seed", "9"]
    assert main(arguments) == 0
    text = " ".join(capsys.readouterr().out.split())
    assert "300 units, seed 9." in text
    assert "90 % of units differ from nominal by up to" in text
    assert "The measured unit differs from nominal by up to" in text
    data = json.loads((out / "cove.spread.json").read_text())
    assert data["units"] == 300
    assert data["sensitivities"][0]["part"] in ("tone.C1", "tone.C2")
    assert len(data["frequencies_hz"]) == len(data["percentiles"]["95"]) == 500
    assert {path.name for path in out.iterdir()} == {"cove.spread.json"} | {
        f"cove.{p}.{x}" for p in ("spread", "sensitivity") for x in ("svg", "png")
    }


def test_convert_takes_the_measured_unit(design: Path, tmp_path: Path) -> None:
    for name, more in (("nominal", []), ("measured", ["--measured"])):
        main(["convert", str(design), "--out", str(tmp_path / name), *more])
    nominal, measured = (json.loads((tmp_path / n / "cove.twin.json").read_text()) for n in ("nominal", "measured"))
    rows = [np.array([s["b"] for s in m["analog"]["sections"]]) for m in (nominal, measured)]
    np.testing.assert_array_equal(rows[0][0], rows[1][0])
    assert np.any(rows[0][1:] != rows[1][1:])


def test_what_is_missing_is_said(design: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    plain = tmp_path / "plain.toml"
    plain.write_text(HEAD + PRESENCE)
    assert main(["controls", str(plain)]) == 2
    assert "no [[control]]" in capsys.readouterr().err
    assert main(["spread", str(plain)]) == 2
    assert "no part varies" in capsys.readouterr().err
    assert main(["convert", str(plain), "--out", str(tmp_path / "o"), "--measured"]) == 2
    assert "no measured values" in capsys.readouterr().err
