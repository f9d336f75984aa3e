"""The picture of component spread: by how much units differ from nominal, with the twin's error inside."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import partial

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from a2d.analog.spread_causes import Corners, Sensitivity
from a2d.analog.spread_draws import SpreadResult
from a2d.arrays import FloatArray
from a2d.report.graphics import FORMATS
from a2d.report.style import FAINT_INK, FILE_SHEET, INK, drawing, frequency_axis, twin_style
from a2d.report.text import hertz_with_unit, plain, rate_label

BAND, EXTREME, CORNER = "#c3d4e6", "#5b7fa6", "#8a5a00"
MOST_BARS = 12
_NOTHING_DB = 1e-6


@dataclass(frozen=True, eq=False)
class TwinError:
    """A twin's level error against the nominal hardware in dB, [F], on the spread's own frequencies."""

    sample_rate_hz: float
    error_db: FloatArray


def spread_plots(
    result: SpreadResult,
    worst: Corners,
    causes: Sequence[Sensitivity],
    twins: Sequence[TwinError],
    name: str,
    title: str,
) -> dict[str, bytes]:
    """`NAME.spread` and `NAME.sensitivity` as SVG and PNG: file name -> content."""
    files: dict[str, bytes] = {}
    drawings = {"spread": partial(draw_spread, result, worst, twins), "sensitivity": partial(draw_causes, causes)}
    captions = {"spread": "units and twin against nominal", "sensitivity": "what each part does within its tolerance"}
    for key, draw in drawings.items():
        with drawing(FILE_SHEET.text, svg_text=False):
            figure = draw()
            figure.suptitle(f"{plain(title)} · {captions[key]}", x=0.01, ha="left", weight="bold")
            for extension, write in FORMATS.items():
                files[f"{name}.{key}.{extension}"] = write(figure)
    return files


def draw_spread(result: SpreadResult, worst: Corners, twins: Sequence[TwinError]) -> Figure:
    """Levels relative to nominal: the middle 90 % of units, the extremes, the worst-case corners, the twins."""
    figure = Figure(figsize=(FILE_SHEET.width, 1.6 * FILE_SHEET.panel), layout="constrained")
    axes = figure.subplots()
    f, nominal = result.f_hz, result.nominal_db
    frequency_axis(axes, float(f[0]), float(f[-1]))
    low, _, high = result.percentiles_db - nominal
    axes.fill_between(f, low, high, color=BAND, linewidth=0.0, label=f"90 % of {len(result.unit_worst_db)} units")
    for k, curve in enumerate((result.lowest_db, result.highest_db)):
        axes.plot(f, curve - nominal, color=EXTREME, linewidth=1.0, label="extreme units" if k == 0 else None)
    for k, curve in enumerate((worst.lowest_db, worst.highest_db)):
        label = "worst-case corners" if k == 0 else None
        axes.plot(f, curve - nominal, color=CORNER, linewidth=1.0, linestyle=(0, (5.0, 2.0)), label=label)
    for k, twin in enumerate(twins):
        axes.plot(f, twin.error_db, label=f"twin at {rate_label(twin.sample_rate_hz)}", **twin_style(k))
    _frame(axes, result, worst)
    axes.legend(loc="lower left", bbox_to_anchor=(0.0, 1.0), ncols=3, borderaxespad=0.2)
    return figure


def _frame(axes: Axes, result: SpreadResult, worst: Corners) -> None:
    """Limits by what the units do; a twin that leaves them is cut off by the frame, and seen to be."""
    axes.axhline(0.0, color=FAINT_INK, linewidth=0.8)
    size = max(
        float(np.abs(worst.highest_db - result.nominal_db).max()),
        float(np.abs(worst.lowest_db - result.nominal_db).max()),
        float(result.unit_worst_db.max()),
    )
    axes.set_ylim(-1.25 * size, 1.25 * size)
    axes.set_xlabel("Frequency (Hz)")
    axes.set_ylabel("Level relative to nominal (dB)")


def draw_causes(causes: Sequence[Sensitivity]) -> Figure:
    """Parts ranked by the largest change of level within their tolerance."""
    shown = list(causes[:MOST_BARS])[::-1]
    figure = Figure(figsize=(FILE_SHEET.width, 0.8 + 0.32 * len(shown)), layout="constrained")
    axes = figure.subplots()
    values = [row.contribution_db for row in shown]
    axes.barh(range(len(shown)), values, color=EXTREME, height=0.62)
    axes.set_yticks(range(len(shown)), [plain(f"{row.name} ({100 * row.tolerance:g} %)") for row in shown])
    for k, row in enumerate(shown):
        heard = row.contribution_db >= _NOTHING_DB
        text = f" {row.contribution_db:.2g} dB at {hertz_with_unit(row.at_hz)}" if heard else " nothing"
        axes.text(row.contribution_db, k, text, va="center", color=INK, fontsize="small")
    axes.set_xlim(0.0, 1.3 * max(*values, 1e-9))
    axes.set_axisbelow(True)
    axes.grid(False, axis="y")
    axes.set_xlabel("Largest change of level at the end of the tolerance (dB)")
    return figure
