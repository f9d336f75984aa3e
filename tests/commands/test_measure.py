"""`a2d measure`, end to end: the sweep that `a2d render` wrote, through a simulated device, to a verdict and a fit."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest
import soundfile

from a2d.analog.build import build_chain
from a2d.cli import main
from a2d.design.read import read_design
from a2d.digital.twin import make_twin
from tests.support.device import device

DESIGN = """
[design]
name = "{name}"
sample_rates = ["48 kHz"]
[[section]]
name = "low"
kind = "highpass"
f0 = "30 Hz"
q = 0.8
[[section]]
name = "presence"
kind = "peaking"
f0 = "{f0}"
q = 1.5
gain = "6 dB"
"""


@pytest.fixture
def design(tmp_path: Path) -> Path:
    path = tmp_path / "quay.toml"
    path.write_text(DESIGN.format(name="quay", f0="3 kHz"))
    return path


def record(design: Path, path: Path, rate: float = 48_000.0, seconds: str = "3", **faults: float) -> np.ndarray:
    """Render the sweep by the command, send it through the twin and write the recording."""
    out = path.parent / "sweep"
    arguments = ["render", str(design), "--out", str(out), "--signal", "sweep", "--write", "input"]
    assert main([*arguments, "--sweep-seconds", seconds]) == 0
    played, _ = soundfile.read(out / "quay.sweep.48000.input.wav")
    recorded = device(played, make_twin(build_chain(read_design(design)), rate).sos, 48_000.0, **faults)  # type: ignore[arg-type]
    soundfile.write(path, recorded, 48_000, subtype="PCM_24")
    return recorded


def test_right_filter_and_the_fit_of_it(design: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    record(design, tmp_path / "bench.wav")
    out = tmp_path / "out"
    arguments = ["measure", str(tmp_path / "bench.wav"), str(design), "--out", str(out), "--sweep-seconds", "3"]
    assert main(arguments) == 0
    assert "verdict: right filter" in capsys.readouterr().out
    plots = {"bench.1.response.svg", "bench.1.response.png"}
    assert {p.name for p in out.iterdir()} == {"bench.1.response.csv", "bench.measure.json"} | plots
    (channel,) = json.loads((out / "bench.measure.json").read_text())["channels"]
    assert channel["latency_ms"] == pytest.approx(104.77, abs=1e-3)
    assert channel["against"]["twin"]["gain_db"] == pytest.approx(-6.02, abs=0.01)
    assert channel["harmonics_db_at_1_khz"]["2"] == pytest.approx(-60.0 + 1.4, abs=1.0)  # 2 kHz stands 1.4 dB higher
    head, *rows = (out / "bench.1.response.csv").read_text().splitlines()
    assert head.startswith("Hz,dB,deg,noise_dB,harmonic_2_dB")
    assert len(rows) == 479
    fit = ["fit", str(out / "bench.1.response.csv"), "--out", str(out), "--name", "found", "--sections", "2"]
    assert main(fit) == 0
    # The device is a twin, bent towards 24 kHz: two analog sections come close, and no closer.
    f = np.geomspace(20.0, 20_000.0, 100)
    found = build_chain(read_design(out / "found.toml")).response(f)
    error_db = 20 * np.log10(np.abs(found / make_twin(build_chain(read_design(design)), 48_000.0).response(f)))
    assert np.ptp(error_db) < 0.1


def test_wrong_rate_ends_with_status_one(design: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    record(design, tmp_path / "bench.wav", rate=44_100.0)
    arguments = [
        "measure",
        str(tmp_path / "bench.wav"),
        str(design),
        "--out",
        str(tmp_path / "o"),
        "--sweep-seconds",
        "3",
    ]
    assert main(arguments) == 1
    assert "wrong rate: coefficients made for 44100 Hz" in capsys.readouterr().err


def test_two_channels_swapped(design: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    second = tmp_path / "second.toml"
    second.write_text(DESIGN.format(name="quay", f0="800 Hz"))
    left, right = (record(d, tmp_path / "x.wav", gain=0.5) for d in (design, second))
    soundfile.write(tmp_path / "both.wav", np.stack([right, left], axis=1), 48_000, subtype="PCM_24")
    arguments = ["measure", str(tmp_path / "both.wav"), str(design), "--second", str(second), "--sweep-seconds", "3"]
    assert main([*arguments, "--out", str(tmp_path / "o")]) == 1
    error = capsys.readouterr().err
    assert "channel 1: swapped channels" in error
    assert "channel 2: swapped channels" in error


def test_without_a_design_it_only_measures(design: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    record(design, tmp_path / "bench.wav")
    assert main(["measure", str(tmp_path / "bench.wav"), "--out", str(tmp_path / "o"), "--sweep-seconds", "3"]) == 0
    assert "verdict" not in capsys.readouterr().out


@pytest.mark.parametrize(
    ("extra", "message"),
    [
        (["--channel", "2"], "asks for channel 2 of a recording with 1"),
        (["--sweep-seconds", "4"], "sync markers are not in the recording"),
        (["--tolerance", "-1 dB"], "out of range"),
        (["--second", "x.toml", "--loopback", "1"], "cannot read"),
    ],
)
def test_faults(
    design: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str], extra: list[str], message: str
) -> None:
    record(design, tmp_path / "bench.wav", seconds="2")
    capsys.readouterr()
    arguments = [
        "measure",
        str(tmp_path / "bench.wav"),
        str(design),
        "--out",
        str(tmp_path / "o"),
        "--sweep-seconds",
        "2",
    ]
    assert main([*arguments, *extra]) == 2
    assert message in capsys.readouterr().err
