"""`[firmware]`: how the coefficients are to stand in memory, and what computes with them."""

from __future__ import annotations

from typing import Literal, TypeAlias

from a2d.design.structs import DesignStruct

ValueName: TypeAlias = Literal["b0", "b1", "b2", "a1", "a2"]
WIDEST_WORD = 32
ACCUMULATOR_GUARD = 3  # five products and a rounding half add less than 2^3 of the largest product
ACCUMULATOR_BITS = 64


class FixedNumber(DesignStruct, frozen=True, kw_only=True):
    """A fixed-point word of `bits`, sign included; `fraction` of them right of the point (bits - 1 when absent)."""

    bits: int
    fraction: int | None = None

    def __post_init__(self) -> None:
        if not 8 <= self.bits <= WIDEST_WORD:
            raise ValueError(f"bits must lie from 8 to {WIDEST_WORD} ({self.bits})")
        if self.fraction is not None and not 0 <= self.fraction < self.bits:
            raise ValueError(f"fraction must lie from 0 to {self.bits - 1}, one less than bits ({self.fraction})")

    @property
    def fraction_bits(self) -> int:
        """`fraction`, or its default."""
        return self.bits - 1 if self.fraction is None else self.fraction


class Firmware(DesignStruct, frozen=True, kw_only=True):
    """What the header, kernels and test vectors are made of.

    Attributes
    ----------
    number
        `float32`, `float64`, or a fixed-point word.
    order
        The order of a section's values in memory.
    feedback
        `as_written`: a1 and a2 as in y = .. - a1·y1 - a2·y2; `negated`: with their signs flipped.
    structure
        What computes a section; `recommended` takes the tool's advice. Transposed direct form II for floating point
        and direct form I for fixed point when absent.
    error_feedback
        Order of the rounding error's feedback in fixed-point direct form I.
    rounding
        `nearest` rounds each coefficient alone; `together` looks among their neighbours for the smallest error.
    sample
        Fixed point only: the words of the signal. 24-bit samples with four bits of headroom when absent.
    overflow
        Fixed point only: what a sample too large for its word becomes.
    sample_rounding
        Fixed point only: how a section's result becomes a sample.
    section_order
        `as_designed`, or `searched` for the best signal-to-noise ratio and headroom; searched for fixed point when
        absent.
    pairing
        `as_designed` leaves each section its own numerator; `nearest` deals the numerators anew, each pole pair taking
        the nearest zeros.
    kernel, test_vectors
        Whether these files are wanted.
    """

    number: FixedNumber | Literal["float32", "float64"] = "float32"
    order: tuple[ValueName, ValueName, ValueName, ValueName, ValueName] = ("b0", "b1", "b2", "a1", "a2")
    feedback: Literal["as_written", "negated"] = "as_written"
    structure: Literal["direct_form_1", "transposed_direct_form_2", "delta", "recommended"] | None = None
    error_feedback: Literal[0, 1, 2] = 0
    rounding: Literal["nearest", "together"] = "together"
    sample: FixedNumber | None = None
    overflow: Literal["saturate", "wrap"] = "saturate"
    sample_rounding: Literal["nearest", "truncate"] = "nearest"
    section_order: Literal["as_designed", "searched"] | None = None
    pairing: Literal["as_designed", "nearest"] = "as_designed"
    kernel: bool = True
    test_vectors: bool = True

    def __post_init__(self) -> None:
        if len(set(self.order)) < len(self.order):
            raise ValueError(f"order has a name twice ({', '.join(self.order)}, allowed each once)")
        if isinstance(self.number, FixedNumber):
            self._check_widths(self.number)
        elif self.sample is not None or self.error_feedback:
            raise ValueError(f"sample and error_feedback are for fixed-point numbers (number is {self.number})")
        if self.error_feedback and self.chosen_structure not in ("direct_form_1", "recommended"):
            raise ValueError(f"error_feedback is for direct_form_1 (structure is {self.chosen_structure})")

    def _check_widths(self, number: FixedNumber) -> None:
        allowed = ACCUMULATOR_BITS - ACCUMULATOR_GUARD - number.bits
        if self.sample_word.bits > min(allowed, WIDEST_WORD):
            raise ValueError(
                f"a sample of {self.sample_word.bits} bits and coefficients of {number.bits} overflow the accumulator "
                f"of {ACCUMULATOR_BITS} bits (allowed samples of up to {min(allowed, WIDEST_WORD)} bits)"
            )

    @property
    def chosen_structure(self) -> str:
        """`structure`, or its default."""
        if self.structure is not None:
            return self.structure
        return "direct_form_1" if isinstance(self.number, FixedNumber) else "transposed_direct_form_2"

    @property
    def sample_word(self) -> FixedNumber:
        """`sample`, or its default."""
        return FixedNumber(bits=28, fraction=23) if self.sample is None else self.sample

    @property
    def searches_order(self) -> bool:
        """Whether the sections' order and scaling are searched for."""
        if self.section_order is None:
            return isinstance(self.number, FixedNumber)
        return self.section_order == "searched"
