"""Coefficient ramps: the same at every block size, ending on the target's own numbers, and true to the equation."""

from __future__ import annotations

import dataclasses
from pathlib import Path

import numpy as np
import pytest

from tests.support.c_build import SANITIZE, build_and_run
from tests.support.firmware_cases import (
    STRUCTURE_CASES,
    header_of,
    noise_words,
    rounded_case,
    table_of,
    twin,
    write_case,
)

BEFORE, RAMP, TOTAL = 500, 700, 2000


def program(word: str) -> str:
    return f"""
#include <stdio.h>
#include <string.h>
#include "cove_kernel.h"
#define TOTAL {TOTAL}u
static {word} in[TOTAL], out[TOTAL], first[TOTAL];
int main(void)
{{
    static const uint32_t blocks[3] = {{ 1u, 7u, 64u }};
    static cove_filter filter;
    uint32_t b, i;
    if (fread(in, sizeof(*in), TOTAL, stdin) != TOTAL) return 2;
    for (b = 0; b < 3; ++b) {{
        cove_use(&filter, &cove_sets[0]);
        cove_reset(&filter);
        cove_process(&filter, in, out, {BEFORE}u);
        cove_ramp(&filter, &cove_sets[1], {RAMP}u);
        for (i = {BEFORE}u; i < TOTAL; i += blocks[b]) {{
            const uint32_t left = TOTAL - i;
            cove_process(&filter, in + i, out + i, left < blocks[b] ? left : blocks[b]);
        }}
        if (memcmp(filter.values, cove_sets[1].values, sizeof(filter.values)) != 0) return 3;
        if (b == 0) memcpy(first, out, sizeof(out));
        if (memcmp(first, out, sizeof(out)) != 0) return 4;
    }}
    cove_ramp(&filter, &cove_sets[0], 0u);
    if (memcmp(filter.values, cove_sets[0].values, sizeof(filter.values)) != 0) return 5;
    fwrite(out, sizeof(*out), TOTAL, stdout);
    return 0;
}}
"""


def reference(structure: str, start: np.ndarray, end: np.ndarray, x: np.ndarray) -> np.ndarray:
    """The structure's equation in double precision, its values moving in equal steps over the ramp; rows [S, 5]."""
    for first, last in zip(start, end, strict=True):
        m1 = m2 = x1 = x2 = 0.0
        y = np.empty_like(x)
        for n, now in enumerate(x):
            part = min(max(n - BEFORE + 1, 0), RAMP) / RAMP
            b0, b1, b2, a1, a2 = first + (last - first) * part
            if structure == "direct_form_1":
                y[n] = b0 * now + b1 * x1 + b2 * x2 - a1 * m1 - a2 * m2
                x2, x1, m2, m1 = x1, now, m1, y[n]
            else:
                y[n] = b0 * now + m1
                kept = (m1, m2) if structure == "delta" else (0.0, 0.0)
                m1, m2 = b1 * now - a1 * y[n] + m2 + kept[0], b2 * now - a2 * y[n] + kept[1]
        x = y
    return x


@pytest.mark.parametrize(
    ("number", "structure"),
    [(n, s) for n in ("f32", "q16", "q32") for s in STRUCTURE_CASES if n != "f32" or not STRUCTURE_CASES[s][1]],
)
def test_a_ramp_follows_the_equation(number: str, structure: str, tmp_path: Path) -> None:
    form, error_feedback = STRUCTURE_CASES[structure]
    tables = [rounded_case(number, form, twin(rate)) for rate in (48_000.0, 96_000.0)]
    header = header_of("cove", tables[0], error_feedback=error_feedback, feedback="negated")
    pair = tuple(table_of(t, r) for t, r in zip(tables, (48_000.0, 96_000.0), strict=True))
    write_case(tmp_path, dataclasses.replace(header, tables=pair))
    words = noise_words(TOTAL, 1 << 23, seed=3)
    fixed = number.startswith("q")
    data = words if fixed else (words / 2.0**23).astype(np.float32)
    word = "int32_t" if fixed else "float"
    source = tmp_path / "ramp.c"
    out = build_and_run("gcc", source, program(word), *SANITIZE["gcc"], stdin=data.tobytes())
    got = np.frombuffer(out, dtype=data.dtype).astype(np.float64)
    wanted = reference(form, tables[0].values, tables[1].values, data.astype(np.float64))
    # A moving word is cut to its own width: half a step of 2^-14 on values times signals up to full scale, times the
    # sections' gain. 32-bit words leave only the signal's rounding, times the noise gain of 400 Hz (~1000). In float32
    # 700 added steps round a1 by up to 2^-24 each, 1e-6 in all by chance, times the same gain.
    allowed = {"f32": 1e-3, "q16": 2.0**23 * 2e-2, "q32": 2.0**11}[number]
    assert np.max(np.abs(got - wanted)) < allowed
