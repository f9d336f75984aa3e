"""Poles and zeros: all on one logarithmic s plane, and those of each twin in the upper half of the unit circle."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from a2d.compare.errors import Comparison
from a2d.report.roots import Roots
from a2d.report.s_plane import S_PLANE, bare, draw_s_plane, mark_roots
from a2d.report.style import FAINT_INK, GRID, INK, Sheet, twin_color
from a2d.report.text import hertz, plain, rate_label
from a2d.report.traces import Traces

RIM_HZ = (1e3, 2e3, 5e3, 10e3, 20e3, 40e3, 80e3)
FAR_OUT = 1.35  # |z| of a zero that the unit circle's panel leaves out, and counts in its title


def draw_roots(traces: Traces, comparisons: Sequence[Comparison], sheet: Sheet) -> Figure:
    """The s plane above, the z planes below, a key to the section numbers at the foot."""
    del comparisons
    columns = sheet.columns
    rows = -(-len(traces.twins) // columns)
    key = _key(traces.names, int(11.0 * sheet.width))
    heights = [S_PLANE * sheet.panel, *[0.48 * sheet.width / columns + 0.3] * rows]
    foot = 0.018 * sheet.text * (1 + key.count("\n")) + 0.35
    figure = Figure(figsize=(sheet.width, sum(heights) + foot), layout="constrained")
    grid = figure.add_gridspec(len(heights), columns, height_ratios=heights)
    draw_s_plane(figure.add_subplot(grid[0, :]), traces, sheet)
    for index, twin in enumerate(traces.twins):
        axes = figure.add_subplot(grid[1 + index // columns, index % columns])
        _z_plane(axes, twin.roots, twin.sample_rate_hz, index)
    figure.supxlabel(key, x=0.01, ha="left", fontsize=sheet.text - 1.0, color=INK)
    return figure


def _key(names: Sequence[str], width: int) -> str:
    """`1 low cut · 2 body · ...`, broken into lines of at most `width` characters where names allow."""
    lines = [""]
    for number, name in enumerate(names, 1):
        entry = f"{number} {plain(name)}"
        if lines[-1] and len(lines[-1]) + len(entry) + 3 > width:
            lines.append("")
        lines[-1] += f" · {entry}" if lines[-1] else entry
    return "\n".join(lines)


def _z_plane(axes: Axes, roots: Roots, sample_rate_hz: float, index: int) -> None:
    turn = np.linspace(0.0, np.pi, 181)
    axes.plot(np.cos(turn), np.sin(turn), color=FAINT_INK, linewidth=0.9)
    axes.plot([-1.0, 1.0], [0.0, 0.0], color=FAINT_INK, linewidth=0.9, zorder=0)
    for f in RIM_HZ:
        angle = 2.0 * np.pi * f / sample_rate_hz
        if 0.2 < angle < 0.97 * np.pi:
            x, y = np.cos(angle), np.sin(angle)
            axes.plot([0.0, x], [0.0, y], color=GRID, linewidth=0.8, zorder=0)
            side = "left" if x > 0.15 else "right" if x < -0.15 else "center"
            axes.text(1.05 * x, 1.05 * y, hertz(f), color=FAINT_INK, ha=side, va="bottom")
    near = np.abs(roots.values) < FAR_OUT
    shown = roots.where(near)
    mark_roots(axes, shown.values, shown, twin_color(index), 1.5, 7.0)
    far = int(np.sum(~near & (roots.values.imag >= 0.0)))
    axes.set_title(f"z plane, {rate_label(sample_rate_hz)}" + (f" ({far} further out)" if far else ""))
    axes.set_aspect("equal")
    axes.set_xlim(-1.36, 1.36)
    axes.set_ylim(-0.1, 1.2)
    bare(axes)
