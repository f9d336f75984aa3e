"""Designs with controls, for tests."""

from __future__ import annotations

from a2d.design.model import Design
from a2d.design.read import parse_design

HEAD = """
[design]
name = "cove"
sample_rates = ["48 kHz"]
"""

TONE = """
[[section]]
name = "tone"
[section.network]
input = "in"
output = "out"
[section.network.parts]
R1 = { resistor = "10k", nodes = ["in", "a"] }
P1 = { potentiometer = "100k", nodes = ["a", "bw", "b"], position = 0.5 }
R2 = { resistor = "10k", nodes = ["b", "out"] }
C1 = { capacitor = "22n", nodes = ["a", "bw"] }
C2 = { capacitor = "22n", nodes = ["bw", "b"] }
R3 = { resistor = "10k", nodes = ["bw", "m"] }
C3 = { capacitor = "470p", nodes = ["in", "t1"] }
P2 = { potentiometer = "100k", nodes = ["t1", "tw", "t2"], position = 0.5 }
C4 = { capacitor = "470p", nodes = ["t2", "out"] }
R4 = { resistor = "4k7", nodes = ["tw", "m"] }
U1 = { opamp = "ideal", nodes = { plus = "gnd", minus = "m", out = "out" } }
"""

PRESENCE = """
[[section]]
name = "presence"
kind = "peaking"
f0 = "3.2 kHz"
q = 1.4
gain = "4.5 dB"
"""


def control(name: str, moves: str, start: object, stop: object, size: str, **more: str) -> str:
    """A `[[control]]` for one path; `size` is `positions = 21` or `error = "0.1 dB"`."""
    extra = "".join(f"{key} = {value!r}\n" for key, value in more.items())
    return f"[[control]]\nname = {name!r}\nmoves = [{moves!r}]\nfrom = {start!r}\nto = {stop!r}\n{size}\n{extra}"


def tone(bass: str = "positions = 5", treble: str = "positions = 5") -> Design:
    """A feedback tone control of two pots, swept as a grid."""
    both = control("bass", "tone.P1.position", 0, 1, bass, grid="tone_grid")
    both += control("treble", "tone.P2.position", 0, 1, treble, grid="tone_grid")
    return parse_design(HEAD + TONE + both)


def bass_alone(size: str) -> Design:
    """The same circuit with one of its pots swept."""
    return parse_design(HEAD + TONE + control("bass", "tone.P1.position", 0, 1, size))


def presence(size: str = "positions = 25", rates: str = '"48 kHz"') -> Design:
    """A bell from +12 to -12 dB."""
    text = HEAD.replace('"48 kHz"', rates) + PRESENCE
    return parse_design(text + control("lift", "presence.gain", "12 dB", "-12 dB", size))
