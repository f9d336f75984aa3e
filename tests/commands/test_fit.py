"""`a2d fit`, end to end: the result converts at once."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from a2d.cli import main
from a2d.design.read import read_design
from tests.support.chains import chain_of, peaking

F = np.geomspace(20.0, 20_000.0, 120)


@pytest.fixture
def response(tmp_path: Path) -> Path:
    h = 0.5 * chain_of(peaking(200, 0.9, 6), peaking(2_500, 3.0, -8)).response(F)
    path = tmp_path / "desk.csv"
    rows = (f"{f:.6f},{20 * np.log10(abs(v)):.3f},{np.degrees(np.angle(v)):.2f}" for f, v in zip(F, h, strict=True))
    path.write_text("\n".join(["Hz,dB,deg", *rows]))
    return path


def test_fitted_design_converts_at_once(response: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    out = tmp_path / "out"
    assert main(["fit", str(response), "--out", str(out), "--name", "desk", "--rate", "48 kHz", "96 kHz"]) == 0
    assert {p.name for p in out.iterdir()} == {"desk.toml", "desk.residual.csv", "desk.fit.svg", "desk.fit.png"}
    assert "Order sweep" in capsys.readouterr().out
    assert main(["convert", str(out / "desk.toml"), "--out", str(out)]) == 0
    design = read_design(out / "desk.toml")
    assert sorted(float(s.f0) for s in design.sections) == pytest.approx([200.0, 2_500.0], rel=1e-3)  # type: ignore[attr-defined]
    assert len((out / "desk.residual.csv").read_text().splitlines()) == 121


def test_panel_q(response: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    design = tmp_path / "panel.toml"
    design.write_text(
        '[design]\nname = "panel"\nsample_rates = ["48 kHz"]\n'
        '[[section]]\nname = "low"\nkind = "peaking"\nf0 = 200.0\nq = 0.9\ngain = 6.0\n'
        '[[section]]\nname = "presence"\nkind = "peaking"\nf0 = 2500.0\nq = 1.0\ngain = -8.0\n'
    )
    arguments = ["fit", str(response), "--out", str(tmp_path / "o"), "--design", str(design)]
    assert main([*arguments, "--free", "presence.q"]) == 0
    fitted = read_design(tmp_path / "o" / "fitted.toml")
    assert [s.name for s in fitted.sections] == ["presence"]
    assert float(fitted.sections[0].q) == pytest.approx(3.0, rel=2e-3)  # type: ignore[attr-defined]
    capsys.readouterr()
    assert main([*arguments, "--free", "presense.q"]) == 2
    assert 'nearest is "presence"' in capsys.readouterr().err
    assert main(arguments) == 2
    assert "which values to fit" in capsys.readouterr().err


def test_faults(tmp_path: Path, response: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["fit", str(tmp_path / "none.csv"), "--out", str(tmp_path / "o")]) == 2
    assert "cannot read" in capsys.readouterr().err
    assert main(["fit", str(response), "--out", str(tmp_path / "o"), "--free", "a.q"]) == 2
    assert "no meaning without --design" in capsys.readouterr().err
    assert not (tmp_path / "o").exists()
