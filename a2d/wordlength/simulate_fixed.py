"""Bit-true simulation in fixed point: whole numbers in, whole numbers out, exactly what the C kernels do."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import TypeAlias

from a2d.wordlength.arithmetic import DELTA_LIMIT, Arithmetic
from a2d.wordlength.rounding import Rounded

Row: TypeAlias = tuple[list[int], list[int]]  # words b0, b1, b2, a1, a2 and their fraction bits
Section: TypeAlias = Callable[[Row, Arithmetic, Sequence[int]], tuple[list[int], int]]


@dataclass(frozen=True)
class FixedRun:
    """The result of a simulation.

    Parameters
    ----------
    output
        Sample words.
    overflows
        How often each section's result was too large for its word; the output's shift counts as one more section.
    """

    output: list[int]
    overflows: tuple[int, ...]


def simulate_fixed(rounded: Rounded, arithmetic: Arithmetic, samples: Sequence[int]) -> FixedRun:
    """Run sample words through a cascade from silence.

    Parameters
    ----------
    rounded
        A cascade in fixed-point words.
    arithmetic
        The signal path.
    samples
        Words of `arithmetic.bits`.
    """
    section = SECTIONS[rounded.structure]
    signal, overflows = list(samples), []
    for words, fractions in zip(rounded.words.tolist(), rounded.fractions.tolist(), strict=True):
        signal, count = section(([int(w) for w in words], fractions), arithmetic, signal)
        overflows.append(count)
    gain, limit = 1 << rounded.output_shift, arithmetic.limiter()
    output = [limit(v * gain) for v in signal]
    overflows.append(sum(y != v * gain for y, v in zip(output, signal, strict=True)))
    return FixedRun(output, tuple(overflows))


def direct_form_1(row: Row, arithmetic: Arithmetic, samples: Sequence[int]) -> tuple[list[int], int]:
    """y = round(b0·x + b1·x1 + b2·x2 - a1·y1 - a2·y2 + what earlier rounding dropped)."""
    (b0, b1, b2, a1, a2), fraction = row[0], row[1][0]
    half, limit = arithmetic.half(fraction), arithmetic.limiter()
    k1, k2 = ((0, 0), (1, 0), (2, -1))[arithmetic.error_feedback]
    x1 = x2 = y1 = y2 = e1 = e2 = overflows = 0
    output = []
    for x in samples:
        total = b0 * x + b1 * x1 + b2 * x2 - a1 * y1 - a2 * y2 + k1 * e1 + k2 * e2
        whole = (total + half) >> fraction
        e2, e1 = e1, total - (whole << fraction)
        y = limit(whole)
        overflows += y != whole
        x2, x1, y2, y1 = x1, x, y1, y
        output.append(y)
    return output, overflows


def transposed_direct_form_2(row: Row, arithmetic: Arithmetic, samples: Sequence[int]) -> tuple[list[int], int]:
    """y = round(b0·x + s1); s1 = b1·x - a1·y + s2; s2 = b2·x - a2·y, the states exact."""
    (b0, b1, b2, a1, a2), fraction = row[0], row[1][0]
    half, limit = arithmetic.half(fraction), arithmetic.limiter()
    s1 = s2 = overflows = 0
    output = []
    for x in samples:
        whole = (b0 * x + s1 + half) >> fraction
        y = limit(whole)
        overflows += y != whole
        s1, s2 = b1 * x - a1 * y + s2, b2 * x - a2 * y
        output.append(y)
    return output, overflows


def delta(row: Row, arithmetic: Arithmetic, samples: Sequence[int]) -> tuple[list[int], int]:
    """y = round(b0·x + v1); v1 += v2 + b1·x - a1·y; v2 += b2·x - a2·y, each product at the states' resolution."""
    guard, limit = arithmetic.guard_bits, arithmetic.limiter()
    aligned = [(w << max(0, guard - f), max(0, f - guard)) for w, f in zip(*row, strict=True)]
    (b0, r0), (b1, r1), (b2, r2), (a1, q1), (a2, q2) = aligned
    half = arithmetic.half(guard)
    v1 = v2 = overflows = 0
    output = []
    for x in samples:
        whole = ((b0 * x >> r0) + v1 + half) >> guard
        y = limit(whole)
        overflows += y != whole
        v1 += v2 + (b1 * x >> r1) - (a1 * y >> q1)
        v2 += (b2 * x >> r2) - (a2 * y >> q2)
        if not -DELTA_LIMIT <= v1 <= DELTA_LIMIT:
            v1 = DELTA_LIMIT if v1 > 0 else -DELTA_LIMIT
        if not -DELTA_LIMIT <= v2 <= DELTA_LIMIT:
            v2 = DELTA_LIMIT if v2 > 0 else -DELTA_LIMIT
        output.append(y)
    return output, overflows


SECTIONS: dict[str, Section] = {
    "direct_form_1": direct_form_1,
    "transposed_direct_form_2": transposed_direct_form_2,
    "delta": delta,
}
