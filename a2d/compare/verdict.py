"""Errors against stated limits."""

from __future__ import annotations

from dataclasses import dataclass

from a2d.compare.errors import Comparison, Worst
from a2d.design.model import Limits


@dataclass(frozen=True)
class Breach:
    """One limit that is broken.

    Attributes
    ----------
    what
        `magnitude`, `phase` or `group delay`.
    unit
        The unit of `limit` and `worst`.
    limit
        The largest modulus allowed.
    worst, at_hz
        The error found, with its sign, and where.
    """

    what: str
    unit: str
    limit: float
    worst: float
    at_hz: float

    def __str__(self) -> str:
        return (
            f"{self.what} error {self.worst:+.4g} {self.unit} at {self.at_hz:.5g} Hz "
            f"(allowed {self.limit:.4g} {self.unit} either way)"
        )


def judge(comparison: Comparison, limits: Limits | None) -> tuple[Breach, ...]:
    """The limits that a comparison breaks; none means within limits, whether or not any are stated."""
    if limits is None:
        return ()
    group_delay_us = None if limits.group_delay is None else 1e6 * limits.group_delay
    rows: tuple[tuple[str, str, float | None, Worst], ...] = (
        ("magnitude", "dB", limits.magnitude, comparison.magnitude_db),
        ("phase", "deg", limits.phase, comparison.phase_deg),
        ("group delay", "µs", group_delay_us, comparison.group_delay_us),
    )
    return tuple(
        Breach(what, unit, float(limit), found.worst, found.at_hz)
        for what, unit, limit, found in rows
        if limit is not None and not abs(found.worst) <= limit
    )
