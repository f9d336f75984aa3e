"""What each conversion method would leave of this design, at each of its rates."""

from __future__ import annotations

from dataclasses import dataclass

import msgspec

from a2d.compare.advice import verdict
from a2d.compare.errors import Comparison
from a2d.conversion import Conversion, convert_at
from a2d.design.model import Design, Limits
from a2d.digital.methods import METHODS
from a2d.errors import A2dError


@dataclass(frozen=True)
class Attempt:
    """All sections by one method at one rate: the errors, or why there is no such twin; whether limits are kept."""

    method: str
    sample_rate_hz: float
    comparison: Comparison | None
    refusal: str
    within_limits: bool


def attempts(conversion: Conversion) -> tuple[Attempt, ...]:
    """Every method at every rate of the design, in that order."""
    rates = [judged.twin.sample_rate_hz for judged in conversion.judged]
    return tuple(_attempt(conversion, method, rate) for method in METHODS for rate in rates)


def _attempt(conversion: Conversion, method: str, sample_rate_hz: float) -> Attempt:
    design, chain = by_one_method(conversion.design, method), conversion.chain
    try:
        judged = convert_at(design, chain, sample_rate_hz)
    except A2dError as error:
        return Attempt(method, sample_rate_hz, None, str(error), False)
    broken = verdict(chain, judged.twin, judged.comparison, conversion.design.limits)
    return Attempt(method, sample_rate_hz, judged.comparison, "", not broken)


def by_one_method(design: Design, method: str) -> Design:
    """The same design with each section converted alone by `method`, and no limits but the band.

    Without limits no remedies are looked for, which can take a minute.
    """
    table = msgspec.structs.replace(design.design, method=method, scope="section", extra_sections=0)
    sections = tuple(msgspec.structs.replace(section, method=None) for section in design.sections)
    limits = None if design.limits is None else Limits(band=design.limits.band)
    return msgspec.structs.replace(design, design=table, sections=sections, limits=limits)
