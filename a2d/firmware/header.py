"""A C header out of plain values: C99 and C++, no dependency but <stdint.h>."""

from __future__ import annotations

from collections.abc import Callable, Iterator

from a2d.errors import HeaderError
from a2d.firmware.literals import float32_text, float64_text, integer_text, quoted
from a2d.firmware.model import Header, Table, rate_label
from a2d.wordlength.formats import KINDS
from a2d.wordlength.structures import EQUATIONS, STRUCTURES, VALUE_NAMES

LITERALS: dict[str, Callable[[float], str]] = {
    "float32": float32_text,
    "float64": float64_text,
    "fixed": integer_text,
}


def write_header(header: Header) -> str:
    """The text of NAME.h.

    Raises
    ------
    HeaderError
        A value that the number format does not have: coefficients are rounded before they come here.
    """
    parts = (_preamble, _macros, _guards, _tables, _lookup, _choice_of_rate, _ending)
    return "\n".join(line for part in parts for line in part(header)) + "\n"


def word_type(header: Header) -> str:
    """The C type of one coefficient."""
    if header.number.kind != "fixed":
        return {"float32": "float", "float64": "double"}[header.number.kind]
    return "int16_t" if header.number.bits <= 16 else "int32_t"


def table_symbol(header: Header, table: Table) -> str:
    """The C name of one rate's table."""
    return f"{header.name}_{rate_label(table.sample_rate_hz)}"


def _preamble(header: Header) -> Iterator[str]:
    order = ", ".join(header.order)
    yield f"/* {header.name}: {quoted(header.title)}"
    yield " *"
    yield " * Written by a2d from the design file whose SHA-256 hash is"
    yield f" *   {header.sha256}"
    yield " * Do not edit: change the design and convert again."
    yield " *"
    yield " * The sections run one after another in the order of the rows. With a section's input x and output y:"
    yield from (f" *   {line}" for line in EQUATIONS[header.structure])
    if header.feedback == "negated":
        yield f" * A row holds {order}; a1 and a2 are stored with the opposite sign (-a1, -a2),"
        yield " * so that a kernel adds their products."
    else:
        yield f" * A row holds {order}; a1 and a2 are stored as they stand in the equation,"
        yield " * so that a kernel subtracts their products."
    yield from _number_in_words(header)
    yield " *"
    yield from _rates_in_words(header)
    yield " */"


def _number_in_words(header: Header) -> Iterator[str]:
    if header.number.kind != "fixed":
        yield f" * Numbers are {header.number.kind}."
        return
    bits, fraction = header.number.bits, header.number.fraction
    if header.structure == "delta":
        yield f" * Numbers are words of {bits} bits, sign included; w stands for w / 2^fraction, each word with its own"
        yield " * fraction bits, which stand in a second table."
    else:
        yield f" * Numbers are words of {bits} bits, sign included; w stands for w / 2^fraction. The words of a rate"
        yield f" * have {fraction} fraction bits less the rate's shift; what is left stands in a second table."
    yield f" * Samples are words of {header.sample_bits} bits with {header.sample_fraction} fraction bits."


def _rates_in_words(header: Header) -> Iterator[str]:
    upper, rates = header.name.upper(), _rate_list(header)
    yield f" * Sample rates in Hz: {rates}. To choose one when compiling, define {upper}_FS_HZ as one of them before"
    yield f" * this file is included: {upper}_TABLE is then its table, and a rate that is not here stops the build."
    yield f" * To choose one when running, call {header.name}_find."


def _rate_list(header: Header) -> str:
    return ", ".join(str(rate_label(rate)) for rate in header.rates_hz)


def _macros(header: Header) -> Iterator[str]:
    upper = header.name.upper()
    yield f"#ifndef {upper}_H"
    yield f"#define {upper}_H"
    yield ""
    yield "#include <stdint.h>"
    yield ""
    for name, value in macro_values(header).items():
        yield f"#define {upper}_{name} {value}"


def macro_values(header: Header) -> dict[str, str]:
    """What the header defines, without the name's prefix."""
    values = {
        "DESIGN": f"0x{header.sha256[:8]}u",
        "SECTIONS": str(len(header.section_names)),
        "RATES": str(len(header.tables)),
        "VALUES": str(len(VALUE_NAMES)),
    }
    values |= {value.upper(): str(header.order.index(value)) for value in VALUE_NAMES}
    values["FEEDBACK_NEGATED"] = str(int(header.feedback == "negated"))
    values |= {f"NUMBER_{kind.upper()}": str(int(kind == header.number.kind)) for kind in KINDS}
    values |= {f"STRUCTURE_{name.upper()}": str(int(name == header.structure)) for name in STRUCTURES}
    if header.number.kind == "fixed":
        values |= {
            "NUMBER_BITS": str(header.number.bits),
            "NUMBER_FRACTION": str(header.number.fraction),
            "SAMPLE_BITS": str(header.sample_bits),
            "SAMPLE_FRACTION": str(header.sample_fraction),
            "ERROR_FEEDBACK": str(header.error_feedback),
        }
    return values


def _guards(header: Header) -> Iterator[str]:
    """An array type of a negative size stops a build in every version of C and C++."""
    word = word_type(header)
    size = {"float": 4, "double": 8, "int16_t": 2, "int32_t": 4}[word]
    yield ""
    yield f"/* The tables need {size} bytes in {word}; where it has another size the build stops here. */"
    yield f"typedef char {header.name}_{word}_has_{size}_bytes[sizeof({word}) == {size} ? 1 : -1];"
    yield from _expected_number(header)


def _expected_number(header: Header) -> Iterator[str]:
    upper = header.name.upper()
    yield ""
    yield f"/* Code that needs a number format defines {upper}_NEEDS_FLOAT32, _FLOAT64 or _FIXED before this file. */"
    others = [kind.upper() for kind in KINDS if kind != header.number.kind]
    yield "#if " + " || ".join(f"defined({upper}_NEEDS_{kind})" for kind in others)
    yield f'#error "{header.name}.h holds {header.number.kind} numbers"'
    yield "#endif"


def _tables(header: Header) -> Iterator[str]:
    for table in header.tables:
        yield ""
        yield from _table_comment(table)
        yield from _array(header, table_symbol(header, table), word_type(header), _stored_rows(header, table))
        if header.number.kind == "fixed":
            yield ""
            yield "/* The fraction bits of each of these words. */"
            rows = [[str(row[VALUE_NAMES.index(name)]) for name in header.order] for row in table.fractions]
            yield from _array(header, f"{table_symbol(header, table)}_fractions", "int8_t", rows)


def _table_comment(table: Table) -> Iterator[str]:
    yield f"/* Sample rate {table.sample_rate_hz!r} Hz."
    if table.band_hz is not None:
        low, high = (float(edge) for edge in table.band_hz)
        yield f" * Worst errors of these numbers against the analog response from {low!r} Hz to {high!r} Hz:"
    for error in table.proof:
        yield f" *   {error.quantity} {float(error.worst)!r} {error.unit} at {float(error.at_hz)!r} Hz"
    yield " */"


def _stored_rows(header: Header, table: Table) -> list[list[str]]:
    sign = -1 if header.feedback == "negated" else 1
    literal = LITERALS[header.number.kind]
    rows = []
    for values in table.values:
        stored = dict(zip(VALUE_NAMES, (*values[:3], sign * values[3], sign * values[4]), strict=True))
        if header.number.kind == "fixed":
            _check_words(header, table, stored)
        rows.append([literal(stored[name]) for name in header.order])
    return rows


def _check_words(header: Header, table: Table, stored: dict[str, float]) -> None:
    limit = 1 << (header.number.bits - 1)
    for name, value in stored.items():
        if not -limit <= value < limit:
            raise HeaderError(
                f"{name} at {table.sample_rate_hz:g} Hz does not fit a word of {header.number.bits} bits "
                f"({value:g}, allowed {-limit} to {limit - 1})"
            )


def _array(header: Header, symbol: str, word: str, rows: list[list[str]]) -> Iterator[str]:
    upper = header.name.upper()
    yield f"static const {word} {symbol}[{upper}_SECTIONS][{upper}_VALUES] = {{"
    for index, (row, name, f0) in enumerate(zip(rows, header.section_names, header.f0_hz, strict=True)):
        comma = "," if index + 1 < len(rows) else ""
        yield f"    /* {quoted(name)}, f0 {float(f0)!r} Hz */"
        yield f"    {{ {', '.join(row)} }}{comma}"
    yield "};"


def _lookup(header: Header) -> Iterator[str]:
    name, upper, word, fixed = header.name, header.name.upper(), word_type(header), header.number.kind == "fixed"
    yield ""
    yield "/* All tables with their rates. */"
    yield "typedef struct {"
    yield "    uint32_t fs_hz;"
    yield f"    const {word} (*values)[{upper}_VALUES];"
    if fixed:
        yield f"    const int8_t (*fractions)[{upper}_VALUES];"
        yield "    int32_t output_shift; /* the output is 2^output_shift times that of the last section */"
    yield f"}} {name}_set;"
    yield ""
    yield f"static const {name}_set {name}_sets[{upper}_RATES] = {{"
    for index, table in enumerate(header.tables):
        symbol = table_symbol(header, table)
        extra = f", {symbol}_fractions, {table.output_shift}" if fixed else ""
        comma = "," if index + 1 < len(header.tables) else ""
        yield f"    {{ {rate_label(table.sample_rate_hz)}u, {symbol}{extra} }}{comma}"
    yield "};"
    yield ""
    yield "/* The set for a sample rate, or 0 when there is none. */"
    yield f"static inline const {name}_set *{name}_find(uint32_t fs_hz)"
    yield "{"
    yield "    uint32_t i;"
    yield f"    for (i = 0; i < {upper}_RATES; ++i) {{"
    yield f"        if ({name}_sets[i].fs_hz == fs_hz) {{"
    yield f"            return &{name}_sets[i];"
    yield "        }"
    yield "    }"
    yield "    return 0;"
    yield "}"


def _choice_of_rate(header: Header) -> Iterator[str]:
    upper = header.name.upper()
    yield ""
    if len(header.tables) == 1:
        yield f"#if !defined({upper}_FS_HZ)"
        yield f"#define {upper}_FS_HZ {rate_label(header.rates_hz[0])}"
        yield "#endif"
    yield f"#if defined({upper}_FS_HZ)"
    for index, table in enumerate(header.tables):
        yield f"#{'if' if index == 0 else 'elif'} {upper}_FS_HZ == {rate_label(table.sample_rate_hz)}"
        yield f"#define {upper}_TABLE {table_symbol(header, table)}"
        yield f"#define {upper}_SET (&{header.name}_sets[{index}])"
    yield "#else"
    yield f'#error "{header.name}: {upper}_FS_HZ is none of the rates in this header: {_rate_list(header)}"'
    yield "#endif"
    yield "#endif"


def _ending(header: Header) -> Iterator[str]:
    yield ""
    yield f"#endif /* {header.name.upper()}_H */"
