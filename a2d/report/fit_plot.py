"""A fit as a drawing: measured and fitted response, and what is left."""

from __future__ import annotations

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from a2d.analog.fit import Fit
from a2d.analog.fit_score import NEPER_DB
from a2d.report.graphics import FORMATS, settle
from a2d.report.style import ANALOG, FAINT_INK, FILE_SHEET, drawing, frequency_axis, twin_style


def fit_plot(fit: Fit, name: str) -> dict[str, bytes | str]:
    """`NAME.fit.svg` and `NAME.fit.png`: level above, residuals below."""
    with drawing(FILE_SHEET.text, svg_text=False):
        figure = _draw(fit)
        figure.suptitle("Measured and fitted", x=0.01, ha="left", weight="bold")
        settle(figure)
        return {f"{name}.fit.{extension}": write(figure) for extension, write in FORMATS.items()}


def _draw(fit: Fit) -> Figure:
    f = fit.measured.f_hz
    count = 2 if fit.residual_deg is None else 3
    figure = Figure(figsize=(FILE_SHEET.width, count * FILE_SHEET.panel), layout="constrained")
    panels = list(figure.subplots(count, 1, sharex=True, squeeze=False)[:, 0])
    for axes in panels:
        frequency_axis(axes, float(f[0]), float(f[-1]))
    measured_db = fit.measured.log_gain * NEPER_DB
    panels[0].plot(f, measured_db, color=ANALOG, linewidth=5.0, label="measured")
    panels[0].plot(f, measured_db - fit.residual_db, label="fitted", **twin_style(0))
    panels[0].set_ylabel("Level (dB)")
    panels[0].legend(loc="lower left", bbox_to_anchor=(0.0, 1.0), ncols=2, borderaxespad=0.2)
    _residual(panels[1], f, fit.residual_db, "Measured − fitted (dB)")
    if fit.residual_deg is not None:
        _residual(panels[2], f, fit.residual_deg, "Measured − fitted (degrees)")
    panels[-1].set_xlabel("Frequency (Hz)")
    return figure


def _residual(axes: Axes, f_hz: np.ndarray, residual: np.ndarray, label: str) -> None:
    axes.axhline(0.0, color=FAINT_INK, linewidth=0.8)
    axes.plot(f_hz, residual, marker="o", markersize=3.0, **twin_style(0))
    span = max(1.15 * float(np.abs(residual).max()), 1e-3)
    axes.set_ylim(-span, span)
    axes.set_ylabel(label)
