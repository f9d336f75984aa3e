"""One unit of the hardware: the design with the values that were measured in it."""

from __future__ import annotations

import msgspec

from a2d.design.model import Design
from a2d.design.moves import with_values
from a2d.errors import ParameterError


def measured_unit(design: Design) -> Design:
    """The design with `[spread.measured]` in place of its nominal values.

    Raises
    ------
    ParameterError
        The design has no measured values.
    """
    if design.spread is None or not design.spread.measured:
        raise ParameterError('the design has no measured values (write [spread.measured] with "tone.C1" = "21.6n")')
    sections = with_values(design.sections, design.spread.measured)
    return msgspec.structs.replace(design, sections=sections)
