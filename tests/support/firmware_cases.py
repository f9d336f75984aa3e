"""Cascades in every format, structure, order and sign, as headers and kernels on disk."""

from __future__ import annotations

import dataclasses
from pathlib import Path

import numpy as np

from a2d.digital.twin import Twin, make_twin
from a2d.firmware.header import write_header
from a2d.firmware.kernel import arithmetic_of, write_kernel
from a2d.firmware.model import Header, Table
from a2d.wordlength.formats import Number
from a2d.wordlength.rounding import Rounded, round_nearest
from a2d.wordlength.structures import VALUE_NAMES
from tests.support.chains import chain_of, peaking

NUMBERS = {
    "f32": Number("float32"),
    "f64": Number("float64"),
    "q16": Number("fixed", 16, 14),
    "q24": Number("fixed", 24, 22),
    "q32": Number("fixed", 32, 30),
}
ORDERS = (VALUE_NAMES, ("a2", "a1", "b0", "b2", "b1"))
SIGNS = ("as_written", "negated")
STRUCTURE_CASES = {
    "df1": ("direct_form_1", 0),
    "ef1": ("direct_form_1", 1),
    "ef2": ("direct_form_1", 2),
    "tdf2": ("transposed_direct_form_2", 0),
    "delta": ("delta", 0),
}


def twin(rate: float = 48_000.0) -> Twin:
    return make_twin(chain_of(peaking(400.0, 1.2, 6.0), peaking(5_000.0, 0.9, -8.0)), rate)


def table_of(rounded: Rounded, rate: float) -> Table:
    fixed = rounded.number.kind == "fixed"
    rows = tuple(tuple(int(w) if fixed else w for w in row) for row in rounded.words.tolist())
    fractions = tuple(tuple(row) for row in rounded.fractions.tolist()) if fixed else ()
    return Table(rate, rows, fractions, rounded.output_shift)


def header_of(
    name: str,
    rounded: Rounded,
    *,
    feedback: str = "as_written",
    order: tuple[str, ...] = VALUE_NAMES,
    error_feedback: int = 0,
    sample: tuple[int, int] = (28, 23),
    rate: float = 48_000.0,
) -> Header:
    names = tuple(f"s{i}" for i in range(len(rounded.words)))
    header = Header(
        name,
        "test",
        "5a" * 32,
        names,
        (1.0,) * len(names),
        rounded.number,
        (table_of(rounded, rate),),
        rounded.structure,
    )
    header = dataclasses.replace(header, feedback=feedback, order=order)
    if rounded.number.kind != "fixed":
        return header
    return dataclasses.replace(header, error_feedback=error_feedback, sample_bits=sample[0], sample_fraction=sample[1])


def write_case(folder: Path, header: Header, overflow: str = "saturate", rounding: str = "nearest") -> None:
    (folder / f"{header.name}.h").write_text(write_header(header))
    kernel = write_kernel(header, arithmetic_of(header, overflow, rounding))
    (folder / f"{header.name}_kernel.h").write_text(kernel)


def rounded_case(number: str, structure: str, sections: Twin | None = None) -> Rounded:
    return round_nearest((sections or twin()).sos, NUMBERS[number], structure)


def noise_words(count: int, highest: int, seed: int = 1) -> np.ndarray:
    """Noise with a loud start that overflows, and a silent end: int32 words."""
    generator = np.random.default_rng(seed)
    x = generator.integers(-highest // 16, highest // 16, count)
    x[: count // 20] *= 16
    x[-count // 5 :] = 0
    return x.astype(np.int32)
