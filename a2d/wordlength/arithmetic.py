"""How fixed-point samples are rounded and limited: the one description that simulation and kernels follow.

A section's sum is exact in an accumulator of 64 bits. It becomes a sample by `round`, then `limit`:
    nearest:  (sum + half) >> fraction        truncate:  sum >> fraction      (>> rounds towards minus infinity)
    saturate: the nearest word                wrap:      the word of the same low bits
The difference form keeps its two states in the accumulator's width, `guard_bits` finer than a sample, and clamps them
at `DELTA_LIMIT` so that a saturated section cannot wind them up.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

DELTA_LIMIT = 1 << 60
DELTA_INTEGER_BITS = 5  # coefficients below 2^5 keep the sums of the difference form inside 64 bits


@dataclass(frozen=True)
class Arithmetic:
    """The signal path of a fixed-point cascade.

    Parameters
    ----------
    bits, fraction
        A sample's width, and how many of its bits are right of the point.
    overflow
        `saturate` or `wrap`.
    rounding
        `nearest` or `truncate`.
    error_feedback
        0, 1 or 2: the order of the feedback of what rounding dropped, in direct form I.
    """

    bits: int = 28
    fraction: int = 23
    overflow: str = "saturate"
    rounding: str = "nearest"
    error_feedback: int = 0

    @property
    def highest(self) -> int:
        """The largest sample word."""
        return (1 << (self.bits - 1)) - 1

    @property
    def guard_bits(self) -> int:
        """By how many bits the states of the difference form are finer than a sample."""
        return 57 - self.bits

    def half(self, fraction: int) -> int:
        """What is added before `fraction` bits are dropped."""
        return (1 << fraction) >> 1 if self.rounding == "nearest" else 0

    def limiter(self) -> Callable[[int], int]:
        """The function that makes a word of a number that may be too large for one."""
        return LIMITERS[self.overflow](self.highest)


def _saturate(highest: int) -> Callable[[int], int]:
    lowest = -highest - 1
    return lambda v: highest if v > highest else lowest if v < lowest else v


def _wrap(highest: int) -> Callable[[int], int]:
    half, mask = highest + 1, 2 * highest + 1
    return lambda v: ((v + half) & mask) - half


LIMITERS: dict[str, Callable[[int], Callable[[int], int]]] = {"saturate": _saturate, "wrap": _wrap}
