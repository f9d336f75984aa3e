"""The banks of a design that are kept as parallel twins: made, compared, and as C."""

from __future__ import annotations

from dataclasses import dataclass

from a2d.analog.bank import Bank, scaled_bank
from a2d.analog.build import bank_of
from a2d.compare.errors import band_of
from a2d.compare.parallel import BankComparison, compare_bank
from a2d.compare.verdict import Breach
from a2d.design.hardware import BankSection, CircuitSection, NetworkSection
from a2d.design.model import Design, Limits
from a2d.digital.parallel import ParallelTwin, make_parallel_twin


@dataclass(frozen=True, eq=False)
class JudgedBank:
    """A bank's parallel twins in the order of the sample rates, with their errors.

    Attributes
    ----------
    name
        The section's.
    bank
        The analog bands and weights, the section's factor included.
    twins, comparisons, breaches
        One a sample rate; the limits of magnitude and phase that the parallel form of the bank alone breaks.
    """

    name: str
    bank: Bank
    twins: tuple[ParallelTwin, ...]
    comparisons: tuple[BankComparison, ...]
    breaches: tuple[tuple[Breach, ...], ...]


def parallel_banks(design: Design) -> tuple[JudgedBank, ...]:
    """The parallel twins of every section with `form = "parallel"`."""
    wanted = [s for s in design.sections if isinstance(s, BankSection) and s.form == "parallel"]
    return tuple(_judged(design, section) for section in wanted)


def _judged(design: Design, section: BankSection) -> JudgedBank:
    bank = scaled_bank(bank_of(section), float(section.factor))
    method = [band.method or section.method or design.design.method for band in section.band]
    match = [band.match if band.match is not None else section.match for band in section.band]
    found = [isinstance(band, (NetworkSection, CircuitSection)) for band in section.band]
    stated = design.limits.band if design.limits is not None else None
    weight_phase = float(design.design.weight_phase)
    twins, comparisons = [], []
    for rate in design.design.sample_rates:
        low, high = (float(f) for f in band_of(rate, stated))
        twin = make_parallel_twin(
            bank, rate, method=method, match_hz=match, found=found, band_hz=(low, high), weight_phase=weight_phase
        )
        twins.append(twin)
        comparisons.append(compare_bank(bank, twin, (low, high)))
    breaches = tuple(judge_bank(comparison, design.limits) for comparison in comparisons)
    return JudgedBank(section.name, bank, tuple(twins), tuple(comparisons), breaches)


def judge_bank(comparison: BankComparison, limits: Limits | None) -> tuple[Breach, ...]:
    """The limits of magnitude and phase that a bank in parallel form breaks by itself."""
    if limits is None:
        return ()
    rows = (
        ("magnitude", "dB", limits.magnitude, comparison.magnitude_db),
        ("phase", "deg", limits.phase, comparison.phase_deg),
    )
    return tuple(
        Breach(what, unit, float(limit), found.worst, found.at_hz)
        for what, unit, limit, found in rows
        if limit is not None and not abs(found.worst) <= limit
    )
