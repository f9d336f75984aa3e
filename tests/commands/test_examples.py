"""The example designs convert within their limits, and their headers pass the check."""

from __future__ import annotations

from pathlib import Path

import pytest

from a2d.cli import main
from tests.support.paths import EXAMPLES

DESIGNS = sorted(EXAMPLES.glob("*.toml"))


@pytest.mark.parametrize("path", DESIGNS, ids=lambda p: p.stem)
def test_converts_within_its_limits(path: Path, tmp_path: Path) -> None:
    assert main(["convert", str(path), "--out", str(tmp_path)]) == 0
    assert (tmp_path / f"{path.stem}.twin.json").exists()
    assert main(["check", str(path), "--header", str(tmp_path / f"{path.stem}.h")]) == 0


def test_the_main_demo_is_as_promised() -> None:
    import a2d

    design = a2d.read_design(EXAMPLES / "harbour_eq.toml")
    assert len(design.sections) >= 8
    assert set(design.design.sample_rates) == {44_100.0, 48_000.0, 96_000.0}
    assert 16_000.0 in a2d.build_chain(design).f0_hz
