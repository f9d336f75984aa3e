"""Kernels compiled by three compilers with sanitizers: bit for bit what the Python simulation says."""

from __future__ import annotations

import itertools
import subprocess
from functools import cache
from pathlib import Path

import numpy as np
import pytest

from a2d.digital.twin import make_twin
from a2d.firmware.model import Header
from a2d.wordlength.arithmetic import Arithmetic
from a2d.wordlength.simulate_fixed import simulate_fixed
from a2d.wordlength.simulate_float import simulate_float
from tests.support.c_build import COMPILERS, SANITIZE, build, program_of
from tests.support.chains import chain_of
from tests.support.firmware_cases import (
    NUMBERS,
    ORDERS,
    SIGNS,
    STRUCTURE_CASES,
    header_of,
    noise_words,
    rounded_case,
    write_case,
)

SAMPLES = 100_000
BLOCKS = (1, 7, 64)
C_TYPE = {"f32": "float", "f64": "double"}
CASES = [
    (number, structure, order, sign)
    for number, structure, order, sign in itertools.product(NUMBERS, STRUCTURE_CASES, ORDERS, SIGNS)
    if number.startswith("q") or not STRUCTURE_CASES[structure][1]
]


def case_name(number: str, structure: str, order: tuple[str, ...], sign: str) -> str:
    return f"{number}_{structure}_{ORDERS.index(order)}_{sign}"


@cache
def samples_of(number: str) -> np.ndarray:
    words = noise_words(SAMPLES, Arithmetic().highest)
    if number.startswith("q"):
        return words
    return (words / 2.0**23).astype(np.float32 if number == "f32" else np.float64)


@cache
def expected(number: str, structure: str) -> np.ndarray:
    form, error_feedback = STRUCTURE_CASES[structure]
    rounded = rounded_case(number, form)
    if number.startswith("q"):
        run = simulate_fixed(rounded, Arithmetic(error_feedback=error_feedback), samples_of(number).tolist())
        assert run.overflows[0] > 0, "the loud start is there to reach the limiter"
        return np.array(run.output, dtype=np.int32)
    return simulate_float(rounded, samples_of(number))


def case_header(number: str, structure: str, order: tuple[str, ...], sign: str) -> Header:
    form, error_feedback = STRUCTURE_CASES[structure]
    name = case_name(number, structure, order, sign)
    return header_of(name, rounded_case(number, form), feedback=sign, order=order, error_feedback=error_feedback)


def runner(name: str, word: str) -> str:
    """C: filter the file's samples at all block sizes, write the result, and fail when two block sizes differ."""
    return f"""
static int run_{name}(const {word} *in, {word} *out, {word} *first)
{{
    static const uint32_t blocks[3] = {{ {", ".join(f"{b}u" for b in BLOCKS)} }};
    static {name}_filter filter;
    uint32_t b, i;
    for (b = 0; b < 3; ++b) {{
        {name}_use(&filter, {name.upper()}_SET);
        {name}_reset(&filter);
        for (i = 0; i < SAMPLES; i += blocks[b]) {{
            const uint32_t left = SAMPLES - i;
            {name}_process(&filter, in + i, out + i, left < blocks[b] ? left : blocks[b]);
        }}
        if (b == 0) {{
            memcpy(first, out, SAMPLES * sizeof(*out));
        }} else if (memcmp(first, out, SAMPLES * sizeof(*out)) != 0) {{
            return 1;
        }}
    }}
    return fwrite(out, sizeof(*out), SAMPLES, stdout) != SAMPLES;
}}
"""


def program(names: list[tuple[str, str]]) -> str:
    used = list(dict.fromkeys(word for _, word in names))
    lines = ["#include <stdio.h>", "#include <string.h>", f"#define SAMPLES {SAMPLES}u"]
    lines += [f'#include "{name}_kernel.h"' for name, _ in names]
    lines += [runner(name, word) for name, word in names]
    for word in used:
        lines.append(f"static {word} in_{word}[SAMPLES], out_{word}[SAMPLES], first_{word}[SAMPLES];")
    lines.append("int main(void)\n{")
    for word in used:
        lines.append(f"    if (fread(in_{word}, sizeof({word}), SAMPLES, stdin) != SAMPLES) return 2;")
    lines += [f"    if (run_{name}(in_{word}, out_{word}, first_{word})) return 3;" for name, word in names]
    return "\n".join([*lines, "    return 0;", "}"]) + "\n"


def write_all_cases(folder: Path) -> list[tuple[str, str]]:
    for case in CASES:
        write_case(folder, case_header(*case))
    return [(case_name(*case), C_TYPE.get(case[0], "int32_t")) for case in CASES]


@pytest.mark.parametrize("compiler", COMPILERS)
def test_every_combination_equals_the_simulation(compiler: str, tmp_path: Path) -> None:
    source = tmp_path / "all.c"
    source.write_text(program(write_all_cases(tmp_path)))
    # 84 kernels in one program: the sanitizers' code takes gcc five times as long to optimise as to write out
    result = build(compiler, source, *SANITIZE[compiler], *([] if compiler == "clang" else ["-O0"]))
    assert result.returncode == 0, result.stderr[:3000]
    data = b"".join(samples_of(n).tobytes() for n in ("f32", "f64", "q16"))
    done = subprocess.run([str(program_of(source))], input=data, capture_output=True, check=False)
    assert done.returncode == 0, done.stderr.decode()[:3000]
    position = 0
    for number, structure, order, sign in CASES:
        wanted = expected(number, structure)
        got = np.frombuffer(done.stdout, dtype=wanted.dtype, count=SAMPLES, offset=position)
        position += wanted.nbytes
        # x86-64 without contraction rounds each operation as numpy does: equal to the last bit, floating point too
        np.testing.assert_array_equal(got, wanted, err_msg=case_name(number, structure, order, sign))
    assert position == len(done.stdout)


@pytest.mark.parametrize("structure", ["df1", "ef2", "tdf2", "delta"])
def test_wrapping_truncation_and_narrow_samples(structure: str, tmp_path: Path) -> None:
    """The other signal path: wrap-around, truncation, 16-bit samples; and a section that winds its states up."""
    form, error_feedback = STRUCTURE_CASES[structure]
    boost = make_twin(chain_of(([1.0, 20e3, 6.3e8], [1.0, 8e3, 4e7])), 48_000.0)  # 24 dB at low frequencies
    for overflow, rounding in (("wrap", "truncate"), ("saturate", "nearest")):
        arithmetic = Arithmetic(16, 15, overflow, rounding, error_feedback)
        rounded = rounded_case("q24", form, boost)
        name = f"{structure}_{overflow}"
        header = header_of(name, rounded, error_feedback=error_feedback, sample=(16, 15))
        write_case(tmp_path, header, overflow, rounding)
        source = tmp_path / f"{name}.c"
        source.write_text(program([(name, "int32_t")]))
        result = build("gcc", source, *SANITIZE["gcc"])
        assert result.returncode == 0, result.stderr
        samples = noise_words(SAMPLES, 32767, seed=4)
        samples[2_000:4_000] = 32767
        done = subprocess.run([str(program_of(source))], input=samples.tobytes(), capture_output=True, check=False)
        assert done.returncode == 0, done.stderr.decode()[:2000]
        run = simulate_fixed(rounded, arithmetic, samples.tolist())
        assert run.overflows[0] > 1_000
        np.testing.assert_array_equal(np.frombuffer(done.stdout, dtype=np.int32), run.output)
