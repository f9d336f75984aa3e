"""When a limit is broken: what would keep it, tried out and measured."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from a2d.analog.chain import AnalogChain
from a2d.arrays import FloatArray
from a2d.compare.errors import Comparison, compare
from a2d.compare.masks import allowed_of, judge_response
from a2d.compare.verdict import Breach, judge
from a2d.design.model import Limits
from a2d.digital.twin import Twin, make_twin
from a2d.errors import A2dError

MOST_EXTRA = 2
"""Sections more than the chain has that are tried."""


@dataclass(frozen=True)
class Remedy:
    """One change that was tried.

    Attributes
    ----------
    change
        What to write in the design file.
    sections
        How many sections a twin has then.
    comparison
        The errors with it.
    breaches
        The limits that are still broken; empty where the change keeps them all.
    """

    change: str
    sections: int
    comparison: Comparison
    breaches: tuple[Breach, ...]

    def __str__(self) -> str:
        c = self.comparison.magnitude_db
        found = f"magnitude error {c.worst:+.3g} dB at {c.at_hz:.5g} Hz"
        if self.breaches:
            return f"{self.change} comes nearer: {'; '.join(str(b) for b in self.breaches)}"
        return f"{self.change} would keep it: {found}, {self.sections} sections"


@dataclass(frozen=True, eq=False)
class Attempt:
    """How a twin was made; fields as the parameters of `make_twin`."""

    methods: tuple[str, ...]
    match_hz: FloatArray
    scope: str = "section"
    extra_sections: int = 0
    weight_phase: float = 0.0


def remedies(
    chain: AnalogChain, rate: float, limits: Limits, made: Attempt, broken: tuple[Breach, ...]
) -> tuple[Remedy, ...]:
    """The first change of method or scope that keeps the limits, and a doubled rate where that does.

    Each is tried and compared, from the simplest on. Where none keeps them, the one that comes nearest, if any comes
    nearer than the twin whose limits are `broken`; the doubled rate where only that does.
    """
    kept, tried = [], []
    in_phase = not any(breach.unit == "dB" for breach in broken)
    for change, attempt in _changes_of_phase(made) if in_phase else _changes(made):
        remedy = _try(chain, rate, limits, attempt, change)
        if remedy is not None:
            tried.append(remedy)
            if not remedy.breaches:
                kept.append(remedy)
                break
    doubled = _try(chain, 2.0 * rate, limits, made, f"a rate of {2.0 * rate:g} Hz")
    if doubled is not None and not doubled.breaches:
        kept.append(doubled)
    nearer = [remedy for remedy in tried if _passed(remedy.breaches) < _passed(broken)]
    if doubled is not None and not nearer and _passed(doubled.breaches) < _passed(broken):
        nearer = [doubled]
    if kept or not nearer:
        return tuple(kept)
    return (min(nearer, key=lambda remedy: _passed(remedy.breaches)),)


def _changes(made: Attempt) -> Iterator[tuple[str, Attempt]]:
    """Methods, then scopes, from the simplest on, without what is so already."""
    count = len(made.methods)
    for method in ("magnitude_matched", "minimax"):
        if set(made.methods) != {method} and made.scope == "section":
            yield f'method = "{method}"', Attempt((method,) * count, made.match_hz, weight_phase=made.weight_phase)
    first = 0 if made.scope == "section" and count > 1 else made.extra_sections + 1
    for extra in range(first, first + MOST_EXTRA + 1):
        text = 'method = "minimax", scope = "chain"' + (f", extra_sections = {extra}" if extra else "")
        yield text, Attempt(("minimax",) * count, made.match_hz, "chain", extra, made.weight_phase)


def _changes_of_phase(made: Attempt) -> Iterator[tuple[str, Attempt]]:
    """Fits in which the phase counts, and the bilinear transform, whose phase is often the better one."""
    count = len(made.methods)
    for weight in (0.3, 1.0, 3.0):
        text = f'method = "minimax", weight_phase = {weight:g}'
        yield text, Attempt(("minimax",) * count, made.match_hz, weight_phase=weight)
    if set(made.methods) != {"bilinear"}:
        yield 'method = "bilinear"', Attempt(("bilinear",) * count, made.match_hz)


def _try(chain: AnalogChain, rate: float, limits: Limits, attempt: Attempt, change: str) -> Remedy | None:
    """The change with its errors; None where it cannot be made."""
    try:
        twin = twin_of(chain, rate, limits, attempt)
    except A2dError:
        return None
    comparison = compare(chain, twin, stated_band(limits))
    return Remedy(change, len(twin), comparison, verdict(chain, twin, comparison, limits))


def twin_of(chain: AnalogChain, rate: float, limits: Limits | None, attempt: Attempt) -> Twin:
    """The twin of an attempt."""
    uneven = limits is not None and (limits.mask is not None or bool(limits.table))
    needs_limits = "auto" in attempt.methods or attempt.scope != "section" or uneven
    return make_twin(
        chain,
        rate,
        method=attempt.methods,
        match_hz=attempt.match_hz,
        band_hz=stated_band(limits),
        scope=attempt.scope,
        extra_sections=attempt.extra_sections,
        weight_phase=attempt.weight_phase,
        allowed=allowed_of(limits, chain, rate) if needs_limits else None,
    )


def verdict(chain: AnalogChain, twin: Twin, comparison: Comparison, limits: Limits | None) -> tuple[Breach, ...]:
    """All limits that a twin breaks: of its errors, of its mask and its table."""
    return (*judge(comparison, limits), *judge_response(chain, twin, limits))


def stated_band(limits: Limits | None) -> tuple[float, float] | None:
    """The band that the limits state, Hz."""
    return None if limits is None or limits.band is None else (float(limits.band[0]), float(limits.band[1]))


def _passed(breaches: tuple[Breach, ...]) -> float:
    """By what factor the worst limit is passed; 0 where none is."""
    return max((abs(b.worst) / max(abs(b.limit), 1e-30) for b in breaches), default=0.0)
