"""Plots of a design and its twins as files: SVG and PNG, the same bytes for the same design."""

from __future__ import annotations

import textwrap
from collections.abc import Callable, Sequence
from dataclasses import dataclass

from matplotlib.figure import Figure

from a2d.analog.chain import AnalogChain
from a2d.compare.errors import Comparison
from a2d.digital.twin import Twin
from a2d.report.curve_plots import draw_error, draw_group_delay, draw_magnitude, draw_phase
from a2d.report.graphics import FORMATS
from a2d.report.root_plot import draw_roots
from a2d.report.style import FILE_SHEET, Sheet, drawing
from a2d.report.text import plain
from a2d.report.traces import Traces, traces

TITLE_WIDTH = 70  # letters


@dataclass(frozen=True)
class Plot:
    """One drawing: what it is called, and the function that draws it."""

    caption: str
    draw: Callable[[Traces, Sequence[Comparison], Sheet], Figure]


PLOTS: dict[str, Plot] = {
    "magnitude": Plot("Magnitude", draw_magnitude),
    "error": Plot("Magnitude error of the twin", draw_error),
    "phase": Plot("Phase", draw_phase),
    "group_delay": Plot("Group delay", draw_group_delay),
    "poles_zeros": Plot("Poles and zeros", draw_roots),
}


def plots(
    chain: AnalogChain, twins: Sequence[Twin], comparisons: Sequence[Comparison], name: str, title: str
) -> dict[str, bytes]:
    """Every plot in every format.

    Parameters
    ----------
    chain, twins, comparisons
        The analog sections, one twin a sample rate, and each twin's comparison (its band is what is drawn).
    name
        Starts the file names.
    title
        Stands above each plot; any text.

    Returns
    -------
    File name -> content: `NAME.magnitude.svg`, `NAME.magnitude.png` and so on for each of `PLOTS`.
    """
    curves = traces(chain, twins, [c.band_hz for c in comparisons])
    files: dict[str, bytes] = {}
    for key, plot in PLOTS.items():
        with drawing(FILE_SHEET.text, svg_text=False):
            figure = plot.draw(curves, comparisons, FILE_SHEET)
            lines = textwrap.wrap(
                f"{plain(title)} · {plot.caption.lower()}", TITLE_WIDTH, max_lines=3, placeholder=" …"
            )
            figure.suptitle("\n".join(lines), x=0.01, ha="left", weight="bold")
            for extension, write in FORMATS.items():
                files[f"{name}.{key}.{extension}"] = write(figure)
    return files
