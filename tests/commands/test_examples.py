"""The example designs convert, and the rendered examples are what their command makes."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
import soundfile

from a2d.cli import main
from tests.support.paths import EXAMPLES

DESIGNS = sorted(EXAMPLES.glob("*.toml"))
RENDERED = EXAMPLES / "rendered"


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


def test_rendered_audio_is_what_the_command_makes(tmp_path: Path) -> None:
    options = "--signal sweep --bits 16 --sweep-seconds 2 --write analog twin difference".split()
    assert main(["render", str(EXAMPLES / "harbour_air.toml"), "--out", str(tmp_path), *options]) == 0
    committed = sorted(RENDERED.glob("*.wav"))
    assert len(committed) == 3
    for path in committed:
        kept, _ = soundfile.read(path, dtype="int16")
        made, _ = soundfile.read(tmp_path / path.name, dtype="int16")
        # Another machine's sine may differ in the last place, which moves a rounding by one step now and then.
        assert np.max(np.abs(kept.astype(int) - made.astype(int))) <= 1


def test_rendered_audio_is_small() -> None:
    assert sum(path.stat().st_size for path in RENDERED.iterdir()) < 2_000_000
