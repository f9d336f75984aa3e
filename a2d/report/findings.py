"""Further results as tables for the report: rounding, headroom inside the cascade, panel controls."""

from __future__ import annotations

import numpy as np

from a2d.compare.control_tables import ControlTable
from a2d.compare.positions import MAGNITUDE
from a2d.conversion import Conversion
from a2d.firmware.deliver import Delivery
from a2d.report.content import Finding
from a2d.report.text import error_text, rate_label
from a2d.wordlength.noise import boundary_peaks, boundary_sums


def findings(conversion: Conversion, delivery: Delivery) -> tuple[Finding, ...]:
    """All tables of a conversion and its delivery; without limits in the design none has a verdict."""
    stated = conversion.design.limits is not None
    controls = tuple(control(table, limits_stated=stated) for table in conversion.controls)
    return rounding(delivery, limits_stated=stated), headroom(delivery), *controls


def control(table: ControlTable, *, limits_stated: bool) -> Finding:
    """A group of controls: the worst position at each rate, what interpolation adds, broken limits."""
    rows = []
    for rate in table.rates:
        k = rate.errors.worst_position()
        worst, at_hz = float(rate.errors.worst[MAGNITUDE, k]), float(rate.errors.at_hz[MAGNITUDE, k])
        broken = f"{int((~rate.within).sum())} of {rate.within.size} positions over" if rate.breaches else "kept"
        rows.append(
            (
                rate_label(rate.sample_rate_hz),
                error_text(worst, "dB", at_hz),
                table.position(k),
                f"{rate.between.worst_db:.2g} dB",
                broken if limits_stated else "none stated",
            )
        )
    size = " × ".join(str(n) for n in table.group.shape)
    return Finding(
        f"Control: {table.group.name}",
        f"Every one of {size} positions was converted and compared; linear interpolation between them adds an error.",
        "Twin minus analog, worst position",
        ("Rate", "Magnitude", "With", "Interpolation adds", "Limits"),
        rows,
        not any(rate.breaches for rate in table.rates) if limits_stated else None,
        tuple(
            f"{rate_label(r.sample_rate_hz)} with {table.position(k)}: {b}" for r in table.rates for k, b in r.breaches
        ),
    )


def rounding(delivery: Delivery, *, limits_stated: bool) -> Finding:
    """Errors of the rounded twins against the analog chain; broken limits make it fail."""
    rows = []
    kept = "kept" if limits_stated else "none stated"
    for twin, comparison, breaches in zip(delivery.twins, delivery.comparisons, delivery.breaches, strict=True):
        errors = (
            error_text(comparison.magnitude_db.worst, "dB", comparison.magnitude_db.at_hz),
            error_text(comparison.phase_deg.worst, "°", comparison.phase_deg.at_hz),
            error_text(comparison.group_delay_us.worst, "µs", comparison.group_delay_us.at_hz),
        )
        rows.append((rate_label(twin.sample_rate_hz), *errors, "; ".join(str(b) for b in breaches) or kept))
    columns = ("Rate", "Magnitude", "Phase", "Group delay", "Limits")
    return Finding(
        "After rounding",
        "These are the errors of the numbers that the header holds.",
        "Twin of the rounded coefficients minus analog, worst case over the band",
        columns,
        rows,
        not any(delivery.breaches) if limits_stated else None,
        delivery.lines,
    )


def headroom(delivery: Delivery) -> Finding:
    """Peak level at each section's output, at each rate, for a sine and for any signal within full scale."""
    twins = delivery.twins
    peaks = [20.0 * np.log10(np.maximum(boundary_peaks(twin.sos), 1e-15)) for twin in twins]
    sums = [20.0 * np.log10(max(float(boundary_sums(twin.sos).max()), 1e-15)) for twin in twins]
    rows: list[tuple[str, ...]] = [
        (name, *(_decibels(peak[i]) for peak in peaks)) for i, name in enumerate(twins[0].names)
    ]
    rows.append(("anywhere, any signal", *(_decibels(level) for level in sums)))
    text = (
        "The level that a full-scale sine of the worst frequency reaches at each section's output, in the order of the "
        "header; the last row is the sum of the impulse response's modulus, which no signal within full scale exceeds. "
        "A fixed-point cascade needs that much room above the input's level."
    )
    columns = ("Output of section", *(rate_label(twin.sample_rate_hz) for twin in twins))
    return Finding("Headroom", text, "Peak level re full scale", columns, rows)


def _decibels(level: float) -> str:
    return f"{level:+.2f} dB".replace("-", "−") if abs(level) >= 0.005 else "0.00 dB"
