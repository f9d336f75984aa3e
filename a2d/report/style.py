"""How every plot looks: colours, line patterns, the frequency axis. Nothing here depends on the user's own settings."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from typing import Any

import matplotlib
import numpy as np
from matplotlib.axes import Axes
from matplotlib.ticker import FixedFormatter, FixedLocator, MaxNLocator, NullFormatter

from a2d.arrays import FloatArray
from a2d.report.text import hertz

DOTS_PER_INCH = 150
PAPER = "#ffffff"
INK = "#1f2328"
FAINT_INK = "#57606a"
GRID = "#d8dee4"
ANALOG = "#a3abb4"  # a broad band that the twins' thin lines run on

# Apart from one another for the three common colour-vision deficiencies too, and at 3:1 or more against the paper:
# tests/report/test_style.py measures both.
TWINS = ("#302180", "#b37e0b", "#3a9ab6", "#7d0009", "#899468", "#5b1d41")
TWINS_ON_DARK = ("#8289f7", "#fdc959", "#33f3ff", "#d35689", "#daf5c1", "#7d680e")

# What a page calls each colour, and what it is on light and on dark paper.
THEME: dict[str, tuple[str, str]] = {
    "paper": (PAPER, "#161a1f"),
    "ink": (INK, "#e8ecf0"),
    "faint": (FAINT_INK, "#a3adb8"),
    "grid": (GRID, "#323a43"),
    "analog": (ANALOG, "#66707c"),
    **{f"twin-{i}": pair for i, pair in enumerate(zip(TWINS, TWINS_ON_DARK, strict=True), 1)},
}

DASHES: tuple[str | tuple[int, tuple[float, ...]], ...] = (
    "solid",
    (0, (6.0, 2.0)),
    (0, (2.0, 1.4)),
    (0, (7.0, 1.6, 1.6, 1.6)),
    (0, (4.0, 1.4, 1.2, 1.4, 1.2, 1.4)),
)
MARKERS = ("o", "s", "^", "D", "v", "P")


@dataclass(frozen=True)
class Sheet:
    """The size of a drawing: width and height of one panel in inches, text size in points, short items a line."""

    width: float
    panel: float
    text: float
    title: bool
    columns: int


FILE_SHEET = Sheet(width=9.0, panel=2.9, text=10.0, title=True, columns=3)
PAGE_SHEET = Sheet(width=8.4, panel=2.5, text=9.5, title=False, columns=3)
PHONE_SHEET = Sheet(width=3.5, panel=2.1, text=8.5, title=False, columns=1)


@contextmanager
def drawing(text_size: float, svg_text: bool) -> Iterator[None]:
    """Matplotlib's own defaults with the house's changes, whatever the user's settings file says; undone afterwards.

    `svg_text` leaves letters as letters (for pages, which bring a font), otherwise they become outlines.
    """
    with matplotlib.rc_context():
        matplotlib.rcdefaults()
        matplotlib.rcParams.update(
            {
                "font.family": ["DejaVu Sans"],
                "font.size": text_size,
                "figure.dpi": DOTS_PER_INCH,
                "text.hinting": "none",  # hinted letters have other widths at other sizes, which upsets the layout
                "text.parse_math": False,
                "text.color": INK,
                "axes.titlesize": text_size + 1.0,
                "axes.titlelocation": "left",
                "axes.titleweight": "bold",
                "axes.titlepad": 7.0,
                "axes.labelsize": text_size,
                "axes.labelcolor": INK,
                "axes.edgecolor": FAINT_INK,
                "axes.facecolor": PAPER,
                "axes.formatter.useoffset": False,
                "axes.grid": True,
                "axes.grid.which": "major",
                "axes.spines.top": False,
                "axes.spines.right": False,
                "grid.color": GRID,
                "grid.linewidth": 0.8,
                "figure.facecolor": PAPER,
                "legend.fontsize": text_size - 0.5,
                "legend.frameon": False,
                "legend.handlelength": 3.2,
                "lines.linewidth": 1.7,
                "xtick.color": FAINT_INK,
                "ytick.color": FAINT_INK,
                "xtick.labelsize": text_size - 0.5,
                "ytick.labelsize": text_size - 0.5,
                "savefig.facecolor": PAPER,
                "svg.fonttype": "none" if svg_text else "path",
                "svg.hashsalt": "a2d",
            }
        )
        yield


def frequency_axis(axes: Axes, low_hz: float, high_hz: float) -> None:
    """A logarithmic axis from `low_hz` to `high_hz` with the labels that the trade uses: 20, 50, 100 ... 20k."""
    axes.set_xscale("log")
    axes.set_xlim(low_hz, high_hz)
    labelled = frequency_ticks(low_hz, high_hz)
    axes.xaxis.set_major_locator(FixedLocator(list(labelled)))
    axes.xaxis.set_major_formatter(FixedFormatter([hertz(f) for f in labelled]))
    axes.xaxis.set_minor_locator(FixedLocator(list(_steps(low_hz, high_hz, range(1, 10)))))
    axes.xaxis.set_minor_formatter(NullFormatter())
    axes.grid(True, axis="x", which="minor", color=GRID, linewidth=0.4, alpha=0.7)
    axes.tick_params(which="minor", length=2.0)


def frequency_ticks(low_hz: float, high_hz: float) -> FloatArray:
    """Round frequencies inside the band, as dense as reads well: 1-2-5, whole digits, decades, or even steps."""
    for digits in ((1, 2, 5), range(1, 10), (1,)):
        ticks = _steps(low_hz, high_hz, digits)
        if 4 <= ticks.size <= 13:
            return ticks
    even = np.asarray(MaxNLocator(6).tick_values(low_hz, high_hz), dtype=np.float64)
    return even[(even >= low_hz) & (even <= high_hz) & (even > 0.0)]


def _steps(low_hz: float, high_hz: float, digits: tuple[int, ...] | range) -> FloatArray:
    decades = np.arange(np.floor(np.log10(low_hz)), np.ceil(np.log10(high_hz)) + 1.0)
    ticks = (np.asarray(digits, dtype=np.float64) * 10.0 ** decades[:, np.newaxis]).ravel()
    slack = 1e-9  # a band's ends are round figures; 10**n is not always exact
    return np.asarray(ticks[(ticks >= low_hz * (1.0 - slack)) & (ticks <= high_hz * (1.0 + slack))])


def twin_color(index: int) -> str:
    """The colour of the twin at the `index`-th rate."""
    return TWINS[index % len(TWINS)]


def twin_style(index: int) -> dict[str, Any]:
    """Colour and line pattern of the twin at the `index`-th rate; 30 different ones."""
    return {"color": twin_color(index), "linestyle": DASHES[index % len(DASHES)]}
