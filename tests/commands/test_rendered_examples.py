"""What stands in audio_examples/rendered is what the command in its page writes."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import soundfile

from a2d.cli import main
from tests.support.paths import EXAMPLES


def test_rendered_examples_are_up_to_date(tmp_path: Path) -> None:
    arguments = [
        "render",
        str(EXAMPLES / "harbour_eq.toml"),
        "--out",
        str(tmp_path),
        "--signal",
        "sweep",
        "--rate",
        "48000",
    ]
    assert main([*arguments, "--bits", "16", "--sweep-seconds", "2", "--write", "analog", "twin", "difference"]) == 0
    shipped = sorted((EXAMPLES / "rendered").iterdir())
    assert sorted(p.name for p in tmp_path.iterdir()) == [p.name for p in shipped]
    for path in shipped:
        if path.suffix == ".json":
            assert json.loads((tmp_path / path.name).read_text()) == json.loads(path.read_text())
            continue
        want, got = (soundfile.read(p, dtype="int16")[0].astype(int) for p in (path, tmp_path / path.name))
        # Another library's rounding may move a sample that lies on the border between two steps.
        assert np.max(np.abs(want - got)) <= 1
    assert sum(p.stat().st_size for p in shipped) < 2_000_000
