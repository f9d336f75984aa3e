"""What each conversion method would leave of this design, at each of its rates."""

from __future__ import annotations

from dataclasses import dataclass

import msgspec

from a2d.compare.errors import Comparison
from a2d.conversion import Conversion, convert_at
from a2d.design.model import Design
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
    try:
        judged = convert_at(by_one_method(conversion.design, method), conversion.chain, sample_rate_hz)
    except A2dError as error:
        return Attempt(method, sample_rate_hz, None, str(error), False)
    return Attempt(method, sample_rate_hz, judged.comparison, "", not judged.breaches)


def by_one_method(design: Design, method: str) -> Design:
    """The same design with every section converted by `method`."""
    table = msgspec.structs.replace(design.design, method=method)
    sections = tuple(msgspec.structs.replace(section, method=None) for section in design.sections)
    return msgspec.structs.replace(design, design=table, sections=sections)
