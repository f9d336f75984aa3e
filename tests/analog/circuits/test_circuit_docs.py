"""docs/circuits.md: its design-file blocks build, its program runs, and every circuit is there."""

import re

import pytest

from a2d.analog.build import build_chain
from a2d.analog.circuits import CIRCUITS
from a2d.cli import main
from a2d.conversion import convert
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
def test_demo_designs_convert_at_48_and_96_khz_within_their_limits(name):
    conversion = convert(read_design(ROOT / "audio_examples" / f"{name}.toml"))
    assert [judged.twin.sample_rate_hz for judged in conversion.judged] == [48e3, 96e3]
    assert conversion.within_limits
    # measured: 0.042 dB (bank, 48 kHz) at the most
    assert all(abs(judged.comparison.magnitude_db.worst) < 0.1 for judged in conversion.judged)


def test_list_shows_circuits(capsys):
    assert main(["list", "wien_band", "simulated_inductor_bands"]) == 0
    text = " ".join(capsys.readouterr().out.split())
    assert "H = sR2C1/(1 + s(R1C1 + R2C2 + R2C1) + s²R1R2C1C2)." in text
    assert "f0 = 1/(2π√(R1R2C1C2))" in text
    assert "band: [{ P1, C1, R1, R2, C2, position }, ...]; needed" in text
