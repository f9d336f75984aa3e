"""Magnitude, error, phase and group delay over frequency."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.ticker import FuncFormatter, LogLocator, MaxNLocator, NullLocator

from a2d.compare.errors import Comparison, Worst
from a2d.report.style import ANALOG, FAINT_INK, INK, MARKERS, Sheet, frequency_axis, twin_style
from a2d.report.text import error_text, grouped, rate_label
from a2d.report.traces import Curves, Traces

DEEPEST_DB = 120.0  # of a magnitude plot, below its highest point
NOTCH_SHARE, NOTCH_ROOM_DB = 0.03, 20.0  # a dip narrower than this share of the axis is drawn this much deeper at most
SMALLEST_ERROR_DB = 1e-6  # at the bottom of the logarithmic error panel; nobody needs to see the rounding of doubles
LONG_ENTRY = 25  # letters
DEGREE_STEPS = [1, 1.5, 3, 4.5, 9, 10]


def draw_magnitude(traces: Traces, comparisons: Sequence[Comparison], sheet: Sheet) -> Figure:
    """Analog and twins in dB, with the straight-line approximation."""
    del comparisons
    figure, (axes,) = _panels(traces, sheet, 1, stretch=1.45)
    _curves(axes, traces, "magnitude_db")
    axes.plot(
        traces.analog.f_hz,
        traces.asymptote_db,
        color=FAINT_INK,
        linewidth=0.9,
        linestyle=(0, (1.0, 2.0)),
        label="straight-line asymptotes",
    )
    _magnitude_limits(axes, traces)
    axes.set_ylabel("Magnitude (dB)")
    _legend(axes, sheet)
    return figure


def draw_error(traces: Traces, comparisons: Sequence[Comparison], sheet: Sheet) -> Figure:
    """Twin against analog in dB: as it is, and its size on a logarithmic axis."""
    figure, (linear, logarithmic) = _panels(traces, sheet, 2)
    _errors(linear, traces, "magnitude_db", [c.magnitude_db for c in comparisons], "dB")
    _at_least(linear, SMALLEST_ERROR_DB)
    linear.set_ylabel("Twin − analog (dB)")
    _legend(linear, sheet)
    for index, twin in enumerate(traces.twins):
        size = np.maximum(np.abs(twin.error.magnitude_db), SMALLEST_ERROR_DB / 10.0)
        logarithmic.plot(twin.error.f_hz, size, **twin_style(index))
    _logarithmic(logarithmic, [c.magnitude_db.worst for c in comparisons])
    logarithmic.set_ylabel("Size of the error (dB)")
    return figure


def draw_phase(traces: Traces, comparisons: Sequence[Comparison], sheet: Sheet) -> Figure:
    """Continuous phase in degrees, and its error."""
    figure, (phase, error) = _panels(traces, sheet, 2)
    _curves(phase, traces, "phase_deg")
    phase.set_ylabel("Phase (degrees)")
    _errors(error, traces, "phase_deg", [c.phase_deg for c in comparisons], "°")
    _at_least(error, 1e-6)
    error.set_ylabel("Twin − analog (degrees)")
    for axes in (phase, error):
        low, high = axes.get_ylim()
        if high - low > 60.0:
            axes.yaxis.set_major_locator(MaxNLocator(7, steps=DEGREE_STEPS))
        _legend(axes, sheet)
    return figure


def draw_group_delay(traces: Traces, comparisons: Sequence[Comparison], sheet: Sheet) -> Figure:
    """Group delay in µs, and its error."""
    figure, (delay, error) = _panels(traces, sheet, 2)
    _curves(delay, traces, "group_delay_us")
    delay.set_ylabel("Group delay (µs)")
    _errors(error, traces, "group_delay_us", [c.group_delay_us for c in comparisons], "µs")
    for axes in (delay, error):
        _at_least(axes, 1e-6)
        axes.yaxis.set_major_formatter(FuncFormatter(lambda value, _: grouped(value)))
        _legend(axes, sheet)
    error.set_ylabel("Twin − analog (µs)")
    return figure


def _panels(traces: Traces, sheet: Sheet, count: int, stretch: float = 1.0) -> tuple[Figure, list[Axes]]:
    """`count` panels one above the other over the same frequency axis."""
    top = 0.35 if sheet.title else 0.0
    legends = 0.021 * sheet.text * count * -(-(len(traces.twins) + 2) // sheet.columns)
    height = count * sheet.panel * stretch + legends + top
    figure = Figure(figsize=(sheet.width, height), layout="constrained")
    grid = figure.subplots(count, 1, sharex=True, squeeze=False)[:, 0]
    f = traces.analog.f_hz
    for axes in grid:
        frequency_axis(axes, float(f[0]), float(f[-1]))
    grid[-1].set_xlabel("Frequency (Hz)")
    return figure, list(grid)


def _curves(axes: Axes, traces: Traces, quantity: str) -> None:
    """The analog curve as a broad band, each twin as a thin line on it."""
    axes.plot(traces.analog.f_hz, getattr(traces.analog, quantity), color=ANALOG, linewidth=5.0, label="analog")
    for index, twin in enumerate(traces.twins):
        label = f"twin at {rate_label(twin.sample_rate_hz)}"
        axes.plot(twin.curves.f_hz, getattr(twin.curves, quantity), label=label, **twin_style(index))


def _errors(axes: Axes, traces: Traces, quantity: str, worst: Sequence[Worst], unit: str) -> None:
    """Each twin's error, with its worst point marked and named."""
    axes.axhline(0.0, color=FAINT_INK, linewidth=0.8)
    for index, (twin, point) in enumerate(zip(traces.twins, worst, strict=True)):
        curve: Curves = twin.error
        label = f"{rate_label(twin.sample_rate_hz)}: worst {error_text(point.worst, unit, point.at_hz)}"
        axes.plot(
            np.append(curve.f_hz, np.nan),
            np.append(getattr(curve, quantity), np.nan),
            label=label,
            **twin_style(index),
        )
        axes.plot(
            [point.at_hz],
            [point.worst],
            marker=MARKERS[index % len(MARKERS)],
            markersize=6.5,
            markeredgecolor=INK,
            markeredgewidth=0.8,
            color=twin_style(index)["color"],
            clip_on=False,
            zorder=4,
        )


def _magnitude_limits(axes: Axes, traces: Traces) -> None:
    """From above the highest point down to the lowest, but not to the bottom of a notch; 6 dB at least."""
    levels = np.concatenate([traces.analog.magnitude_db, *(t.curves.magnitude_db for t in traces.twins)])
    high = float(levels.max())
    low = float(max(levels.min(), np.quantile(levels, NOTCH_SHARE) - NOTCH_ROOM_DB, high - DEEPEST_DB))
    margin = max(0.06 * (high - low), (6.0 - (high - low)) / 2.0)
    axes.set_ylim(low - margin, high + margin)


def _at_least(axes: Axes, half_span: float) -> None:
    """Keep the rounding of doubles from filling a panel."""
    low, high = axes.get_ylim()
    axes.set_ylim(min(low, -half_span), max(high, half_span))


def _logarithmic(axes: Axes, worst: Sequence[float]) -> None:
    top = max(*(abs(w) for w in worst), 10.0 * SMALLEST_ERROR_DB, 0.0)
    axes.set_yscale("log")
    axes.set_ylim(max(SMALLEST_ERROR_DB, 1e-6 * top), 2.0 * top)
    axes.yaxis.set_major_locator(LogLocator(10.0, numticks=9))
    axes.yaxis.set_minor_locator(NullLocator())
    axes.yaxis.set_major_formatter(FuncFormatter(lambda value, _: f"{value:.10f}".rstrip("0").rstrip(".")))


def _legend(axes: Axes, sheet: Sheet) -> None:
    """Above the panel, so that it never hides a curve; long entries get a column fewer."""
    handles, labels = axes.get_legend_handles_labels()
    columns = max(1, sheet.columns - any(len(label) > LONG_ENTRY for label in labels))
    axes.legend(
        handles,
        labels,
        loc="lower left",
        bbox_to_anchor=(0.0, 1.0),
        ncols=columns,
        borderaxespad=0.2,
        columnspacing=1.4,
    )
