"""The main job: from a design to twins at every rate, with their errors and the verdict."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from a2d.analog.build import build_chain
from a2d.analog.chain import AnalogChain
from a2d.compare.advice import Attempt, Remedy, remedies, twin_of, verdict
from a2d.compare.banks import parallel_banks
from a2d.compare.control_tables import ControlTable, ready_sections, sweep_controls, tabulate
from a2d.compare.errors import Comparison, band_of, compare, compare_sections
from a2d.compare.verdict import Breach
from a2d.design.hardware import BankSection, CircuitSection, NetworkSection
from a2d.design.model import Design
from a2d.digital.certificate import Certificate, certify
from a2d.digital.match import match_points
from a2d.digital.twin import Twin


@dataclass(frozen=True, eq=False)
class Judged:
    """A twin with its errors.

    Attributes
    ----------
    twin
        The sections at one sample rate.
    comparison
        Errors of the whole chain.
    sections
        Errors of each section alone; empty where twin and chain do not have one section each for each.
    breaches
        The limits that the whole chain breaks.
    proofs
        How near to the best each section is; empty where `sections` is.
    advice
        Where a limit is broken: what would keep it, or comes nearest, with its errors.
    """

    twin: Twin
    comparison: Comparison
    sections: tuple[Comparison, ...]
    breaches: tuple[Breach, ...]
    proofs: tuple[Certificate, ...] = ()
    advice: tuple[Remedy, ...] = ()


@dataclass(frozen=True, eq=False)
class Conversion:
    """A design, its analog chain, its judged twins in the order of the sample rates, and its controls' tables."""

    design: Design
    chain: AnalogChain
    judged: tuple[Judged, ...]
    controls: tuple[ControlTable, ...] = ()

    @property
    def within_limits(self) -> bool:
        """Whether no twin breaks a limit: the design's own setting, other positions of controls, banks in parallel."""
        twins = any(j.breaches for j in self.judged) or any(any(b.breaches) for b in parallel_banks(self.design))
        return not twins and not any(rate.breaches for table in self.controls for rate in table.rates)


def convert(design: Design) -> Conversion:
    """Twins of a design at all of its sample rates, compared and judged.

    Raises
    ------
    DesignError, ParameterError, ConversionError
        A section cannot be built, or has no twin at one of the rates.
    """
    chain = build_chain(design)
    sweeps = sweep_controls(design)
    if sweeps:
        chain = build_chain(design, ready_sections(sweeps))
    judged = tuple(convert_at(design, chain, rate) for rate in design.design.sample_rates)
    return Conversion(design, chain, judged, tuple(tabulate(design, chain, sweep) for sweep in sweeps))


def convert_at(design: Design, chain: AnalogChain, sample_rate_hz: float) -> Judged:
    """The judged twin of a design's chain at one sample rate (Hz), which need not be one of the design's."""
    stated = design.limits.band if design.limits is not None else None
    low, high = (float(f) for f in band_of(sample_rate_hz, stated))
    entries = [design.sections[owner] for owner in chain.owners]
    methods = [entry.method or design.design.method for entry in entries]
    found = [isinstance(entry, (NetworkSection, CircuitSection, BankSection)) for entry in entries]
    match = match_points(chain.f0_hz, [entry.match for entry in entries], found, (low, high))
    table = design.design
    attempt = Attempt(tuple(methods), match, table.scope, table.extra_sections, float(table.weight_phase))
    twin = twin_of(chain, sample_rate_hz, design.limits, attempt)
    comparison = compare(chain, twin, (low, high))
    alone = len(twin) == len(chain) and table.scope == "section"
    sections = compare_sections(chain, twin, (low, high)) if alone else ()
    proofs = certify(twin.sos, chain.b, chain.a, sample_rate_hz, np.array([low, high])) if alone else ()
    breaches = verdict(chain, twin, comparison, design.limits)
    advice = remedies(chain, sample_rate_hz, design.limits, attempt, breaches) if breaches and design.limits else ()
    return Judged(twin, comparison, sections, breaches, proofs, advice)
