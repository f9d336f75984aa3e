"""The plots inside a page: a wide and a narrow drawing of each, and what they show in words."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from markupsafe import Markup

from a2d.compare.errors import Comparison, Worst
from a2d.conversion import Conversion
from a2d.report.inline import inline_svg
from a2d.report.plots import PLOTS
from a2d.report.style import PAGE_SHEET, PHONE_SHEET, drawing
from a2d.report.text import error_text, hertz_with_unit, rate_label, signed
from a2d.report.traces import LOWEST_DB, Traces, traces


@dataclass(frozen=True)
class PageFigure:
    """A plot of the page: its key and caption, what it shows in words, and the two drawings."""

    key: str
    caption: str
    description: str
    wide: Markup
    narrow: Markup


def page_figures(conversion: Conversion) -> tuple[PageFigure, ...]:
    """All plots of a conversion as inline SVG."""
    twins = [judged.twin for judged in conversion.judged]
    comparisons = [judged.comparison for judged in conversion.judged]
    curves = traces(conversion.chain, twins, [c.band_hz for c in comparisons])
    return tuple(_figure(key, curves, comparisons) for key in PLOTS)


def _figure(key: str, curves: Traces, comparisons: Sequence[Comparison]) -> PageFigure:
    plot, description = PLOTS[key], DESCRIPTIONS[key](curves, comparisons)
    drawn = {}
    for size, sheet in (("wide", PAGE_SHEET), ("narrow", PHONE_SHEET)):
        with drawing(sheet.text, svg_text=True):
            figure = plot.draw(curves, comparisons, sheet)
            drawn[size] = inline_svg(figure, f"{key}-{size}", plot.caption, description)
    return PageFigure(key, plot.caption, description, drawn["wide"], drawn["narrow"])


def _magnitude(curves: Traces, comparisons: Sequence[Comparison]) -> str:
    f, level = curves.analog.f_hz, curves.analog.magnitude_db
    high, low = int(level.argmax()), int(level.argmin())
    return (
        f"Magnitude in decibels from {hertz_with_unit(f[0])} to {hertz_with_unit(f[-1])}. The analog response is "
        f"highest at {hertz_with_unit(f[high])} with {_level(level[high])} and lowest at {hertz_with_unit(f[low])} "
        f"with {_level(level[low])}. " + _worst(curves, [c.magnitude_db for c in comparisons], "dB")
    )


def _level(level_db: float) -> str:
    """A level, or that there is none."""
    return f"{signed(level_db)} dB" if level_db > LOWEST_DB else "no output at all"


def _error(curves: Traces, comparisons: Sequence[Comparison]) -> str:
    return "Magnitude of each twin minus that of the analog chain, plain above and its size on a logarithmic scale " + (
        "below. " + _worst(curves, [c.magnitude_db for c in comparisons], "dB")
    )


def _phase(curves: Traces, comparisons: Sequence[Comparison]) -> str:
    first, last = curves.analog.phase_deg[[0, -1]]
    return (
        f"Continuous phase above, error below. The analog phase goes from {signed(first)} to {signed(last)} degrees. "
        + _worst(curves, [c.phase_deg for c in comparisons], "degrees")
    )


def _group_delay(curves: Traces, comparisons: Sequence[Comparison]) -> str:
    return "Group delay in microseconds above, error below. " + _worst(
        curves, [c.group_delay_us for c in comparisons], "microseconds"
    )


def _poles_zeros(curves: Traces, comparisons: Sequence[Comparison]) -> str:
    del comparisons
    poles = int(curves.roots.is_pole.sum())
    zeros = len(curves.roots.is_pole) - poles
    return (
        f"{poles} poles and {zeros} finite zeros of H(s) on a logarithmic s plane, with those of the twins at fs times "
        "the logarithm of z, and the upper half of the unit circle for each rate. The table of sections lists them."
    )


DESCRIPTIONS: dict[str, Callable[[Traces, Sequence[Comparison]], str]] = {
    "magnitude": _magnitude,
    "error": _error,
    "phase": _phase,
    "group_delay": _group_delay,
    "poles_zeros": _poles_zeros,
}


def _worst(curves: Traces, found: Sequence[Worst], unit: str) -> str:
    parts = [
        f"at {rate_label(twin.sample_rate_hz)} {error_text(worst.worst, unit, worst.at_hz)}"
        for twin, worst in zip(curves.twins, found, strict=True)
    ]
    return f"Worst error of the twin: {'; '.join(parts)}."
