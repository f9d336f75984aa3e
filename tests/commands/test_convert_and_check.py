"""The main job from the command line: files, exit status, messages, and the header read back."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

import a2d
from a2d.cli import main
from tests.support.paths import EXAMPLES, ROOT

DESIGN = """
[design]
name = "cove_eq"
title = "Cove desk"
sample_rates = ["48 kHz", "96 kHz"]
[[section]]
name = "presence"
kind = "peaking"
f0 = "16 kHz"
q = 1
gain = "12 dB"
"""


@pytest.fixture
def design(tmp_path: Path) -> Path:
    path = tmp_path / "cove_eq.toml"
    path.write_text(DESIGN, encoding="utf-8")
    return path


def convert(path: Path, *more: str) -> tuple[int, Path]:
    out = path.parent / "out"
    return main(["convert", str(path), "--out", str(out), *more]), out


def test_files_and_manifest(design: Path, capsys: pytest.CaptureFixture[str]) -> None:
    status, out = convert(design)
    assert status == 0
    manifest = json.loads((out / "cove_eq.twin.json").read_text(encoding="utf-8"))
    expected = a2d.convert(a2d.read_design(design))
    assert manifest["format"] == 1
    assert [t["sample_rate_hz"] for t in manifest["twins"]] == [48_000.0, 96_000.0]
    for twin, judged in zip(manifest["twins"], expected.judged, strict=True):
        np.testing.assert_array_equal([s["sos"] for s in twin["sections"]], judged.twin.sos)  # the same doubles
        assert twin["comparison"]["magnitude_db"]["worst"] == judged.comparison.magnitude_db.worst
        assert twin["within_limits"] is True
    np.testing.assert_array_equal(manifest["analog"]["sections"][0]["b"], expected.chain.b[0])
    rows = (out / "cove_eq.sos.csv").read_text(encoding="utf-8").splitlines()
    assert [float(v) for v in rows[1].split(",")[4:]] == expected.judged[0].twin.sos[0].tolist()
    shown = capsys.readouterr().out
    assert "-6.22 dB" in shown
    assert "Q 1, W3C note" in shown
    assert "no limits stated" in shown


def test_a_broken_limit_is_status_1_and_is_said(design: Path, capsys: pytest.CaptureFixture[str]) -> None:
    design.write_text(DESIGN + '[limits]\nmagnitude = "1 dB"\n', encoding="utf-8")
    status, out = convert(design)
    assert status == 1
    assert (out / "cove_eq.twin.json").exists()
    message = capsys.readouterr().err
    assert "limit broken at 48000 Hz: magnitude error -6.224 dB at 20000 Hz (allowed 1 dB either way)" in message
    twins = json.loads((out / "cove_eq.twin.json").read_text())["twins"]
    assert [t["within_limits"] for t in twins] == [False, True]


def test_a_doubled_rate_that_alone_comes_nearer_is_said(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """No fit that was tried betters the group delay of this bell; twice the rate leaves a quarter of the error."""
    path = tmp_path / "bell.toml"
    path.write_text(
        '[design]\nname = "bell"\nsample_rates = ["48 kHz"]\n[limits]\ngroup_delay = "0.1 us"\n'
        '[[section]]\nname = "a"\nkind = "peaking"\nf0 = "9 kHz"\nq = 1\ngain = "9 dB"\n'
    )
    assert main(["convert", str(path), "--out", str(tmp_path)]) == 1
    assert "a rate of 96000 Hz comes nearer: group delay error +2.3" in capsys.readouterr().err


def test_a_limit_is_not_passed_by_rounding_a_figure(design: Path) -> None:
    worst = abs(a2d.convert(a2d.read_design(design)).judged[0].comparison.magnitude_db.worst)
    for limit, status in ((worst, 0), (np.nextafter(worst, 0.0), 1)):
        design.write_text(
            DESIGN.replace(', "96 kHz"', "")
            + f"[limits]\nmagnitude = {float(limit)!r}\n"
            + '[firmware]\nnumber = "float64"\nrounding = "nearest"\n',
            encoding="utf-8",
        )
        assert convert(design)[0] == status


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("f0 = 'x'", 'section "presence".f0'),
        ("f0 = '30 kHz'", "allowed below 24000 Hz); give the section a `match` inside the band, take a higher rate"),
        ("match = '24 kHz'", "below half the sample rate"),
    ],
)
def test_bad_input_is_status_2_one_message_and_no_files(
    design: Path, capsys: pytest.CaptureFixture[str], text: str, message: str
) -> None:
    changed = DESIGN.replace('f0 = "16 kHz"', text if text.startswith("f0") else f'f0 = "16 kHz"\n{text}')
    design.write_text(changed, encoding="utf-8")
    status, out = convert(design)
    assert status == 2
    assert not out.exists()
    captured = capsys.readouterr()
    assert message in captured.err
    assert "Traceback" not in captured.err
    assert captured.out == ""


def test_a_folder_that_cannot_be_made_is_named(design: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (design.parent / "out").write_text("a file stands where the folder should be")
    assert convert(design)[0] == 2
    assert "cannot write" in capsys.readouterr().err


@pytest.mark.parametrize("arguments", [[], ["nonsense"], ["convert"], ["convert", "x.toml"]], ids=str)
def test_usage_errors_are_status_2(arguments: list[str]) -> None:
    with pytest.raises(SystemExit) as stop:
        main(arguments)
    assert stop.value.code == 2


def test_check_passes_the_header_that_convert_wrote(design: Path, capsys: pytest.CaptureFixture[str]) -> None:
    _, out = convert(design)
    header = out / "cove_eq.h"
    assert main(["check", str(design), "--header", str(header)]) == 0
    assert "holds the twin of cove_eq: 1 sections at 48000 Hz, 96000 Hz" in capsys.readouterr().out


def test_check_is_not_upset_by_a_comment_in_the_design(design: Path, capsys: pytest.CaptureFixture[str]) -> None:
    _, out = convert(design)
    design.write_text("# a comment\n" + DESIGN, encoding="utf-8")
    assert main(["check", str(design), "--header", str(out / "cove_eq.h")]) == 0
    assert "but not its numbers" in capsys.readouterr().out


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ('gain = "12 dB"', 'gain = "11.999 dB"', 'b0 of section "presence" at 48000 Hz'),
        (', "96 kHz"', ', "88.2 kHz"', "no table for 88200 Hz"),
        (', "96 kHz"', "", "a table for 96000 Hz, the design has not"),
        ('name = "presence"', 'name = "air"', "the list of sections is presence in the header, air in the design"),
        ("[[section]]", '[firmware]\nnumber = "float64"\n[[section]]', "the number format is float32"),
        ("[[section]]", '[firmware]\nfeedback = "negated"\n[[section]]', "the feedback sign is as_written"),
    ],
)
def test_check_names_what_differs(
    design: Path, capsys: pytest.CaptureFixture[str], old: str, new: str, message: str
) -> None:
    _, out = convert(design)
    design.write_text(DESIGN.replace(old, new), encoding="utf-8")
    assert main(["check", str(design), "--header", str(out / "cove_eq.h")]) == 1
    assert message in capsys.readouterr().err


def test_check_names_a_file_that_is_no_header(design: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["check", str(design), "--header", str(design)]) == 2
    assert f"with name and title @ {design}" in capsys.readouterr().err


def test_list_shows_every_kind_and_its_equation(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["list"]) == 0
    shown = " ".join(capsys.readouterr().out.split())
    for kind in a2d.KINDS.values():
        assert " ".join(kind.equation.split()) in shown
        assert kind.equation.startswith("H(s) = ")
    assert main(["list", "peeking"]) == 2
    assert 'nearest is "peaking"' in capsys.readouterr().err


def test_list_prints_a_schema(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["list", "--schema"]) == 0
    assert json.loads(capsys.readouterr().out) == a2d.design_schema()
    assert main(["list", "--schema", "peaking"]) == 2


def bytes_of(folder: Path) -> dict[str, bytes]:
    return {path.name: path.read_bytes() for path in sorted(folder.iterdir())}


def test_the_same_bytes_in_two_runs_under_a_comma_locale_and_elsewhere(tmp_path: Path) -> None:
    """Two whole processes: the plain one, and one with another locale, time zone, folder, hash seed and home."""
    example = EXAMPLES / "harbour_eq.toml"
    plain = {**os.environ, "PYTHONPATH": str(ROOT)}
    other = plain | {
        "LC_ALL": "de_DE.UTF-8",
        "LANG": "de_DE.UTF-8",
        "TZ": "Asia/Kathmandu",
        "PYTHONHASHSEED": "77",
        "HOME": str(tmp_path),
        "COLUMNS": "60",
    }
    shown = []
    for name, environment, cwd in (("one", plain, ROOT), ("two", other, tmp_path)):
        command = [sys.executable, "-m", "a2d", "convert", str(example), "--out", str(tmp_path / name), "--plots"]
        done = subprocess.run(command, env=environment, cwd=cwd, capture_output=True, check=False)
        assert done.returncode == 0, done.stderr
        shown.append(done.stdout.replace(str(tmp_path / name).encode(), b"OUT").split(b"Written to")[0])
    assert bytes_of(tmp_path / "one") == bytes_of(tmp_path / "two")
    assert shown[0] == shown[1]
    assert len(bytes_of(tmp_path / "one")) >= 13
