"""Number formats by name: what a coefficient may be in memory."""

from __future__ import annotations

from dataclasses import dataclass

KINDS = ("float32", "float64", "fixed")


@dataclass(frozen=True)
class Number:
    """The number format of a table of coefficients.

    Parameters
    ----------
    kind
        `float32`, `float64` or `fixed`.
    bits, fraction
        Of a fixed-point word: its width, sign included, and how many of its bits stand right of the point before
        a table's shift; 0 for the floating-point kinds.
    """

    kind: str
    bits: int = 0
    fraction: int = 0

    def __str__(self) -> str:
        return f"{self.bits}-bit words, {self.fraction} fraction bits" if self.kind == "fixed" else self.kind
