"""A measured response as a drawing: beside what it was fitted with or held against, and what is left."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from a2d.analog.fit.fit import Fit
from a2d.arrays import FloatArray
from a2d.report.graphics import FORMATS, settle
from a2d.report.style import ANALOG, FAINT_INK, FILE_SHEET, drawing, frequency_axis, twin_style

MOST_DOTS = 250  # a point each; more become a line


@dataclass(frozen=True, eq=False)
class Pair:
    """Two responses at `f_hz` [F] and their differences; nan where there is nothing to draw.

    Parameters
    ----------
    f_hz
        Hz.
    measured_db, other_db
        Levels.
    other
        What the second one is called.
    left_db, left_deg
        Measured minus other; no phase where none was measured.
    """

    f_hz: FloatArray
    measured_db: FloatArray
    other_db: FloatArray
    other: str
    left_db: FloatArray
    left_deg: FloatArray | None


def fit_plot(fit: Fit, name: str) -> dict[str, bytes | str]:
    """`NAME.fit.svg` and `NAME.fit.png`: level above, residuals below."""
    level = fit.measured.level_db
    pair = Pair(fit.measured.f_hz, level, level - fit.residual_db, "fitted", fit.residual_db, fit.residual_deg)
    return pair_plot(pair, f"{name}.fit", "Measured and fitted")


def pair_plot(pair: Pair, stem: str, title: str) -> dict[str, bytes | str]:
    """`STEM.svg` and `STEM.png`."""
    with drawing(FILE_SHEET.text, svg_text=False):
        figure = _draw(pair)
        figure.suptitle(title, x=0.01, ha="left", weight="bold")
        settle(figure)
        return {f"{stem}.{extension}": write(figure) for extension, write in FORMATS.items()}


def _draw(pair: Pair) -> Figure:
    f = pair.f_hz
    count = 2 if pair.left_deg is None else 3
    figure = Figure(figsize=(FILE_SHEET.width, count * FILE_SHEET.panel), layout="constrained")
    panels = list(figure.subplots(count, 1, sharex=True, squeeze=False)[:, 0])
    for axes in panels:
        frequency_axis(axes, float(f[0]), float(f[-1]))
    panels[0].plot(f, pair.measured_db, color=ANALOG, linewidth=5.0, label="measured")
    panels[0].plot(f, pair.other_db, label=pair.other, **twin_style(0))
    panels[0].set_ylabel("Level (dB)")
    panels[0].legend(loc="lower left", bbox_to_anchor=(0.0, 1.0), ncols=2, borderaxespad=0.2)
    _residual(panels[1], f, pair.left_db, f"Measured − {pair.other} (dB)")
    if pair.left_deg is not None:
        _residual(panels[2], f, pair.left_deg, f"Measured − {pair.other} (degrees)")
    panels[-1].set_xlabel("Frequency (Hz)")
    return figure


def _residual(axes: Axes, f_hz: FloatArray, residual: FloatArray, label: str) -> None:
    axes.axhline(0.0, color=FAINT_INK, linewidth=0.8)
    few = f_hz.size <= MOST_DOTS
    axes.plot(f_hz, residual, marker="o" if few else "", markersize=3.0, **twin_style(0))
    known = np.abs(residual[np.isfinite(residual)])
    span = max(1.15 * float(known.max(initial=0.0)), 1e-3)
    axes.set_ylim(-span, span)
    axes.set_ylabel(label)
