"""Sections along a sweep: exact at every position, in one order, continuous, with roots that come and go."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from a2d.analog.axis import axis_of, groups_of
from a2d.analog.build import build_section
from a2d.analog.network.parts import lay_out
from a2d.analog.placing import pairings
from a2d.analog.response import chain_response
from a2d.analog.sweep import sweep_entry
from a2d.design.read import parse_design
from tests.support import spice
from tests.support.controls import HEAD, PRESENCE, TONE, bass_alone, control, tone
from tests.support.tools import need

F = np.geomspace(20.0, 20e3, 31)


def test_the_grid_of_a_two_pot_tone_control_agrees_with_the_circuit_simulator(tmp_path: Path) -> None:
    """25 positions of two pots, ends included, where the network's order drops."""
    design = tone()
    (group,) = groups_of(design)
    swept = sweep_entry(design, group, 0)
    worst = 0.0
    for i, bass in enumerate(group.axes[0].knots):
        for j, treble in enumerate(group.axes[1].knots):
            section = group.section_at(design, 0, np.array([bass, treble]))
            f, h = spice.response(section.network, need("ngspice"), tmp_path, decade=5, start=20.0, stop=2e4)
            own = chain_response(swept.exact.b[i, j], swept.exact.a[i, j], f)
            worst = max(worst, float(np.max(np.abs(own / h - 1.0))))
    # ngspice has 1e-4 Ω where the pot's end has none (1e-8 of the track) and a gain of 1e9 for the ideal op-amp.
    assert worst < 2e-6


def test_two_axes_have_the_same_sections_as_each_alone() -> None:
    """The design's own setting stands in the table of a grid and in that of one control with the same response."""
    grid, alone = tone(), bass_alone("positions = 5")
    responses = []
    for design in (grid, alone):
        (group,) = groups_of(design)
        now = sweep_entry(design, group, 0).now
        responses.append(chain_response(now.b, now.a, F))
    np.testing.assert_allclose(responses[0], responses[1], rtol=1e-12)


def test_sections_are_continuous_along_the_sweep() -> None:
    """Steps of a coefficient shrink with the steps of the control: nothing jumps from one section to another."""
    steps = []
    for count in (101, 201):
        design = bass_alone(f"positions = {count}")
        (group,) = groups_of(design)
        swept = sweep_entry(design, group, 0)
        w = 2.0 * np.pi * 1000.0
        scaled = swept.sections.a * np.array([w * w, w, 1.0])
        steps.append(np.abs(np.diff(scaled, axis=0)).max() / np.abs(scaled).max())
        assert swept.exchanged == 0
    # Where two real poles cross, they meet as a square root does, so halving the step takes out a factor of 1.41.
    assert steps[1] < 0.8 * steps[0]


def test_a_crossing_costs_what_it_is_said_to_cost() -> None:
    """Where poles of two sections meet, the table's own sections differ from the exact ones: 20·lg(cos φ) a couple.

    The circuit's couples reach φ = 0.13, 0.07 dB; those of more than 0.25 (0.27 dB) would be exchanged instead.
    """
    design = tone("positions = 41", "positions = 9")
    (group,) = groups_of(design)
    swept = sweep_entry(design, group, 0)
    own, exact = (chain_response(s.b, s.a, F) for s in (swept.sections, swept.exact))
    assert np.max(np.abs(20.0 * np.log10(np.abs(own / exact)))) < 0.1


def test_a_taper_of_15_percent_gives_15_percent_of_the_track() -> None:
    """IEC 60393-1 calls such laws by their resistance at half travel; 0.15 R is common practice for audio."""
    text = TONE.replace("position = 0.5 }", 'position = 0.5, taper = "logarithmic", mid = "15 %" }', 1)
    design = parse_design(HEAD + text)
    layout = lay_out(design.sections[0].network)  # type: ignore[attr-defined]
    branch = layout.unknowns.index("P1#before_wiper")
    ohm = -layout.pencil(np.array(layout.nominal)).g[branch, branch] * layout.impedance
    assert ohm == pytest.approx(0.15 * 100e3, rel=1e-12)


def test_ganged_controls_move_together() -> None:
    text = """
[[control]]
name = "both"
moves = ["presence.gain", "presence.f0"]
from = ["-6 dB", "1 kHz"]
to = ["6 dB", "4 kHz"]
positions = 3
"""
    design = parse_design(HEAD + PRESENCE + text)
    axis = axis_of(design, design.controls[0])
    assert [[float(v) for _, v in axis.at(k)] for k in axis.knots] == [[-6.0, 1e3], [0.0, 2.5e3], [6.0, 4e3]]


def test_logarithmic_spacing_has_equal_ratios() -> None:
    text = '[[control]]\nname = "tune"\nmoves = ["presence.f0"]\nfrom = "100 Hz"\nto = "10 kHz"\n'
    design = parse_design(HEAD + PRESENCE + text + 'positions = 3\nspacing = "logarithmic"\n')
    np.testing.assert_allclose(axis_of(design, design.controls[0]).knots, [100.0, 1000.0, 10000.0], rtol=1e-12)


def test_a_switch_sets_words_and_values() -> None:
    extra = 'S1 = { switch = "open", nodes = ["bw", "gnd"], resistance = "1k" }\n'
    text = '[[control]]\nname = "mode"\nmoves = ["tone.S1", "tone.C1"]\nvalues = [["open", "22n"], ["closed", "10n"]]\n'
    design = parse_design(HEAD + TONE + extra + text)
    (group,) = groups_of(design)
    swept = sweep_entry(design, group, 0)
    for k in (0, 1):
        section = group.section_at(design, 0, np.array([float(k)]))
        parts = section.network.parts  # type: ignore[attr-defined]
        assert (parts["S1"].switch, float(parts["C1"].capacitor)) == [("open", 22e-9), ("closed", 10e-9)][k]
        alone = build_section(section)
        wanted = chain_response(alone.b, alone.a, F)
        own = chain_response(swept.sections.b[k], swept.sections.a[k], F)
        # Both are of the same roots: rounding is what is left.
        np.testing.assert_allclose(own, wanted, rtol=1e-10)


@pytest.mark.parametrize(("items", "ways"), [([1, 2], 1), ([1, 2, 3], 3), ([1, 2, 3, 4], 3), ([1, 2, 3, 4, 5, 6], 15)])
def test_pairings_are_all_and_each_once(items: list[int], ways: int) -> None:
    """(n - 1)!! ways for even n, n!! for odd."""
    found = {frozenset(map(frozenset, way)) for way in pairings(items)}
    assert len(found) == len(pairings(items)) == ways
    assert all(sorted(k for pair in way for k in pair) == items for way in found)


@pytest.mark.parametrize(
    ("circuit", "parts"),
    [
        ("baxandall", 'R1 = "10k", R2 = "3k3", R3 = "10k", P1 = "100k", P2 = "100k", C1 = "39n", C2 = "4n7"'),
        (
            "passive_tone",
            'R1 = "100k", R2 = "10k", R3 = "10k", P1 = "500k", P2 = "500k", C1 = "2n2", C2 = "22n", C3 = "470p", '
            'C4 = "4n7"',
        ),
    ],
)
def test_ready_tone_controls_are_exact_at_every_position(circuit: str, parts: str) -> None:
    """The sections of the sweep against those of the circuit solved for that position alone."""
    text = f'[[section]]\nname = "t"\ncircuit = "{circuit}"\nparts = {{ {parts} }}\n'
    text += control("bass", "t.bass", 0, 1, "positions = 4", grid="g")
    design = parse_design(HEAD + text + control("treble", "t.treble", 0, 1, "positions = 4", grid="g"))
    (group,) = groups_of(design)
    swept = sweep_entry(design, group, 0)
    for i, j in np.ndindex(4, 4):
        scales = np.array([group.axes[0].knots[i], group.axes[1].knots[j]])
        alone = build_section(group.section_at(design, 0, scales))
        own = chain_response(swept.exact.b[i, j], swept.exact.a[i, j], F)
        # A network agrees with its sections to 1e-8 by its own check.
        np.testing.assert_allclose(own, chain_response(alone.b, alone.a, F), rtol=1e-8)
