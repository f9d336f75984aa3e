"""The plain values out of a C header: the exact inverse of `write_header`.

White space and the lay-out of lines may have been changed by a formatter; macros, tables and the comments that name
sections must be there.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass

from a2d.errors import HeaderError
from a2d.firmware.literals import float32_value, float64_value, integer_value, unquoted
from a2d.firmware.model import Header, ProvedError, Table
from a2d.wordlength.formats import KINDS, Number
from a2d.wordlength.structures import STRUCTURES, VALUE_NAMES

VALUES: dict[str, Callable[[str], float]] = {
    "float32": float32_value,
    "float64": float64_value,
    "fixed": integer_value,
}
_STRING = r'"(?:[^"\\]|\\.)*"'
_NUMBER = r"[-+]?[0-9][0-9.eE+-]*"
_TITLE = re.compile(rf"/\*\s*(\w+):\s*({_STRING})")
_HASH = re.compile(r"\b([0-9a-f]{64})\b")
_DEFINE = re.compile(r"^[ \t]*#[ \t]*define[ \t]+(\w+)[ \t]+(\S+)[ \t]*$", re.MULTILINE)
_SECTION = re.compile(rf"/\*\s*({_STRING}), f0 ({_NUMBER}) Hz\s*\*/")
_RATE = re.compile(rf"/\*\s*Sample rate ({_NUMBER}) Hz\.(.*?)\*/", re.DOTALL)
_BAND = re.compile(rf"from ({_NUMBER}) Hz to ({_NUMBER}) Hz")
_ERROR = re.compile(rf"^\s*\*\s*(\w+) ({_NUMBER}) (\S+) at ({_NUMBER}) Hz\s*$", re.MULTILINE)
_COMMENT = re.compile(r"/\*.*?\*/", re.DOTALL)


@dataclass(frozen=True)
class _Source:
    """The text of a header, its macros without the prefix, and what they say of the tables."""

    text: str
    name: str
    macros: dict[str, str]

    def macro(self, name: str) -> str:
        if name not in self.macros:
            raise HeaderError(f"the header does not define {self.name.upper()}_{name}")
        return self.macros[name]

    def whole(self, name: str) -> int:
        return integer_value(self.macro(name))

    def only(self, prefix: str, choices: tuple[str, ...]) -> str:
        """The one of `choices` whose macro is 1."""
        chosen = [choice for choice in choices if self.whole(prefix + choice.upper()) == 1]
        if len(chosen) != 1:
            raise HeaderError(f"exactly one of {self.name.upper()}_{prefix}* must be 1 ({len(chosen)} are)")
        return chosen[0]


def read_header(text: str) -> Header:
    """The values that a header holds.

    Raises
    ------
    HeaderError
        Something that `write_header` writes is missing, or its parts disagree.
    """
    title = _found(_TITLE, text, "its first comment, with name and title")
    name = title[1]
    prefix = name.upper() + "_"
    macros = {k.removeprefix(prefix): v for k, v in _DEFINE.findall(text) if k.startswith(prefix)}
    source = _Source(text, name, macros)
    number = _number(source)
    names, f0_hz = _sections(source)
    fixed = number.kind == "fixed"
    return Header(
        name=name,
        title=unquoted(title[2]),
        sha256=_found(_HASH, text[title.end() :], "the design's SHA-256 hash")[1],
        section_names=names,
        f0_hz=f0_hz,
        number=number,
        tables=_tables(source, number),
        structure=source.only("STRUCTURE_", STRUCTURES),
        error_feedback=source.whole("ERROR_FEEDBACK") if fixed else 0,
        order=_order(source),
        feedback="negated" if source.whole("FEEDBACK_NEGATED") else "as_written",
        sample_bits=source.whole("SAMPLE_BITS") if fixed else 0,
        sample_fraction=source.whole("SAMPLE_FRACTION") if fixed else 0,
    )


def _number(source: _Source) -> Number:
    kind = source.only("NUMBER_", KINDS)
    if kind != "fixed":
        return Number(kind)
    return Number(kind, source.whole("NUMBER_BITS"), source.whole("NUMBER_FRACTION"))


def _order(source: _Source) -> tuple[str, ...]:
    places = {source.whole(value.upper()): value for value in VALUE_NAMES}
    if sorted(places) != list(range(len(VALUE_NAMES))):
        raise HeaderError(f"the places of {', '.join(VALUE_NAMES)} in a row are not 0 to 4, each once")
    return tuple(places[place] for place in sorted(places))


def _sections(source: _Source) -> tuple[tuple[str, ...], tuple[float, ...]]:
    count = source.whole("SECTIONS")
    found = _SECTION.findall(source.text)
    if len(found) < count or any(found[i] != found[i % count] for i in range(len(found))):
        raise HeaderError(f"the comments before the rows do not name the same {count} sections in each table")
    return tuple(unquoted(name) for name, _ in found[:count]), tuple(float64_value(f0) for _, f0 in found[:count])


def _tables(source: _Source, number: Number) -> tuple[Table, ...]:
    rates = _RATE.findall(source.text)
    if len(rates) != source.whole("RATES"):
        raise HeaderError(f"the header says {source.whole('RATES')} sample rates and comments on {len(rates)}")
    return tuple(_table(source, number, float64_value(rate), comment) for rate, comment in rates)


def _table(source: _Source, number: Number, rate: float, comment: str) -> Table:
    symbol = f"{source.name}_{round(rate)}"
    order, sign = _order(source), -1 if source.whole("FEEDBACK_NEGATED") else 1
    rows = _array(source, symbol, VALUES[number.kind])
    columns = [order.index(value) for value in VALUE_NAMES]
    values = tuple(
        tuple(
            row[c] * (sign if value.startswith("a") else 1) + 0 for c, value in zip(columns, VALUE_NAMES, strict=True)
        )
        for row in rows
    )
    band = _BAND.search(comment)
    fractions = _array(source, f"{symbol}_fractions", integer_value) if number.kind == "fixed" else ()
    return Table(
        sample_rate_hz=rate,
        values=values,
        fractions=tuple(tuple(int(row[c]) for c in columns) for row in fractions),
        output_shift=_output_shift(source, symbol) if number.kind == "fixed" else 0,
        band_hz=(float64_value(band[1]), float64_value(band[2])) if band else None,
        proof=tuple(_proved(*found) for found in _ERROR.findall(comment)),
    )


def _proved(quantity: str, worst: str, unit: str, at_hz: str) -> ProvedError:
    return ProvedError(quantity, unit, float64_value(worst), float64_value(at_hz))


def _array(source: _Source, symbol: str, value: Callable[[str], float]) -> tuple[tuple[float, ...], ...]:
    pattern = re.compile(rf"\b{symbol}\s*\[\w+\]\s*\[\w+\]\s*=\s*\{{(.*?)\}}\s*;", re.DOTALL)
    body = _COMMENT.sub("", _found(pattern, source.text, f"the table {symbol}")[1])
    rows = tuple(tuple(value(item.strip()) for item in row.split(",")) for row in re.findall(r"\{([^{}]*)\}", body))
    shape = [source.whole("VALUES")] * source.whole("SECTIONS")
    if [len(row) for row in rows] != shape:
        raise HeaderError(f"the table {symbol} must have {len(shape)} rows of {source.whole('VALUES')} numbers")
    return rows


def _output_shift(source: _Source, symbol: str) -> int:
    pattern = re.compile(rf"\{{[^{{}}]*\b{symbol}\s*,\s*{symbol}_fractions\s*,\s*(-?[0-9]+)\s*\}}")
    return int(_found(pattern, source.text, f"the set of {symbol}")[1])


def _found(pattern: re.Pattern[str], text: str, what: str) -> re.Match[str]:
    match = pattern.search(text)
    if match is None:
        raise HeaderError(f"the header lacks {what}")
    return match
