"""Coefficients in a number format: words, their fraction bits, and the numbers that they stand for."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from a2d.arrays import BoolArray, FloatArray, IntArray
from a2d.errors import RoundingError
from a2d.wordlength.arithmetic import DELTA_INTEGER_BITS
from a2d.wordlength.formats import Number
from a2d.wordlength.structures import sos_of, values_of

MOST_FRACTION_BITS = 62  # a word that stands for less than 2^-31 in the narrowest format: nothing audible
MOST_OUTPUT_SHIFT = 24


@dataclass(frozen=True, eq=False)
class Rounded:
    """A cascade in a number format.

    Parameters
    ----------
    number, structure
        The format, and what the values are the coefficients of.
    words
        Shape [S, 5], whole numbers for fixed point; otherwise the numbers themselves.
    fractions
        Shape [S, 5]: a word stands for word·2^-fraction; 0 for floating point.
    moved
        Shape [S]: the numerator of a section is 2^moved times what it was.
    shift
        By how many bits the table gave up fraction bits so that its largest coefficient fits.
    """

    number: Number
    structure: str
    words: FloatArray
    fractions: IntArray
    moved: IntArray
    shift: int = 0

    @property
    def output_shift(self) -> int:
        """The cascade's output is 2^output_shift times the last section's: the gain that no section took."""
        return -int(np.sum(self.moved))

    @property
    def values(self) -> FloatArray:
        """The numbers that the words stand for, shape [S, 5]."""
        return np.ldexp(self.words, -self.fractions.astype(np.int32))

    @property
    def sections(self) -> FloatArray:
        """The sections as they are computed, shape [S, 6], without the output's shift."""
        return sos_of(self.values, self.structure)

    @property
    def sos(self) -> FloatArray:
        """The whole cascade, shape [S, 6]: the output's shift is part of the last section."""
        sections = self.sections
        sections[-1, :3] = np.ldexp(sections[-1, :3], self.output_shift)
        return sections


def round_nearest(sos: FloatArray, number: Number, structure: str, *, move_gain: bool = True) -> Rounded:
    """Each coefficient of sections `sos` [S, 6] rounded to the nearest number of the format.

    In the direct forms one number of fraction bits holds for the whole fixed-point table. With `move_gain` it is as
    large as the feedback coefficients allow: a numerator that would need more integer bits is divided by a power of
    two, sections behind it that have room take the gain back, and what is left becomes the output's shift. Without it
    the numerators count too, and all words give up bits for the largest.

    Raises
    ------
    RoundingError
        A coefficient is too large for the format at any split of its bits.
    """
    values = values_of(sos, structure)
    if number.kind != "fixed":
        return _floating(values, number, structure)
    if structure == "delta":
        return _own_fractions(values, number, structure)
    return _shared_fraction(values, number, structure, move_gain)


def to_words(values: FloatArray, fractions: IntArray) -> FloatArray:
    """The nearest whole number to value·2^fraction."""
    return np.rint(np.ldexp(values, fractions.astype(np.int32)))


def own_fractions(values: FloatArray, bits: int) -> IntArray:
    """For each value the largest number of fraction bits at which it fits a word of `bits`, either sign."""
    _, exponent = np.frexp(values)
    fractions = np.where(values == 0.0, bits - 1, bits - 1 - exponent).astype(np.int64)
    too_large = np.abs(np.rint(np.ldexp(values, fractions.astype(np.int32)))) >= 2.0 ** (bits - 1)
    fractions = np.minimum(fractions - too_large, MOST_FRACTION_BITS)
    if np.any(fractions < 0):
        raise RoundingError(
            f"a coefficient needs more than {bits - 1} integer bits ({float(np.max(np.abs(values))):g})"
        )
    return fractions


def _own_fractions(values: FloatArray, number: Number, structure: str) -> Rounded:
    """Each value with its own fraction bits; numerators of 2^5 and more would overflow the kernel's sums: they move."""
    limit = 2.0**DELTA_INTEGER_BITS
    moved = moved_gain(values[:, :3], number, lambda v: bool(np.all(np.abs(v) < limit)))
    scaled = _with_gain_moved(values, moved)
    fractions = own_fractions(scaled, number.bits)
    return Rounded(number, structure, to_words(scaled, fractions), fractions, moved)


def _with_gain_moved(values: FloatArray, moved: IntArray) -> FloatArray:
    scaled = values.copy()
    scaled[:, :3] = np.ldexp(scaled[:, :3], moved[:, np.newaxis].astype(np.int32))
    return scaled


def _floating(values: FloatArray, number: Number, structure: str) -> Rounded:
    with np.errstate(over="ignore"):
        words = values.astype(np.float32).astype(np.float64) if number.kind == "float32" else values.copy()
    if not np.all(np.isfinite(words)):
        raise RoundingError(f"a coefficient is too large for {number} ({float(np.max(np.abs(values))):g})")
    return Rounded(number, structure, words, np.zeros(values.shape, dtype=np.int64), _none_moved(values))


def _shared_fraction(values: FloatArray, number: Number, structure: str, move_gain: bool) -> Rounded:
    shift = _smallest_shift(values[:, 3:], number, symmetric=True)
    moved = _none_moved(values)
    if move_gain:
        fraction = number.fraction - shift
        moved = moved_gain(
            values[:, :3], number, lambda v: bool(np.all(fits(v, number.bits, fraction, symmetric=False)))
        )
    else:
        shift = max(shift, _smallest_shift(values[:, :3], number, symmetric=False))
    scaled = _with_gain_moved(values, moved)
    fractions = np.full(values.shape, number.fraction - shift, dtype=np.int64)
    return Rounded(number, structure, to_words(scaled, fractions), fractions, moved, shift)


def _none_moved(values: FloatArray) -> IntArray:
    return np.zeros(len(values), dtype=np.int64)


def _smallest_shift(values: FloatArray, number: Number, *, symmetric: bool) -> int:
    for shift in range(number.fraction + 1):
        if np.all(fits(values, number.bits, number.fraction - shift, symmetric=symmetric)):
            return shift
    raise RoundingError(
        f"a coefficient does not fit {number} at any shift ({float(np.max(np.abs(values))):g}, "
        f"allowed below {2.0 ** (number.bits - 1):g})"
    )


def fits(values: FloatArray, bits: int, fraction: int, *, symmetric: bool) -> BoolArray:
    """Whether round(value·2^fraction) is a word of `bits`; `symmetric` leaves the most negative word out.

    Feedback coefficients stay symmetric, so that their signs can be flipped.
    """
    words = np.rint(np.ldexp(values, fraction))
    limit = 2.0 ** (bits - 1)
    return np.asarray((words < limit) & (words > -limit if symmetric else words >= -limit))


def moved_gain(forward: FloatArray, number: Number, fit: Callable[[FloatArray], bool]) -> IntArray:
    """Powers of two for the numerators [S, 3] of a cascade so that all `fit`; shape [S], the sum not above zero.

    What one section gives up the next ones with room take back.
    """
    moved, owed = np.zeros(len(forward), dtype=np.int64), 0
    for row, values in enumerate(forward):
        while not fit(np.ldexp(values, moved[row])):
            moved[row] -= 1
            owed += 1
            if owed > MOST_OUTPUT_SHIFT:
                raise RoundingError(f"the gain does not fit {number} (more than 2^{MOST_OUTPUT_SHIFT} would be moved)")
        while owed and fit(np.ldexp(values, moved[row] + 1)):
            moved[row] += 1
            owed -= 1
    return moved


def error_in_steps(rounded: Rounded, sos: FloatArray) -> FloatArray:
    """Words minus the exact values of sections `sos` [S, 6] in steps of the last bit, shape [S, 5].

    At most a half each after nearest rounding.
    """
    exact = np.ldexp(values_of(sos, rounded.structure), rounded.fractions.astype(np.int32))
    exact[:, :3] = np.ldexp(exact[:, :3], rounded.moved[:, np.newaxis].astype(np.int32))
    return rounded.words - exact
