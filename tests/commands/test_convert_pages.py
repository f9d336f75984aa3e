"""What `a2d convert` writes for people: plots, the report, the blind comparison."""

from __future__ import annotations

import base64
import re
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest
import soundfile

from a2d.cli import main

ROOT = Path(__file__).parents[2]
DESIGN = """
[design]
name = "quay"
title = "Quay strip <b>& sons</b>"
sample_rates = ["48 kHz", "96 kHz"]

[limits]
magnitude = "0.5 dB"

[[section]]
name = "presence <i>"
kind = "peaking"
f0 = "3k2"
q = 1.4
gain = "4.5 dB"

[[section]]
name = "air"
kind = "peaking"
f0 = "16 kHz"
q = 1
gain = "6 dB"
"""


@pytest.fixture
def design(tmp_path: Path) -> Path:
    place = tmp_path / "quay.toml"
    place.write_text(DESIGN)
    return place


def test_plots_are_written(design: Path, tmp_path: Path) -> None:
    assert main(["convert", str(design), "--out", str(tmp_path / "out"), "--plots"]) == 1  # the limit is broken
    written = {path.suffix for path in (tmp_path / "out").glob("quay.*.*")}
    assert {".svg", ".png"} <= written
    assert len(list((tmp_path / "out").glob("quay.*.svg"))) == 5


def test_report_is_written(design: Path, tmp_path: Path) -> None:
    assert main(["convert", str(design), "--out", str(tmp_path / "out"), "--report"]) == 1
    page = (tmp_path / "out" / "quay.report.html").read_text(encoding="utf-8")
    assert page.startswith("<!doctype html>")
    assert "<strong>Fail.</strong> Over the stated limits at 48 kHz and 96 kHz." in page

    for heading in ("After rounding", "Headroom", "Listen"):
        assert f">{heading}</h2>" in page
    assert page.count("<audio ") == 3


def test_blind_page_of_a_rendering(design: Path, tmp_path: Path) -> None:
    out, song = tmp_path / "out", tmp_path / "song.analog.wav"
    soundfile.write(song, 0.1 * np.sin(np.arange(48_000) / 7.0), 48_000)
    assert main(["render", str(design), str(song), "--out", str(out), "--match-level", "--blind"]) == 0
    page = (out / "quay.song.analog.blind.html").read_text()
    inside = [base64.b64decode(part) for part in re.findall(r'<script type="text/plain"[^>]*>([^<]*)</script>', page)]
    files = [out / f"quay.song.analog.{version}.matched.wav" for version in ("analog", "twin")]
    assert inside == [file.read_bytes() for file in files]
    assert "Loudness is matched" in page


def test_blind_page_needs_both(design: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    arguments = ["render", str(design), "--out", str(tmp_path), "--signal", "impulse", "--write", "twin", "--blind"]
    assert main(arguments) == 2
    assert "a blind comparison needs analog and twin" in capsys.readouterr().err


def test_a_plain_conversion_does_not_load_matplotlib(design: Path, tmp_path: Path) -> None:
    script = (
        "import sys; from a2d.cli import main; "
        f"main(['convert', {str(design)!r}, '--out', {str(tmp_path / 'out')!r}]); "
        "sys.exit('matplotlib' in sys.modules or 'jinja2' in sys.modules)"
    )
    done = subprocess.run([sys.executable, "-c", script], check=False, capture_output=True, text=True, cwd=ROOT)
    assert done.returncode == 0, done.stderr
