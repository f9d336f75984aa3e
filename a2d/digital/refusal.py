"""How a conversion method says that it has no solution for some of the sections it was given."""

from __future__ import annotations

import numpy as np

from a2d.arrays import BoolArray
from a2d.errors import ConversionError


class SectionRefused(ConversionError):
    """A method has no solution for the sections `rows` (indices on the flattened leading axes)."""

    def __init__(self, reason: str, rows: tuple[int, ...]):
        self.reason, self.rows = reason, rows
        super().__init__(f"{reason} (section {', '.join(str(r + 1) for r in rows)} of those given)")


def refuse(bad: BoolArray, reason: str) -> None:
    """Raise `SectionRefused` with `reason` when any element of `bad` [...] is true."""
    if np.any(bad):
        raise SectionRefused(reason, tuple(int(r) for r in np.flatnonzero(bad)))
