"""Tables of controls: errors at every position, and between positions stability and the error that is stated."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from a2d.analog.build import build_chain
from a2d.compare.between import interpolate, triangle_margin
from a2d.compare.control_tables import describe_position, sweep_controls, tabulate
from a2d.compare.control_twins import twins_of
from a2d.compare.positions import GROUP_DELAY, MAGNITUDE, PHASE
from a2d.conversion import convert, convert_at
from a2d.design.model import Design
from a2d.design.read import parse_design
from a2d.digital.response import chain_response
from tests.support.controls import HEAD, PRESENCE, bass_alone, control, presence, tone

F = np.geomspace(20.0, 20e3, 400)


def poles_inside(sos: np.ndarray) -> bool:
    """By the roots themselves, not by the triangle."""
    return all(np.all(np.abs(np.roots(row[3:])) < 1.0) for row in sos.reshape(-1, 6))


def test_every_position_has_the_errors_of_a_design_made_for_it() -> None:
    """The vectorised figures against the comparison of one twin at a time, by another search."""
    design = presence("positions = 7")
    table = convert(design).controls[0].rates[0]
    for k, gain in enumerate(np.linspace(12.0, -12.0, 7)):
        single = parse_design(HEAD + PRESENCE.replace("4.5 dB", f"{gain:.17g} dB"))
        found = convert_at(single, build_chain(single), 48e3).comparison
        for quantity, worst in (
            (MAGNITUDE, found.magnitude_db),
            (PHASE, found.phase_deg),
            (GROUP_DELAY, found.group_delay_us),
        ):
            # Both searches stop within 1e-4 of a bracket, where a maximum of a smooth curve is known to 1e-6 or better.
            assert table.errors.worst[quantity, k] == pytest.approx(worst.worst, rel=1e-5, abs=1e-9)


def test_the_design_s_own_setting_is_the_table_s() -> None:
    """Main twin and table agree where the design stands on a position: one order, one pairing."""
    conversion = convert(tone())
    table = conversion.controls[0]
    rows = conversion.judged[0].twin.sos[list(table.places)]
    np.testing.assert_allclose(rows, table.rates[0].sos[2, 2], rtol=1e-9, atol=1e-13)


def test_limits_are_judged_at_every_position_and_the_worst_is_named() -> None:
    text = HEAD + '[limits]\nmagnitude = "0.2 dB"\n' + PRESENCE
    design = parse_design(text + control("lift", "presence.gain", -12, 12, "positions = 7"))
    conversion = convert(design)
    table = conversion.controls[0]
    ((k, breach),) = table.rates[0].breaches
    assert not conversion.within_limits
    assert not any(j.breaches for j in conversion.judged)
    assert table.position(k) in ("lift at 12 dB", "lift at -12 dB")
    assert abs(breach.worst) == np.abs(table.rates[0].errors.worst[MAGNITUDE]).max()
    assert table.rates[0].within.tolist() == [abs(w) <= 0.2 for w in table.rates[0].errors.worst[MAGNITUDE]]


@settings(max_examples=40, deadline=None)
@given(
    f0=st.floats(20.0, 20e3),
    q=st.floats(0.1, 40.0),
    ends=st.tuples(st.floats(-24.0, 24.0), st.floats(-24.0, 24.0)).filter(lambda e: abs(e[0] - e[1]) > 0.1),
    count=st.integers(2, 9),
    seed=st.integers(0, 2**32 - 1),
)
def test_every_interpolated_point_is_stable(
    f0: float, q: float, ends: tuple[float, float], count: int, seed: int
) -> None:
    """Random bells and travels: poles inside the circle at random points of every cell, and the margin kept."""
    section = f'[[section]]\nname = "s"\nkind = "peaking"\nf0 = {f0!r}\nq = {q!r}\ngain = 1.0\n'
    grid = control("g", "s.gain", *ends, f"positions = {count}", grid="both")
    grid += control("w", "s.q", q, q * 3.0, "positions = 3", grid="both")
    design = parse_design(HEAD.replace("48 kHz", "96 kHz") + section + grid)
    table = convert(design).controls[0]
    rate = table.rates[0]
    generator = np.random.default_rng(seed)
    knots = [axis.knots for axis in table.group.axes]
    scales = np.stack([generator.uniform(min(k), max(k), 30) for k in knots], axis=-1)
    found = interpolate(rate.sos, knots, scales)
    assert poles_inside(found)
    assert np.min(triangle_margin(found)) >= rate.margin - 1e-15


@pytest.mark.parametrize(
    "design",
    [presence("positions = 9"), bass_alone("positions = 9"), bass_alone('error = "0.5 dB"')],
    ids=["bell", "pot", "smallest"],
)
def test_a_finer_sweep_does_not_exceed_the_stated_error(design: Design) -> None:
    """50 times as many positions, each interpolated and held against the twin made for it."""
    (sweep,) = sweep_controls(design)
    rate = tabulate(design, build_chain(design), sweep).rates[0]
    (entry,) = sweep.entries
    knots = sweep.group.axes[0].knots
    last = len(knots) - 1
    fine = np.interp(np.linspace(0.0, last, 50 * last + 1), np.arange(last + 1.0), knots)[:, np.newaxis]
    made = twins_of(design, entry, entry.at(fine), 48e3)
    drawn = interpolate(rate.sos, [knots], fine)
    f = np.geomspace(20.0, 20e3, 200)
    error = 20.0 * np.log10(np.abs(chain_response(drawn, f, 48e3) / chain_response(made, f, 48e3)))
    assert np.max(np.abs(error)) <= rate.between.worst_db
    assert rate.between.worst_db < 1.05 * np.max(np.abs(error)) + 1e-6


def test_the_smallest_table_meets_its_limit_with_few_positions_where_little_changes() -> None:
    table = convert(bass_alone('error = "0.5 dB"')).controls[0]
    knots = table.group.axes[0].knots
    assert table.rates[0].between.worst_db <= 0.5
    even = convert(bass_alone(f"positions = {len(knots)}")).controls[0].rates[0].between.worst_db
    assert even > 2.0 * table.rates[0].between.worst_db
    steps = np.diff(knots)
    assert steps.max() > 5.0 * steps.min()


def test_one_position_less_does_not_meet_the_limit() -> None:
    """The smallest table: the best even table of one position less fails, and so does its own with one left out."""
    design = presence('error = "0.05 dB"')
    table = convert(design).controls[0]
    knots = table.group.axes[0].knots
    assert table.rates[0].between.worst_db <= 0.05
    assert convert(presence(f"positions = {len(knots) - 1}")).controls[0].rates[0].between.worst_db > 0.05


def test_a_switch_has_nothing_between() -> None:
    text = '[[control]]\nname = "mode"\nmoves = ["presence.gain"]\nvalues = ["0 dB", "3 dB", "6 dB"]\n'
    table = convert(parse_design(HEAD + PRESENCE + text)).controls[0]
    assert table.rates[0].between.worst_db == 0.0
    assert table.rates[0].sos.shape == (3, 1, 6)
    assert table.position(1) == "mode at position 2"


def test_positions_in_words() -> None:
    assert describe_position("lift", "dB", -4.5, False) == "lift at -4.5 dB"
    assert describe_position("bass", "", 0.25, False) == "bass at 0.25"


def test_phase_errors_beyond_half_a_turn_are_not_folded() -> None:
    """Four all-passes near half the rate: their twins' phase is wrong by more than 180 degrees in sum."""
    sections = "".join(
        f'[[section]]\nname = "a{k}"\nkind = "allpass"\nf0 = "17 kHz"\nq = 3.0\nmatch = "1 kHz"\n' for k in range(4)
    )
    design = parse_design(HEAD + sections + control("knob", "a0.q", 3, 3.1, "positions = 2"))
    table = convert(design).controls[0].rates[0]
    twin = convert_at(design, build_chain(design), 48e3).twin
    f = np.geomspace(20.0, 20e3, 20_001)
    ratio = twin.response(f) / build_chain(design).response(f)
    truth = np.degrees(np.unwrap(np.angle(ratio)))
    assert np.max(np.abs(truth)) > 400.0
    assert abs(table.errors.worst[PHASE, 0]) == pytest.approx(np.max(np.abs(truth)), rel=1e-6)


def test_no_point_of_a_grid_exceeds_the_stated_error() -> None:
    """A lattice five times as fine on either axis, and points at random."""
    design = tone()
    (sweep,) = sweep_controls(design)
    rate = tabulate(design, build_chain(design), sweep).rates[0]
    (entry,) = sweep.entries
    knots = [axis.knots for axis in sweep.group.axes]
    line = np.linspace(0.0, 1.0, 21)
    lattice = np.stack(np.meshgrid(line, line), axis=-1).reshape(-1, 2)
    fine = np.concatenate([lattice, np.random.default_rng(1).uniform(0.0, 1.0, (200, 2))])
    made = chain_response(twins_of(design, entry, entry.at(fine), 48e3), F[::4], 48e3)
    error = 20.0 * np.log10(np.abs(chain_response(interpolate(rate.sos, knots, fine), F[::4], 48e3) / made))
    assert np.max(np.abs(error)) <= rate.between.worst_db
