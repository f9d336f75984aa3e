"""`[[control]]` in the design file: what it may move, and what is wrong when it may not."""

from __future__ import annotations

import pytest

from a2d.design.moves import resolve
from a2d.design.read import parse_design
from a2d.errors import DesignError
from tests.support.controls import HEAD, PRESENCE, TONE, control

CIRCUIT = """
[[section]]
name = "mids"
circuit = "simulated_inductor_bands"
[section.parts]
R1 = "3k3"
R2 = "3k3"
[[section.parts.band]]
P1 = "10k"
position = 0.3
C1 = "1u"
R1 = "470"
R2 = "68k"
C2 = "8n2"
[[section]]
name = "body"
circuit = "multiple_feedback_bandpass"
parts = { R1 = "8k2", R2 = "1k5", R3 = "82k", C1 = "15n", C2 = "15n" }
[[section]]
name = "room"
direct = 1.0
[[section.band]]
name = "b63"
kind = "bandpass"
f0 = "63 Hz"
q = 1.4
mix = "3 dB"
"""


@pytest.mark.parametrize(
    ("path", "now", "unit"),
    [
        ("presence.gain", 4.5, "dB"),
        ("presence.f0", 3200.0, "Hz"),
        ("tone.P1.position", 0.5, ""),
        ("tone.network.parts.P1.position", 0.5, ""),
        ("tone.C1", 22e-9, "F"),
        ("body.R2", 1500.0, "Ω"),
        ("room.b63.f0", 63.0, "Hz"),
        ("mids.band.1.position", 0.3, ""),
    ],
)
def test_paths(path: str, now: float, unit: str) -> None:
    design = parse_design(HEAD + PRESENCE + TONE + CIRCUIT)
    move = resolve(design.sections, path)
    assert move.now == pytest.approx(now, rel=1e-15)
    assert move.unit == unit


@pytest.mark.parametrize(
    ("path", "message"),
    [
        ("presense.gain", 'nearest is "presence"'),
        ("presence.gian", 'nearest is "gain"'),
        ("tone.P9.position", "no .P9."),
        ("presence.name", "nothing that a control can move"),
        ("presence.gain.more", "no .more."),
    ],
)
def test_wrong_paths_are_named(path: str, message: str) -> None:
    with pytest.raises(DesignError, match=message):
        parse_design(HEAD + PRESENCE + TONE + control("knob", path, 0, 1, "positions = 3"))


@pytest.mark.parametrize(
    ("lines", "message"),
    [
        ('moves = ["presence.gain"]\nfrom = "1 dB"\npositions = 3', "to is missing"),
        ('moves = ["presence.gain"]\nfrom = "1 dB"\nto = "2 dB"', "either positions or error"),
        ('moves = ["presence.gain"]\nfrom = "1 dB"\nto = "2 dB"\npositions = 3\nerror = "1 dB"', "either positions"),
        ('moves = ["presence.gain"]\nfrom = "1 dB"\nto = "1 dB"\npositions = 3', "same value at both ends"),
        ('moves = ["presence.gain"]\nfrom = "1 kHz"\nto = "2 dB"\npositions = 3', "after the number"),
        ('moves = ["presence.gain"]\nfrom = "1 dB"\nto = "2 dB"\npositions = 1', "allowed 2 to 4096"),
        ('moves = ["presence.gain"]\nfrom = [1, 2]\nto = "2 dB"\npositions = 3', "from has 2 values"),
        ('moves = ["presence.q"]\nfrom = 0\nto = 2\npositions = 3', "out of range"),
        ('moves = ["tone.P1.position"]\nfrom = 0\nto = 1\npositions = 3\nspacing = "logarithmic"', "above zero"),
        ('moves = ["tone.S1"]\nfrom = "open"\nto = "closed"\npositions = 2', "write values"),
        ('moves = ["tone.S1"]\nvalues = ["open", "shut"]', "cannot be .shut."),
        ('moves = ["tone.S1"]\nvalues = ["open", "closed"]\npositions = 2', "positions has no meaning"),
        ('moves = ["presence.gain", "presence.gain"]\nvalues = [1, 2]', "twice"),
    ],
)
def test_faults(lines: str, message: str) -> None:
    switch = 'S1 = { switch = "open", nodes = ["bw", "gnd"] }\n'
    with pytest.raises(DesignError, match=message):
        parse_design(HEAD + PRESENCE + TONE + switch + f'[[control]]\nname = "knob"\n{lines}\n')


def test_two_controls_of_one_section_need_a_grid() -> None:
    gain = control("lift", "presence.gain", 0, 6, "positions = 3")
    with pytest.raises(DesignError, match="give the two the same grid"):
        parse_design(HEAD + PRESENCE + gain + control("tune", "presence.f0", 100, 200, "positions = 3"))
    with pytest.raises(DesignError, match="both move"):
        parse_design(
            HEAD + PRESENCE + gain.replace("positions", 'grid = "g"\npositions') + gain.replace("lift", "tune")
        )
