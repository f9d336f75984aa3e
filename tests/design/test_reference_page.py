"""docs/design_file.md has every key that a design file may have."""

from __future__ import annotations

import re

from a2d.design.circuits import PARTS_OF
from a2d.design.schema import design_schema
from tests.support.paths import ROOT


def test_every_key_is_in_the_reference() -> None:
    text = (ROOT / "docs" / "design_file.md").read_text(encoding="utf-8")
    told = {word for code in re.findall(r"`+([^`]+)`+", text) for word in re.findall(r"[A-Za-z_]\w*", code)}
    of_circuits = {parts.__name__ for parts in PARTS_OF.values()} | {"SeriesResonantBand", "SimulatedInductorBand"}
    keys = {
        key
        for name, struct in design_schema()["$defs"].items()
        if name not in of_circuits  # component values under the names of the drawings
        for key in struct.get("properties", {})
    }
    assert len(keys) > 90
    assert keys - told == set()
