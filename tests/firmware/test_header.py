"""Headers: written, read back as the same values, compiled by three compilers, and bit-equal in the program."""

from __future__ import annotations

import contextlib
import dataclasses
import itertools
import struct

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from a2d.errors import HeaderError
from a2d.firmware.header import write_header
from a2d.firmware.model import Header, ProvedError, Table
from a2d.firmware.read_header import read_header
from a2d.wordlength.formats import Number
from a2d.wordlength.structures import STRUCTURES, VALUE_NAMES
from tests.support.c_build import COMPILERS, build, build_and_run

NASTY = 'Harbour */ desk ??/ "left" \\ \n Ä /* end'
FLOATS = ((1.25, -1.9, 0.7, -1.98, 0.99), (1e-7, 3.0, 0.0, 0.1, -0.0))


def a_header(kind: str = "float32", **changes: object) -> Header:
    """Two sections at two rates; fixed-point words use the ends of their range."""
    rates = (48_000.0, 44_100.0 / 1.001)
    if kind == "fixed":
        words = ((32767, -32768, 0, -31000, 16384), (1, -1, 2, 3, 4))
        fractions = ((14,) * 5, (14,) * 5)
        tables = tuple(
            Table(rate, words, fractions, output_shift=shift) for rate, shift in zip(rates, (0, 2), strict=True)
        )
        header = Header("eq", "t", "0f" * 32, ("a", "b"), (20.0, 1e3), Number("fixed", 16, 14), tables)
        header = dataclasses.replace(header, sample_bits=28, sample_fraction=23)
    else:
        rows = tuple(tuple(float(np.float32(v)) if kind == "float32" else v for v in row) for row in FLOATS)
        proof = (ProvedError("magnitude", "dB", -0.41, 18_900.5), ProvedError("phase", "deg", 1e-07, 20.0))
        tables = tuple(Table(rate, rows, band_hz=(20.0, 2e4), proof=proof) for rate in rates)
        header = Header("eq", NASTY, "0f" * 32, ("presence", NASTY), (3200.0, 0.1 + 0.2), Number(kind), tables)
    return dataclasses.replace(header, **changes)


@pytest.mark.parametrize("kind", ["float32", "float64", "fixed"])
@pytest.mark.parametrize("feedback", ["as_written", "negated"])
@pytest.mark.parametrize("order", [VALUE_NAMES, ("a2", "a1", "b0", "b2", "b1")])
@pytest.mark.parametrize("structure", STRUCTURES)
def test_reading_is_the_inverse_of_writing(kind: str, feedback: str, order: tuple[str, ...], structure: str) -> None:
    header = a_header(kind, feedback=feedback, order=order, structure=structure)
    text = write_header(header)
    assert read_header(text) == header
    assert write_header(read_header(text)) == text


finite32 = st.floats(width=32, allow_nan=False, allow_infinity=False)
finite64 = st.floats(allow_nan=False, allow_infinity=False)


@given(
    st.lists(st.tuples(*[finite32] * 5), min_size=1, max_size=3),
    st.text(),
    st.permutations(VALUE_NAMES),
    st.sampled_from(["as_written", "negated"]),
)
def test_any_float32_and_any_title_come_back(rows: list, title: str, order: list, feedback: str) -> None:
    names, f0 = tuple(title + str(i) for i in range(len(rows))), (1.0,) * len(rows)
    tables = (Table(48_000.0, tuple(rows)),)
    header = Header("n", title, "ab" * 32, names, f0, Number("float32"), tables, order=tuple(order), feedback=feedback)
    assert read_header(write_header(header)) == header


@given(st.tuples(*[finite64] * 5), st.floats(1.0, 1e6))
def test_any_double_comes_back(row: tuple, rate: float) -> None:
    header = Header("n", "", "ab" * 32, ("s",), (1.0,), Number("float64"), (Table(rate, (row,)),))
    assert read_header(write_header(header)) == header


@given(st.sampled_from(["float32", "fixed"]), st.data())
def test_any_damage_is_read_or_refused(kind: str, data: st.DataObject) -> None:
    """Characters deleted, doubled or replaced: never another error than the reader's own."""
    text = write_header(a_header(kind))
    for _ in range(data.draw(st.integers(1, 4))):
        start = data.draw(st.integers(0, len(text)))
        end = start + data.draw(st.integers(0, 30))
        new = data.draw(st.sampled_from(["", "0", "-", ".", "e9", "{", '"', "/*", text[start:end] * 2]))
        text = text[:start] + new + text[end:]
    with contextlib.suppress(HeaderError):
        assert len(read_header(text).tables) >= 1


def test_a_reformatted_header_reads_the_same() -> None:
    text = write_header(a_header("fixed"))
    squeezed = text.replace("{ ", "{").replace(", ", " ,\n").replace("= {", "=\n{").replace('" ,\nf0', '", f0')
    assert read_header(squeezed) == a_header("fixed")


def printing_program(kind: str, name: str = "eq") -> str:
    """C that writes every table's values as raw bytes through the look-up at run time."""
    word = {"float32": "float", "float64": "double", "fixed": "int16_t"}[kind]
    return f"""
#include <stdio.h>
#include "{name}.h"
int main(void) {{
    const uint32_t rates[2] = {{ 48000u, 44056u }};
    for (int i = 0; i < 2; ++i) {{
        const {name}_set *set = {name}_find(rates[i]);
        if (set == 0) return 1;
        fwrite(set->values, sizeof({word}), (size_t){name.upper()}_SECTIONS * {name.upper()}_VALUES, stdout);
    }}
    return {name}_find(1234u) != 0;
}}
"""


@pytest.mark.parametrize("compiler", COMPILERS)
def test_compiled_values_are_bit_equal(compiler: str, tmp_path) -> None:
    """All formats, both signs, all 120 orders take turns; the bytes in the program are the ones that were meant."""
    orders = list(itertools.permutations(VALUE_NAMES))[::59]
    for kind, feedback, order in zip(
        ["float32", "float64", "fixed"], ["as_written", "negated"] * 2, orders, strict=False
    ):
        header = a_header(kind, order=order, feedback="as_written" if kind == "fixed" else feedback)
        (tmp_path / "eq.h").write_text(write_header(header))
        source = tmp_path / f"print_{kind}.c"
        data = build_and_run(compiler, source, printing_program(kind))
        code = {"float32": "f", "float64": "d", "fixed": "h"}[kind]
        sign = -1 if header.feedback == "negated" else 1
        stored = [dict(zip(VALUE_NAMES, row, strict=True)) for table in header.tables for row in table.values]
        wanted = [row[name] * (sign if name in ("a1", "a2") else 1) + 0 for row in stored for name in order]
        assert data == struct.pack(f"<{len(wanted)}{code}", *wanted)


@pytest.mark.parametrize("compiler", COMPILERS)
def test_a_wrong_rate_stops_the_build(compiler: str, tmp_path) -> None:
    (tmp_path / "eq.h").write_text(write_header(a_header()))
    source = tmp_path / "rate.c"
    source.write_text('#include "eq.h"\nint main(void) { return EQ_TABLE[1][EQ_A1] == 0.0f; }\n')
    assert build(compiler, source, "-DEQ_FS_HZ=48000").returncode == 0
    refused = build(compiler, source, "-DEQ_FS_HZ=96000")
    assert refused.returncode != 0
    assert "EQ_FS_HZ is none of the rates in this header: 48000, 44056" in refused.stderr


def test_another_number_format_than_needed_stops_the_build(tmp_path) -> None:
    (tmp_path / "eq.h").write_text(write_header(a_header()))
    source = tmp_path / "number.c"
    source.write_text('#include "eq.h"\nint main(void) { return EQ_RATES != 2; }\n')
    assert build("gcc", source, "-DEQ_NEEDS_FLOAT32").returncode == 0
    assert "eq.h holds float32 numbers" in build("gcc", source, "-DEQ_NEEDS_FIXED").stderr


def test_one_rate_needs_no_choice(tmp_path) -> None:
    header = a_header(tables=a_header().tables[:1])
    (tmp_path / "eq.h").write_text(write_header(header))
    program = '#include "eq.h"\nint main(void) { return EQ_FS_HZ != 48000 || EQ_SET->values != EQ_TABLE; }\n'
    build_and_run("gcc", tmp_path / "one.c", program)


@pytest.mark.parametrize(
    ("damage", "message"),
    [
        (("0f0f", "ggg"), "lacks the design's SHA-256 hash"),
        (("#define EQ_A1 3", "#define EQ_A1 2"), "not 0 to 4"),
        (("#define EQ_SECTIONS 2", ""), "does not define EQ_SECTIONS"),
        (("#define EQ_SECTIONS 2", "#define EQ_SECTIONS 3"), "do not name the same 3 sections"),
        (("1.25f", "1.25"), "lacks its f"),
        (("1.25f", "nanf"), "not finite"),
        (("1.25f", "xf"), "no number"),
        (("#define EQ_NUMBER_FLOAT64 0", "#define EQ_NUMBER_FLOAT64 1"), "exactly one of EQ_NUMBER_"),
        (("Sample rate 48000.0 Hz", "48 kHz"), "says 2 sample rates and comments on 1"),
        (("eq_48000[EQ", "eq_47999[EQ"), "lacks the table eq_48000"),
    ],
)
def test_a_damaged_header_is_refused(damage: tuple[str, str], message: str) -> None:
    text = write_header(a_header())
    damaged = text.replace(*damage)
    assert damaged != text
    with pytest.raises(HeaderError, match=message):
        read_header(damaged)


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        ({"order": ("b0",) * 5}, "order must name each"),
        ({"feedback": "upside"}, "feedback must be one of"),
        ({"structure": "lattice"}, "structure must be one of"),
        ({"f0_hz": (1.0,)}, "one f0 a section"),
        ({"tables": (Table(48e3, FLOATS), Table(48_000.2, FLOATS))}, "same in whole hertz"),
        ({"tables": (Table(48e3, FLOATS[:1]),)}, "must hold 2 rows"),
    ],
)
def test_what_cannot_be_a_header(changes: dict, message: str) -> None:
    with pytest.raises(HeaderError, match=message):
        a_header(**changes)


def test_numbers_that_the_format_lacks_are_not_written() -> None:
    with pytest.raises(HeaderError, match="a number that is none"):
        write_header(a_header(tables=(Table(48e3, FLOATS),)))
    words = ((-32768, 0, 0, -32768, 0), (0,) * 5)
    header = a_header("fixed", feedback="negated", tables=(Table(48e3, words, ((14,) * 5,) * 2),))
    with pytest.raises(HeaderError, match="a1 at 48000 Hz does not fit a word of 16 bits"):
        write_header(header)
