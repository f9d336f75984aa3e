"""What is to be approximated: the analog squared magnitude on a grid of t = tan²(w/2)."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from a2d.arrays import BoolArray, FloatArray, IntArray
from a2d.digital.warped import power

DB = 10.0 / np.log(10.0)
"""dB of a squared magnitude's natural logarithm."""


@dataclass(frozen=True, eq=False)
class Problem:
    """N sections of one shape, each on a grid of G points that ascends.

    Parameters
    ----------
    t
        Shape [N, G], tan²(w/2).
    target
        Shape [N, G], ln |H|² of the analog section, less the numerator's fixed factor (zeros that keep their place).
    weight
        Shape [N, G], the factor on the error, 1 where it counts as it is.
    zeros, poles
        How many zeros and poles are free: N(t) has the degree `zeros`, D(t) the degree `poles`.
    """

    t: FloatArray
    target: FloatArray
    weight: FloatArray
    zeros: int
    poles: int

    @property
    def unknowns(self) -> int:
        """Free numbers of a section: the coefficients but for a common factor."""
        return self.zeros + self.poles + 1

    @property
    def references(self) -> int:
        """Alternating points that prove a best approximation: one more than the unknowns."""
        return self.unknowns + 1

    def error(self, b: FloatArray, a: FloatArray) -> FloatArray:
        """The weighted error ln(|B|²/|A|²) - target, shape [N, G]; `b`, `a` [N, 3] in v."""
        return self.weight * (np.log(power(b, self.t) / power(a, self.t)) - self.target)

    def rows(self, which: BoolArray | IntArray) -> Problem:
        """The sections `which` of this problem."""
        return replace(self, t=self.t[which], target=self.target[which], weight=self.weight[which])

    def at(self, points: IntArray) -> Problem:
        """This problem on the grid points `points` [N, K]."""
        pick = [np.take_along_axis(values, points, axis=1) for values in (self.t, self.target, self.weight)]
        return replace(self, t=pick[0], target=pick[1], weight=pick[2])


def worst(error: FloatArray) -> FloatArray:
    """max |error| over the grid, shape [N]; infinite where any is not a number."""
    largest = np.abs(error).max(axis=-1)
    return np.where(np.isfinite(largest), largest, np.inf)
