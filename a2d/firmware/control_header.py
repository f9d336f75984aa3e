"""NAME_controls.h: tables for the positions of panel controls, the map from travel to index and back, interpolation."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from a2d.analog.axis import Axis
from a2d.arrays import FloatArray
from a2d.compare.between import triangle_margin
from a2d.compare.control_tables import ControlTable, RateTable
from a2d.compare.positions import MAGNITUDE
from a2d.errors import RoundingError
from a2d.firmware.header import LITERALS, word_type
from a2d.firmware.literals import float64_text, quoted
from a2d.firmware.model import Header, rate_label
from a2d.wordlength.rounding import round_nearest
from a2d.wordlength.stability import is_stable
from a2d.wordlength.structures import VALUE_NAMES, sos_of

_A_LINE = 6  # numbers
_ROUNDED = 2.0**-23  # half a unit in the last place of a1 below 2 and of a2 below 1, in float32, and some


def write_control_header(header: Header, tables: tuple[ControlTable, ...]) -> str:
    """The text of NAME_controls.h for a floating-point header.

    Parameters
    ----------
    header
        What NAME.h holds; its format, structure, order and signs are those of the tables.
    tables
        One a group of controls.

    Raises
    ------
    RoundingError
        A position is unstable in the number format.
    """
    lines = [*_preamble(header, tables), *_cell(header)]
    for table in tables:
        for axis in table.group.axes:
            lines += _scale(header, axis)
        lines += _table(header, table)
    return "\n".join([*lines, "", f"#endif /* {header.name.upper()}_CONTROLS_H */"]) + "\n"


def _preamble(header: Header, tables: tuple[ControlTable, ...]) -> Iterator[str]:
    name, upper = header.name, header.name.upper()
    yield f"/* {name}: what the panel's controls do to the sections in {name}.h."
    yield " *"
    yield " * Written by a2d. A table holds the sections that a group of controls moves, for every position:"
    yield " *   [position][section][value], the values in the order, format and signs of the main header."
    yield " * For each control"
    yield f" *   {name}_CONTROL_to_index(scale)    the position that belongs to a value on the control's scale, with a"
    yield " *                                     fraction between positions; beyond the ends the ends hold"
    yield f" *   {name}_CONTROL_from_index(index)  the way back"
    yield " * and for each group of controls"
    yield f" *   {name}_GROUP_rows(rows, fs_hz, index, ...)"
    yield " *       writes the sections that belong to the indices into `rows`, a copy of a whole table of the main"
    yield " *       header; 0 when there is no such sample rate, else 1."
    yield " * Between positions the values are interpolated in straight lines. The coefficients of stable sections"
    yield " * form a convex set (the triangle |a2| < 1, |a1| < 1 + a2), so everything between positions is stable."
    yield f" * Make the rows a {name}_set and ramp to it: a step at once is heard as a click."
    yield " *"
    for table in tables:
        yield from _proof(table)
    yield " */"
    yield f"#ifndef {upper}_CONTROLS_H"
    yield f"#define {upper}_CONTROLS_H"
    yield ""
    yield f'#include "{name}.h"'
    yield ""
    yield f"#if {upper}_DESIGN != 0x{header.sha256[:8]}u"
    yield f'#error "{name}_controls.h and {name}.h come from different designs"'
    yield "#endif"


def _proof(table: ControlTable) -> Iterator[str]:
    for rate in table.rates:
        k = rate.errors.worst_position()
        worst, at_hz = float(rate.errors.worst[MAGNITUDE, k]), float(rate.errors.at_hz[MAGNITUDE, k])
        yield f" * {table.group.name} at {rate.sample_rate_hz!r} Hz: worst magnitude error {worst!r} dB at {at_hz!r} Hz"
        yield f" *   with {table.position(k)}; linear interpolation adds at most {rate.between.worst_db!r} dB"


def _cell(header: Header) -> Iterator[str]:
    yield ""
    yield "/* The position below an index and the part of the way to the next; beyond the ends the ends hold. */"
    yield f"static inline uint32_t {header.name}_controls_cell(uint32_t positions, double index, double *part)"
    yield "{"
    yield "    const double last = (double)(positions - 1u);"
    yield "    const double held = index > 0.0 ? (index < last ? index : last) : 0.0;"
    yield "    uint32_t low = (uint32_t)held;"
    yield "    if (low > positions - 2u) {"
    yield "        low = positions - 2u;"
    yield "    }"
    yield "    *part = held - (double)low;"
    yield "    return low;"
    yield "}"


def _scale(header: Header, axis: Axis) -> Iterator[str]:
    symbol, size = f"{header.name}_{axis.name}", f"{header.name.upper()}_{axis.name.upper()}_POSITIONS"
    unit = f" in {axis.unit}" if axis.unit else ""
    what = "its positions are numbered from 0" if axis.control.stepped else f"its scale is the value of the first{unit}"
    rising = axis.knots[-1] > axis.knots[0]
    yield ""
    yield f"/* Control {axis.name}: moves {', '.join(quoted(path) for path in axis.control.moves)};"
    yield f" * {what}. */"
    yield f"#define {size} {len(axis.knots)}u"
    yield f"static const double {symbol}_scale[{size}] = {{"
    yield from _numbers([float64_text(float(k)) for k in axis.knots], "    ")
    yield "};"
    yield ""
    yield f"static inline double {symbol}_to_index(double scale)"
    yield "{"
    yield f"    const double *at = {symbol}_scale;"
    yield f"    uint32_t low = 0u, high = {size} - 1u;"
    yield f"    if (!(scale {'>' if rising else '<'} at[0])) {{"
    yield "        return 0.0;"
    yield "    }"
    yield f"    if (scale {'>=' if rising else '<='} at[high]) {{"
    yield "        return (double)high;"
    yield "    }"
    yield "    while (high - low > 1u) {"
    yield "        const uint32_t middle = (low + high) / 2u;"
    yield f"        if (scale {'<' if rising else '>'} at[middle]) {{"
    yield "            high = middle;"
    yield "        } else {"
    yield "            low = middle;"
    yield "        }"
    yield "    }"
    yield "    return (double)low + (scale - at[low]) / (at[high] - at[low]);"
    yield "}"
    yield ""
    yield f"static inline double {symbol}_from_index(double index)"
    yield "{"
    yield f"    const double *at = {symbol}_scale;"
    yield "    double part;"
    yield f"    const uint32_t low = {header.name}_controls_cell({size}, index, &part);"
    yield "    return at[low] + part * (at[low + 1u] - at[low]);"
    yield "}"


def _numbers(texts: list[str], indent: str) -> Iterator[str]:
    for start in range(0, len(texts), _A_LINE):
        comma = "," if start + _A_LINE < len(texts) else ""
        yield indent + ", ".join(texts[start : start + _A_LINE]) + comma


def _table(header: Header, table: ControlTable) -> Iterator[str]:
    upper, group, word = header.name.upper(), table.group.name, word_type(header)
    prefix = f"{upper}_{group.upper()}_TABLE"
    places = ", ".join(f"{header.section_names.index(name)}u" for name in table.names)
    names = ", ".join(quoted(name) for name in table.names)
    yield ""
    yield f"/* Group {group}: sections {names}; the last of its controls runs fastest. */"
    yield f"#define {prefix}_POSITIONS {int(np.prod(table.group.shape))}u"
    yield f"#define {prefix}_SECTIONS {len(table.names)}u"
    yield f"static const uint32_t {header.name}_{group}_places[{prefix}_SECTIONS] = {{ {places} }};"
    for rate in table.rates:
        yield ""
        symbol = f"{header.name}_{group}_{rate_label(rate.sample_rate_hz)}"
        yield f"static const {word} {symbol}[{prefix}_POSITIONS][{prefix}_SECTIONS][{upper}_VALUES] = {{"
        rows = [f"    {{ {', '.join(rows)} }}" for rows in _positions(header, table, rate)]
        yield ",\n".join(rows)
        yield "};"
    yield from _rows_function(header, table, prefix)


def _positions(header: Header, table: ControlTable, rate: RateTable) -> Iterator[list[str]]:
    """One text a section, for each position."""
    values = rounded_values(header, rate.sos.reshape(-1, 6))
    _refuse_unstable(header, values, f"controls of group {table.group.name} at {rate.sample_rate_hz:g} Hz")
    sign = np.array([1.0, 1.0, 1.0, -1.0, -1.0]) if header.feedback == "negated" else np.ones(5)
    stored = (values * sign)[:, [VALUE_NAMES.index(name) for name in header.order]]
    literal = LITERALS[header.number.kind]
    for rows in stored.reshape(-1, len(table.names), 5):
        yield [f"{{ {', '.join(literal(float(v)) for v in row)} }}" for row in rows]


def _refuse_unstable(header: Header, values: FloatArray, what: str) -> None:
    """Every position stable, and so far inside that the rounding of what is interpolated cannot leave the triangle."""
    rounding = _ROUNDED if header.number.kind == "float32" and header.structure != "delta" else 0.0
    stable = np.all(is_stable(values, header.structure))
    if not stable or np.min(triangle_margin(sos_of(values, header.structure))) <= rounding:
        raise RoundingError(
            f"{what}: a position, or what lies between two, is unstable in {header.number} "
            "(choose float64, or the delta structure)"
        )


def rounded_values(header: Header, sos: FloatArray) -> FloatArray:
    """The rows of a table in the header's format and structure, [N, 6] -> [N, 5]."""
    return round_nearest(sos, header.number, header.structure).values


def _rows_function(header: Header, table: ControlTable, prefix: str) -> Iterator[str]:
    name, upper, word, axes = header.name, header.name.upper(), word_type(header), table.group.axes
    indices = "".join(f", double {axis.name}_index" for axis in axes)
    yield ""
    yield f"static inline int {name}_{table.group.name}_rows("
    yield f"    {word} rows[{upper}_SECTIONS][{upper}_VALUES], uint32_t fs_hz{indices})"
    yield "{"
    yield f"    const {word} (*table)[{prefix}_SECTIONS][{upper}_VALUES] = 0;"
    for axis in axes:
        yield f"    double {axis.name}_part;"
        size = f"{upper}_{axis.name.upper()}_POSITIONS"
        given = f"{axis.name}_index"
        nearest = f"(double)(uint32_t)({given} > 0.0 ? {given} + 0.5 : 0.0)" if axis.control.stepped else given
        yield f"    const uint32_t {axis.name}_low ="
        yield f"        {name}_controls_cell({size}, {nearest}, &{axis.name}_part);"
    yield "    uint32_t s, v, corner;"
    for rate in table.rates:
        label = rate_label(rate.sample_rate_hz)
        yield f"    if (fs_hz == {label}u) {{"
        yield f"        table = {name}_{table.group.name}_{label};"
        yield "    }"
    yield "    if (table == 0) {"
    yield "        return 0;"
    yield "    }"
    yield f"    for (s = 0; s < {prefix}_SECTIONS; ++s) {{"
    yield f"        for (v = 0; v < {upper}_VALUES; ++v) {{"
    yield "            double sum = 0.0;"
    yield f"            for (corner = 0; corner < {2 ** len(axes)}u; ++corner) {{"
    yield "                double weight = 1.0;"
    yield "                uint32_t position = 0u;"
    for k, axis in enumerate(axes):
        size = f"{upper}_{axis.name.upper()}_POSITIONS"
        yield f"                weight *= ((corner >> {k}) & 1u) != 0u ? {axis.name}_part : 1.0 - {axis.name}_part;"
        yield f"                position = position * {size} + {axis.name}_low + ((corner >> {k}) & 1u);"
    yield "                sum += weight * (double)table[position][s][v];"
    yield "            }"
    yield f"            rows[{name}_{table.group.name}_places[s]][v] = ({word})sum;"
    yield "        }"
    yield "    }"
    yield "    return 1;"
    yield "}"
