"""A C header for a bank kept as parallel branches: direct gain, one multiplier a band, sections, and a kernel."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator, Sequence
from dataclasses import replace

import numpy as np

from a2d.digital.parallel import ParallelTwin
from a2d.errors import HeaderError
from a2d.firmware.literals import float32_text, float64_text, quoted
from a2d.firmware.model import rate_label

_TYPES: dict[str, tuple[str, Callable[[float], str]]] = {
    "float32": ("float", float32_text),
    "float64": ("double", float64_text),
}


def bank_symbol(design_name: str, section_name: str) -> str:
    """The C identifier of a bank: the design's name and the section's, other characters as underscores."""
    return f"{design_name}_{re.sub('[^A-Za-z0-9_]', '_', section_name)}"


def round_bank(twin: ParallelTwin, number: str) -> ParallelTwin:
    """The twin with coefficients and weights as `number` (`float32`, `float64`) holds them.

    Raises
    ------
    HeaderError
        Another number format, or a section that rounding makes unstable.
    """
    if number not in _TYPES:
        raise HeaderError(f"a parallel bank is written in float32 or float64 ({number}; use form = cascade for words)")
    kind = np.float32 if number == "float32" else np.float64
    bands = tuple(replace(band, sos=band.sos.astype(kind).astype(np.float64)) for band in twin.bands)
    for name, band in zip(twin.names, bands, strict=True):
        a1, a2 = band.sos[:, 4], band.sos[:, 5]
        if not np.all((np.abs(a2) < 1.0) & (np.abs(a1) < 1.0 + a2)):
            raise HeaderError(f'band "{name}" is unstable in {number} at {twin.sample_rate_hz:g} Hz (use float64)')
    return replace(twin, bands=bands, mix=twin.mix.astype(kind).astype(np.float64), direct=float(kind(twin.direct)))


def bank_header(symbol: str, sha256: str, twins: Sequence[ParallelTwin], number: str) -> str:
    """The text of SYMBOL.bank.h; `twins` of one bank, one a sample rate, already rounded (`round_bank`).

    Raises
    ------
    HeaderError
        Two bands whose names give one macro.
    """
    first = twins[0]
    macros = [re.sub("[^A-Za-z0-9_]", "_", name).upper() for name in first.names]
    twice = next((m for m in macros if macros.count(m) > 1), None)
    if twice is not None:
        raise HeaderError(f"two bands are called {twice} in C (allowed each name once)")
    lines = [*_preamble(symbol, sha256, first), *_macros(symbol, first, macros, twins)]
    lines += [*_tables(symbol, twins, number), *_kernel(symbol, _TYPES[number][0]), "", f"#endif /* {symbol}_BANK_H */"]
    return "\n".join(lines) + "\n"


def _preamble(symbol: str, sha256: str, twin: ParallelTwin) -> Iterator[str]:
    yield f"/* {symbol}: bands in parallel, y = direct*x + sum of mix[band]*band(x)"
    yield " *"
    yield " * Written by a2d from the design file whose SHA-256 hash is"
    yield f" *   {sha256}"
    yield " * Do not edit: change the design and convert again."
    yield " *"
    yield " * A band of several sections runs them one after another. A row holds b0, b1, b2, a1, a2; with input x:"
    yield " *   y = b0*x + s1;  s1 = b1*x - a1*y + s2;  s2 = b2*x - a2*y"
    yield " * mix[band] moves a band; the design's own weights are in the table of mix."
    yield from (f" * band {i}: {quoted(name)}" for i, name in enumerate(twin.names))
    yield " */"


def _macros(symbol: str, twin: ParallelTwin, names: Sequence[str], twins: Sequence[ParallelTwin]) -> Iterator[str]:
    upper = symbol.upper()
    yield from (f"#ifndef {symbol}_BANK_H", f"#define {symbol}_BANK_H", "", f"#define {upper}_BANDS {len(twin.names)}")
    yield f"#define {upper}_SECTIONS {sum(len(band) for band in twin.bands)}"
    yield from (f"#define {upper}_BAND_{name} {i}" for i, name in enumerate(names))
    yield ""
    yield "/* The first section of each band in a table of rows, and the end of the last one. */"
    starts = np.cumsum([0, *(len(band) for band in twin.bands)])
    yield f"static const int {symbol}_first[{len(starts)}] = {{ {', '.join(str(i) for i in starts)} }};"
    yield f"/* Sample rates in Hz: {', '.join(str(rate_label(t.sample_rate_hz)) for t in twins)} */"


def _tables(symbol: str, twins: Sequence[ParallelTwin], number: str) -> Iterator[str]:
    word, text = _TYPES[number]
    first = twins[0]
    weights = ", ".join(text(float(value)) for value in first.mix)
    yield ""
    yield f"static const {word} {symbol}_direct = {text(first.direct)};"
    yield f"static const {word} {symbol}_mix[{len(first.mix)}] = {{ {weights} }};"
    for twin in twins:
        rows = np.concatenate([band.sos for band in twin.bands])[:, [0, 1, 2, 4, 5]]
        yield ""
        yield f"static const {word} {symbol}_{rate_label(twin.sample_rate_hz)}[{len(rows)}][5] = {{"
        for row in rows:
            yield f"    {{ {', '.join(text(float(v)) for v in row)} }},"
        yield "};"


def _kernel(symbol: str, word: str) -> Iterator[str]:
    upper, zero = symbol.upper(), "0.0f" if word == "float" else "0.0"
    yield ""
    yield "/* One sample. state holds two words a section, all zero at the start; mix may be changed at any time. */"
    yield f"static inline {word} {symbol}_sample(const {word} rows[][5], {word} direct, const {word} *mix,"
    yield f"                                     {word} state[][2], {word} x)"
    yield "{"
    yield f"    {word} sum = direct * x;"
    yield "    int band, k;"
    yield f"    for (band = 0; band < {upper}_BANDS; band++) {{"
    yield f"        {word} v = x, y = {zero};"
    yield f"        for (k = {symbol}_first[band]; k < {symbol}_first[band + 1]; k++) {{"
    yield "            y = rows[k][0] * v + state[k][0];"
    yield "            state[k][0] = rows[k][1] * v - rows[k][3] * y + state[k][1];"
    yield "            state[k][1] = rows[k][2] * v - rows[k][4] * y;"
    yield "            v = y;"
    yield "        }"
    yield "        sum += mix[band] * y;"
    yield "    }"
    yield "    return sum;"
    yield "}"
