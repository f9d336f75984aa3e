"""The report: one self-contained page that an engineer shows to others."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from a2d.compare.errors import Worst
from a2d.conversion import Conversion, Judged
from a2d.design.model import Limits
from a2d.firmware.manifest import tool_name
from a2d.report.by_method import Attempt, attempts
from a2d.report.content import Extras, Finding
from a2d.report.echo import echo
from a2d.report.figures import page_figures
from a2d.report.sources import CAUTIONS, METHOD_SOURCES, OTHER_SOURCES
from a2d.report.style import THEME
from a2d.report.template import render
from a2d.report.text import listed, plain, rate_label
from a2d.report.transfer import transfers


@dataclass(frozen=True)
class Verdict:
    """The first thing on the page: `good`, `bad` or `open` (no limits), a sentence, what is broken, what would help."""

    state: str
    sentence: str
    lines: tuple[str, ...] = ()
    advice: tuple[str, ...] = ()


def report_page(conversion: Conversion, sha256: str, extras: Extras | None = None) -> bytes:
    """The report of a conversion as HTML with everything inside: no script, no request to anywhere.

    Parameters
    ----------
    conversion
        The judged twins.
    sha256
        Of the design file's bytes.
    extras
        Rounding, headroom and spread results, rendered audio, notes; whatever there is.
    """
    table, found = conversion.design.design, extras or Extras()
    return render(
        "page.html",
        title=plain(table.title or table.name),
        name=table.name,
        sha256=sha256,
        tool=tool_name(),
        verdict=verdict(conversion, found.findings),
        conversion=conversion,
        limits=conversion.design.limits,
        errors=[(judged, error_rows(judged, conversion.design.limits)) for judged in conversion.judged],
        echo=echo(conversion.design),
        transfers=transfers(conversion.chain),
        figures=page_figures(conversion),
        attempts=_by_method(conversion),
        used=_methods_used(conversion),
        extras=found,
        method_sources=METHOD_SOURCES,
        other_sources=OTHER_SOURCES,
        cautions=CAUTIONS,
        theme=THEME,
    )


def verdict(conversion: Conversion, findings: Sequence[Finding] = ()) -> Verdict:
    """What to say first: the twins' own limits, then whatever else was examined and failed."""
    lines = [f"{rate_label(j.twin.sample_rate_hz)}: {breach}" for j in conversion.judged for breach in j.breaches]
    advice = [f"{rate_label(j.twin.sample_rate_hz)}: {remedy}" for j in conversion.judged for remedy in j.advice]
    failed = [finding.title for finding in findings if finding.passed is False]
    lines += [f"{plain(title)}: not within the limits, see there" for title in failed]
    if conversion.design.limits is None and not failed:
        return Verdict("open", "No limits are stated in the design, so there is no verdict. The errors are below.")
    if not lines:
        return Verdict("good", "Within the stated limits at every sample rate.")
    rates = [rate_label(j.twin.sample_rate_hz) for j in conversion.judged if j.breaches]
    sentence = f"Over the stated limits at {listed(rates)}." if rates else "A further check failed."
    return Verdict("bad", sentence, tuple(lines), tuple(advice))


@dataclass(frozen=True)
class ErrorRow:
    """One line of the first table."""

    what: str
    worst: Worst
    unit: str
    limit: float | None

    @property
    def broken(self) -> bool:
        """Whether a limit is stated and not kept."""
        return self.limit is not None and not abs(self.worst.worst) <= self.limit


def error_rows(judged: Judged, limits: Limits | None) -> tuple[ErrorRow, ...]:
    """The errors of one rate beside their limits."""
    c = judged.comparison
    magnitude, phase, delay = (limits.magnitude, limits.phase, limits.group_delay) if limits else (None, None, None)
    return (
        ErrorRow("Magnitude", c.magnitude_db, "dB", magnitude),
        ErrorRow("Phase", c.phase_deg, "°", phase),
        ErrorRow("Phase without the delay", c.phase_without_delay_deg, "°", None),
        ErrorRow("Group delay", c.group_delay_us, "µs", None if delay is None else 1e6 * delay),
    )


def _by_method(conversion: Conversion) -> dict[str, list[Attempt]]:
    """method -> attempts in the order of the rates."""
    rows: dict[str, list[Attempt]] = {}
    for attempt in attempts(conversion):
        rows.setdefault(attempt.method, []).append(attempt)
    return rows


def _methods_used(conversion: Conversion) -> tuple[str, ...]:
    return tuple(dict.fromkeys(m for judged in conversion.judged for m in judged.twin.methods))
