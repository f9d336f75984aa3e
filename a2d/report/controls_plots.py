"""Pictures of controls: the family of curves along one, and the twin's error over position and frequency."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from matplotlib import colormaps
from matplotlib.axes import Axes
from matplotlib.cm import ScalarMappable
from matplotlib.colors import BoundaryNorm, ListedColormap, Normalize, TwoSlopeNorm
from matplotlib.figure import Figure

from a2d.analog.axis import Axis
from a2d.arrays import FloatArray, IntArray
from a2d.compare.control_tables import ControlTable, RateTable, describe_position
from a2d.compare.positions import MAGNITUDE, position_levels_db
from a2d.report.graphics import FORMATS
from a2d.report.style import ANALOG, FILE_SHEET, INK, drawing, frequency_axis
from a2d.report.text import hertz_with_unit, plain, rate_label

MOST_CURVES = 13
_POINTS = 400
_RAMP = colormaps["plasma"]  # told apart with every common colour-vision deficiency, and in grey
_MAP = colormaps["PuOr"]
_LAST_INK = 0.82  # of the ramp: what lies beyond is too pale on white
_SMALLEST_DB = 1e-6


def control_plots(tables: tuple[ControlTable, ...], name: str, title: str) -> dict[str, bytes]:
    """Every picture of every control in every format.

    Parameters
    ----------
    tables
        The groups of controls.
    name
        Starts the file names.
    title
        Stands above each picture; any text.

    Returns
    -------
    File name -> content: `NAME.CONTROL.family.svg`, `NAME.CONTROL.error_map.png` and so on.
    """
    files: dict[str, bytes] = {}
    for table in tables:
        for k, axis in enumerate(table.group.axes):
            for key, (caption, draw) in CONTROL_PLOTS.items():
                with drawing(FILE_SHEET.text, svg_text=False):
                    figure = draw(table, table.rates[0], k)
                    heading = f"{plain(title)} · {axis.name}, {caption}"
                    figure.suptitle(heading, x=0.01, ha="left", weight="bold")
                    for extension, write in FORMATS.items():
                        files[f"{name}.{axis.name}.{key}.{extension}"] = write(figure)
    return files


def draw_family(table: ControlTable, rate: RateTable, axis: int) -> Figure:
    """Level along one control, the others where the design has them: analog broad, twin thin."""
    control = table.group.axes[axis]
    chosen = np.unique(np.linspace(0, len(control.knots) - 1, min(MOST_CURVES, len(control.knots))).round().astype(int))
    f = np.geomspace(rate.errors.band_hz[0], rate.errors.band_hz[1], _POINTS)
    rows = _line(table, axis, tuple(a.nearest_to_now for a in table.group.axes))[chosen]
    analog, twin = position_levels_db(rate.pieces, f, rate.sample_rate_hz, rows)
    figure = Figure(figsize=(FILE_SHEET.width, 1.5 * FILE_SHEET.panel), layout="constrained")
    axes = figure.subplots()
    frequency_axis(axes, float(f[0]), float(f[-1]))
    colours = _RAMP(np.linspace(0.0, _LAST_INK, len(chosen)))
    for k, level in enumerate(analog):
        axes.plot(f, level, color=ANALOG, linewidth=4.0, label="analog" if k == 0 else None)
    for level, colour in zip(twin, colours, strict=True):
        axes.plot(f, level, color=colour, linewidth=1.4)
    axes.plot([], [], color=INK, linewidth=1.4, label=f"twin at {rate_label(rate.sample_rate_hz)}, a colour a position")
    axes.set_ylabel("Level (dB)")
    axes.set_xlabel(_with_others("Frequency (Hz)", table, axis, tuple(a.nearest_to_now for a in table.group.axes)))
    axes.legend(loc="lower left", bbox_to_anchor=(0.0, 1.0), ncols=2, borderaxespad=0.2)
    _position_bar(figure, axes, control, chosen, colours)
    return figure


def draw_error_map(table: ControlTable, rate: RateTable, axis: int) -> Figure:
    """The twin's level error over frequency and position, through the group's worst position."""
    control = table.group.axes[axis]
    worst = rate.errors.worst_position()
    through = tuple(int(i) for i in np.unravel_index(worst, table.group.shape))
    f = np.geomspace(rate.errors.band_hz[0], rate.errors.band_hz[1], _POINTS)
    rows = _line(table, axis, through)
    analog, twin = position_levels_db(rate.pieces, f, rate.sample_rate_hz, rows)
    error = twin - analog
    figure = Figure(figsize=(FILE_SHEET.width, 1.5 * FILE_SHEET.panel), layout="constrained")
    axes = figure.subplots()
    frequency_axis(axes, float(f[0]), float(f[-1]))
    axes.grid(False)
    axes.grid(False, which="minor")
    size = max(float(np.abs(error).max()), _SMALLEST_DB)
    edges = _edges(np.arange(float(len(rows))) if control.control.stepped else control.knots)
    mesh = axes.pcolormesh(_edges(f), edges, error, cmap=_MAP, norm=TwoSlopeNorm(0.0, -size, size), shading="flat")
    mesh.set_rasterized(True)
    at_hz = float(rate.errors.at_hz[MAGNITUDE, worst])
    value = float(rate.errors.worst[MAGNITUDE, worst])
    place = float(through[axis] if control.control.stepped else control.knots[through[axis]])
    label = f"worst: {value:+.3g} dB at {hertz_with_unit(at_hz)}, {table.position(worst)}".replace("-", "−")
    axes.plot([at_hz], [place], "o", color=INK, markerfacecolor="none", markersize=9.0, clip_on=False, label=label)
    axes.legend(loc="lower left", bbox_to_anchor=(0.0, 1.0), borderaxespad=0.2, handlelength=1.2)
    if control.control.stepped:
        axes.set_yticks(np.arange(len(rows)), [str(k + 1) for k in range(len(rows))])
    axes.set_ylabel(_scale_label(control))
    axes.set_xlabel(_with_others("Frequency (Hz)", table, axis, through))
    figure.colorbar(mesh, ax=axes, label=f"Twin at {rate_label(rate.sample_rate_hz)} − analog (dB)", pad=0.02)
    return figure


CONTROL_PLOTS: dict[str, tuple[str, Callable[[ControlTable, RateTable, int], Figure]]] = {
    "family": ("curves along its travel", draw_family),
    "error_map": ("error of the twin", draw_error_map),
}
"""By name: caption and function."""


def _line(table: ControlTable, axis: int, through: tuple[int, ...]) -> IntArray:
    """Flat indices of all positions of one axis, the other axes at `through`."""
    rows = []
    for k in range(table.group.shape[axis]):
        index = (*through[:axis], k, *through[axis + 1 :])
        rows.append(int(np.ravel_multi_index(index, table.group.shape)))
    return np.array(rows, dtype=np.int64)


def _with_others(text: str, table: ControlTable, axis: int, through: tuple[int, ...]) -> str:
    """The label, with where the group's other controls stand."""
    others = [
        describe_position(other.name, other.unit, float(other.knots[i]), other.control.stepped)
        for k, (other, i) in enumerate(zip(table.group.axes, through, strict=True))
        if k != axis
    ]
    return f"{text}; {', '.join(others)}" if others else text


def _position_bar(figure: Figure, axes: Axes, control: Axis, chosen: IntArray, colours: FloatArray) -> None:
    """A bar that says which colour is which position."""
    knots = control.knots[chosen]
    if control.control.stepped or len(chosen) < 6:
        count = len(chosen)
        norm: Normalize = BoundaryNorm(np.arange(count + 1) - 0.5, count)
        bar = figure.colorbar(_mappable(norm, colours), ax=axes, ticks=np.arange(count), pad=0.02)
        bar.ax.set_yticklabels([f"{k + 1:g}" if control.control.stepped else f"{v:.4g}" for k, v in enumerate(knots)])
    else:
        norm = BoundaryNorm(_edges(np.sort(knots)), len(chosen))
        ordered = colours if knots[-1] > knots[0] else colours[::-1]
        bar = figure.colorbar(
            _mappable(norm, ordered), ax=axes, ticks=np.sort(knots)[:: max(1, len(knots) // 7)], pad=0.02
        )
        bar.ax.yaxis.set_major_formatter(lambda value, _: f"{value:.4g}".replace("-", "−"))
    bar.set_label(_scale_label(control))


def _mappable(norm: Normalize, colours: FloatArray) -> ScalarMappable:
    return ScalarMappable(norm, ListedColormap([tuple(c) for c in colours]))


def _scale_label(control: Axis) -> str:
    if control.control.stepped:
        return f"{control.name}, position"
    return f"{control.name} ({control.unit})" if control.unit else f"{control.name}, travel"


def _edges(centres: FloatArray) -> FloatArray:
    """The borders between cells around `centres`."""
    middle = 0.5 * (centres[1:] + centres[:-1])
    first, last = centres[0] - (middle[0] - centres[0]), centres[-1] + (centres[-1] - middle[-1])
    return np.concatenate([[first], middle, [last]])
