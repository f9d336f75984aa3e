"""What a C header holds, as plain values: the writer and the reader are each other's inverse on these."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass

from a2d.errors import HeaderError
from a2d.wordlength.formats import Number
from a2d.wordlength.structures import STRUCTURES, VALUE_NAMES

FEEDBACK_SIGNS = ("as_written", "negated")


@dataclass(frozen=True)
class ProvedError:
    """One worst error that was found with the numbers of a table.

    Parameters
    ----------
    quantity, unit
        Such as `magnitude`, `dB`.
    worst
        The error with its sign.
    at_hz
        Where it is worst, Hz.
    """

    quantity: str
    unit: str
    worst: float
    at_hz: float


@dataclass(frozen=True)
class Table:
    """The coefficients of all sections at one sample rate.

    Parameters
    ----------
    sample_rate_hz
        Hz.
    values
        A row a section, always b0, b1, b2, a1, a2 with the feedback as written: y = b0·x .. - a1·y1 - a2·y2. Floats
        for the floating-point formats, the words themselves (integers) for fixed point.
    fractions
        Fixed point only, of the shape of `values`: a word w stands for w·2^-fraction. One number for all in the direct
        forms, each value's own in the delta form.
    output_shift
        Fixed point only: the cascade's output is 2^output_shift times the last section's.
    band_hz, proof
        The errors of exactly these numbers against the analog response, over a band; empty when none was proved.
    """

    sample_rate_hz: float
    values: tuple[tuple[float, ...], ...]
    fractions: tuple[tuple[int, ...], ...] = ()
    output_shift: int = 0
    band_hz: tuple[float, float] | None = None
    proof: tuple[ProvedError, ...] = ()


@dataclass(frozen=True)
class Header:
    """A whole header.

    Parameters
    ----------
    name
        A C identifier; prefixes the file and every symbol.
    title, sha256
        Of the design.
    section_names, f0_hz
        One a section, in the order in which the sections run.
    number
        The number format.
    tables
        One a sample rate.
    structure
        A name in `STRUCTURES`: what the values are the coefficients of.
    error_feedback
        0, 1 or 2: the order of the rounding error's feedback in fixed-point direct form I.
    order
        The order of the values in memory.
    feedback
        `as_written`, or `negated`: a1 and a2 stand in memory with their signs flipped.
    sample_bits, sample_fraction
        Fixed point only: the width of a sample and how many of its bits are right of the point.
    """

    name: str
    title: str
    sha256: str
    section_names: tuple[str, ...]
    f0_hz: tuple[float, ...]
    number: Number
    tables: tuple[Table, ...]
    structure: str = "transposed_direct_form_2"
    error_feedback: int = 0
    order: tuple[str, ...] = VALUE_NAMES
    feedback: str = "as_written"
    sample_bits: int = 0
    sample_fraction: int = 0

    def __post_init__(self) -> None:
        if sorted(self.order) != sorted(VALUE_NAMES):
            raise HeaderError(f"order must name each of {', '.join(VALUE_NAMES)} once ({', '.join(self.order)})")
        if self.feedback not in FEEDBACK_SIGNS:
            raise HeaderError(f"feedback must be one of {', '.join(FEEDBACK_SIGNS)} ({self.feedback!r})")
        if self.structure not in STRUCTURES:
            raise HeaderError(f"structure must be one of {', '.join(STRUCTURES)} ({self.structure!r})")
        if not self.section_names or not self.tables:
            raise HeaderError("a header holds at least one section and one sample rate (none given)")
        if len(self.f0_hz) != len(self.section_names):
            raise HeaderError(f"one f0 a section ({len(self.f0_hz)} for {len(self.section_names)} sections)")
        for table in self.tables:
            _check_shape(table, len(self.section_names), self.number.kind == "fixed")
        twice = [label for label, count in Counter(map(rate_label, self.rates_hz)).items() if count > 1]
        if twice:
            raise HeaderError(f"two sample rates are the same in whole hertz ({twice[0]} Hz, allowed each once)")

    @property
    def rates_hz(self) -> tuple[float, ...]:
        """The tables' sample rates in Hz."""
        return tuple(table.sample_rate_hz for table in self.tables)


def rate_label(sample_rate_hz: float) -> int:
    """The whole number of hertz by which C code names a rate: the preprocessor compares integers only."""
    return round(sample_rate_hz)


def _check_shape(table: Table, sections: int, fixed: bool) -> None:
    wanted = [len(VALUE_NAMES)] * sections
    if [len(row) for row in table.values] != wanted:
        raise HeaderError(f"the table at {table.sample_rate_hz:g} Hz must hold {sections} rows of {len(VALUE_NAMES)}")
    if [len(row) for row in table.fractions] != (wanted if fixed else []):
        raise HeaderError(f"the table at {table.sample_rate_hz:g} Hz has fractions that do not fit its number format")
