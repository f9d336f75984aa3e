"""Pictures of controls and spread: what they draw is what was computed, and the same design gives the same bytes."""

from __future__ import annotations

import numpy as np
import pytest
import scipy.signal as ss

from a2d.analog.spread import spread_model
from a2d.analog.spread_causes import corners, sensitivities
from a2d.analog.spread_draws import run_spread
from a2d.conversion import convert
from a2d.design.read import parse_design
from a2d.report.controls_plots import control_plots, draw_error_map, draw_family
from a2d.report.spread_plots import TwinError, draw_causes, draw_spread, spread_plots
from tests.support.controls import HEAD, PRESENCE, TONE, control, presence
from tests.support.prototypes import digital

SWITCH = '[[control]]\nname = "mode"\nmoves = ["presence.gain"]\nvalues = ["0 dB", "3 dB", "6 dB"]\n'


def test_the_family_has_a_curve_a_position() -> None:
    table = convert(presence("positions = 5")).controls[0]
    axes = draw_family(table, table.rates[0], 0).axes[0]
    drawn = [line for line in axes.lines if len(line.get_xdata())]
    assert len(drawn) == 10  # analog and twin
    for k, line in enumerate(drawn[5:]):
        f = np.asarray(line.get_xdata())
        wanted = 20.0 * np.log10(np.abs(digital(table.rates[0].sos[k, 0], f, 48e3)))
        np.testing.assert_allclose(line.get_ydata(), wanted, atol=1e-9)


def test_the_map_shows_the_error_and_marks_the_worst() -> None:
    table = convert(presence("positions = 5")).controls[0]
    rate = table.rates[0]
    axes = draw_error_map(table, rate, 0).axes[0]
    error = np.asarray(axes.collections[0].get_array()).reshape(5, -1)
    k = rate.errors.worst_position()
    assert np.max(np.abs(error)) == pytest.approx(abs(rate.errors.worst[0, k]), rel=1e-3)
    marker = next(line for line in axes.lines if len(line.get_xdata()) == 1)
    assert float(np.asarray(marker.get_xdata())[0]) == rate.errors.at_hz[0, k]
    assert float(np.asarray(marker.get_ydata())[0]) == table.group.axes[0].knots[k]


@pytest.mark.parametrize("text", [SWITCH, control("lift", "presence.gain", 12, -12, "positions = 25")])
def test_files_are_the_same_every_time(text: str) -> None:
    tables = convert(parse_design(HEAD + PRESENCE + text)).controls
    first, again = (control_plots(tables, "cove", "Cove desk") for _ in range(2))
    assert first == again
    assert all(data.startswith(b"\x89PNG") for name, data in first.items() if name.endswith(".png"))
    assert sorted(name.split(".", 1)[1].split(".", 1)[1] for name in first) == [
        "error_map.png",
        "error_map.svg",
        "family.png",
        "family.svg",
    ]


def test_the_spread_picture_has_the_twin_inside() -> None:
    design = parse_design(HEAD + TONE + '[spread]\nresistors = "1 %"\ncapacitors = "5 %"\n')
    model = spread_model(design, np.geomspace(20.0, 20e3, 60))
    result, worst = run_spread(model, 100, 1), corners(model)
    conversion = convert(design)
    sos = conversion.judged[0].twin.sos
    h = ss.sosfreqz(sos, worN=model.f_hz, fs=48e3)[1] / conversion.chain.response(model.f_hz)
    twin = TwinError(48e3, 20.0 * np.log10(np.abs(h)))
    axes = draw_spread(result, worst, [twin]).axes[0]
    lines = {line.get_label(): line for line in axes.lines}
    np.testing.assert_array_equal(lines["twin at 48 kHz"].get_ydata(), twin.error_db)
    np.testing.assert_allclose(lines["extreme units"].get_ydata(), result.lowest_db - result.nominal_db, atol=1e-12)
    assert len(draw_causes(sensitivities(model)).axes[0].patches) == len(sensitivities(model))
    first, again = (spread_plots(result, worst, sensitivities(model), [twin], "cove", "Cove") for _ in range(2))
    assert first == again
