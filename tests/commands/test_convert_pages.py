"""What `a2d convert` writes for people: plots and the report."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

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


def test_a_plain_conversion_does_not_load_matplotlib(design: Path, tmp_path: Path) -> None:
    script = (
        "import sys; from a2d.cli import main; "
        f"main(['convert', {str(design)!r}, '--out', {str(tmp_path / 'out')!r}]); "
        "sys.exit('matplotlib' in sys.modules or 'jinja2' in sys.modules)"
    )
    done = subprocess.run([sys.executable, "-c", script], check=False, capture_output=True, text=True, cwd=ROOT)
    assert done.returncode == 0, done.stderr
