"""What the terminal says of controls: the worst position at each rate, and what interpolation is worth."""

from __future__ import annotations

from rich.console import RenderableType

from a2d.commands.terminal import hertz, table
from a2d.compare.control_tables import ControlTable
from a2d.compare.positions import MAGNITUDE
from a2d.conversion import Conversion


def controls_table(tables: tuple[ControlTable, ...]) -> RenderableType | None:
    """One row a group of controls and sample rate; None without controls."""
    rows = []
    for control in tables:
        size = " x ".join(str(n) for n in control.group.shape)
        for rate in control.rates:
            k = rate.errors.worst_position()
            worst, at_hz = rate.errors.worst[MAGNITUDE, k], rate.errors.at_hz[MAGNITUDE, k]
            rows.append(
                [
                    f"{control.group.name}: {size}",
                    hertz(rate.sample_rate_hz),
                    f"{worst:+.3g} dB at {hertz(float(at_hz))}",
                    control.position(k),
                    f"{rate.between.worst_db:.2g} dB",
                ]
            )
    columns = ["control", "rate", "worst magnitude error", "with", "interpolation adds"]
    return table("Controls: twin minus analog at every position", columns, rows, left=2) if rows else None


def control_breaches(tables: tuple[ControlTable, ...]) -> list[str]:
    """Each broken limit with its worst position."""
    return [
        f"limit broken at {rate.sample_rate_hz:g} Hz with {control.position(k)}: {breach}"
        for control in tables
        for rate in control.rates
        for k, breach in rate.breaches
    ]


def control_notes(conversion: Conversion) -> list[str]:
    """What the reader of a table should know."""
    notes = [
        f"{control.group.name}: at {control.exchanged} positions the order of the sections is not continuous "
        "(roots of two sections pair up there), and interpolation next to them is as inexact as stated"
        for control in conversion.controls
        if control.exchanged
    ]
    limits = conversion.design.limits
    if conversion.controls and limits is not None and (limits.mask is not None or limits.table):
        notes.append("controls: the mask of [limits] is judged at the design's own setting only")
    return notes
