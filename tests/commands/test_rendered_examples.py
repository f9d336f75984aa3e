"""What stands in audio_examples/rendered is what the command in its page writes."""

from __future__ import annotations

import json
import re
from pathlib import Path

import numpy as np
import pytest
import soundfile

from a2d.cli import main
from tests.support.paths import EXAMPLES, ROOT


def the_page_s_command() -> list[str]:
    """The words after `a2d` of the render command in audio_examples/README.md."""
    (command,) = re.findall(r"^    a2d (render (?:.*\\\n)*.*)$", (EXAMPLES / "README.md").read_text("utf-8"), re.M)
    return command.replace("\\\n", " ").split()


def test_rendered_examples_are_up_to_date(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(ROOT)
    assert main([str(tmp_path) if word == "audio_examples/rendered" else word for word in the_page_s_command()]) == 0
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
