"""docs/circuits.md: its design-file blocks build, its program runs, and every circuit is there."""

import re

import pytest

from a2d.analog.build import build_chain
from a2d.analog.circuits import CIRCUITS
from a2d.design.read import parse_design, read_design
from tests.support.paths import ROOT

TEXT = (ROOT / "docs" / "circuits.md").read_text(encoding="utf-8")
HEAD = '[design]\nname = "docs"\nsample_rates = ["48 kHz"]\n'
BLOCKS = [
    "\n".join(line[4:] for line in block.splitlines())
    for block in re.findall(r"(?:^    .*\n|^\n(?=    ))+", TEXT, flags=re.MULTILINE)
]
DESIGNS = [block for block in BLOCKS if block.lstrip().startswith("[[section]]")]
(PROGRAM,) = [block for block in BLOCKS if block.lstrip().startswith("from a2d")]


def test_there_are_four_designs():
    assert len(DESIGNS) == 4


@pytest.mark.parametrize("block", DESIGNS)
def test_design_blocks_build(block):
    assert len(build_chain(parse_design(HEAD + block))) >= 1


def test_the_program_runs():
    names = {}
    exec(compile(PROGRAM, "docs/circuits.md", "exec"), names)
    assert names["value_names"](names["network"]) == ("R1", "C1", "R2", "C2")
    h = names["network_response"](names["network"], names["nominal_values"](names["network"]), [964.575])
    assert abs(h[0]) == pytest.approx(1 / 3, rel=1e-6)


@pytest.mark.parametrize("name", CIRCUITS)
def test_every_circuit_is_in_the_docs(name):
    """By its own name, or by the family's and the output's."""
    family = re.sub(r"_(lowpass|bandpass|highpass|lowpass_inverted)$", "", name)
    assert name in TEXT or family in TEXT


@pytest.mark.parametrize("name", ["pilot_channel", "lighthouse_bank"])
def test_demo_designs_build(name):
    chain = build_chain(read_design(ROOT / "audio_examples" / f"{name}.toml"))
    assert len(chain) >= 9
