"""Test vectors: the kernels pass them, and every fault that was put in on purpose fails them."""

from __future__ import annotations

import subprocess
from pathlib import Path

import numpy as np
import pytest

from a2d.digital.twin import make_twin
from a2d.firmware.header import write_header
from a2d.firmware.kernel import arithmetic_of, write_kernel
from a2d.firmware.model import Header
from a2d.firmware.vectors import make_vectors, stimulus, write_check, write_vectors
from a2d.wordlength.rounding import round_nearest
from tests.support.c_build import COMPILERS, SANITIZE, build, program_of, run
from tests.support.chains import chain_of, peaking
from tests.support.firmware_cases import NUMBERS, STRUCTURE_CASES, header_of, rounded_case, table_of, twin

RATES = (48_000.0, 96_000.0)
CASES = [
    ("f32", "tdf2"),
    ("f32", "df1"),
    ("f64", "delta"),
    ("q16", "df1"),
    ("q32", "ef2"),
    ("q24", "tdf2"),
    ("q16", "delta"),
]


def case(number: str, structure: str) -> tuple[Header, dict[str, str]]:
    """A header with two rates and its four files."""
    form, error_feedback = STRUCTURE_CASES[structure]
    tables = tuple(rounded_case(number, form, twin(rate)) for rate in RATES)
    header = header_of("cove", tables[0], error_feedback=error_feedback)
    header = header.__class__(
        **{**vars(header), "tables": tuple(table_of(t, r) for t, r in zip(tables, RATES, strict=True))}
    )
    vectors = make_vectors(tables, arithmetic_of(header))
    files = {
        "cove.h": write_header(header),
        "cove_kernel.h": write_kernel(header, arithmetic_of(header)),
        "cove_vectors.h": write_vectors(header, vectors),
        "cove_check.c": write_check(header),
    }
    return header, files


def write(folder: Path, files: dict[str, str]) -> Path:
    for name, text in files.items():
        (folder / name).write_text(text)
    return folder / "cove_check.c"


@pytest.mark.parametrize(("number", "structure"), CASES)
def test_the_kernels_pass(number: str, structure: str, tmp_path: Path) -> None:
    source = write(tmp_path, case(number, structure)[1])
    for compiler in COMPILERS if (number, structure) in (CASES[0], CASES[-1]) else ("gcc",):
        result = build(compiler, source, *SANITIZE[compiler])
        assert result.returncode == 0, result.stderr
        text = run(source).decode()
        assert text.count(": 0 of 448 samples are wrong") == 6


@pytest.mark.parametrize("flags", [["-O3", "-march=haswell", "-ffp-contract=fast"], ["-O2", "-ffast-math"]])
def test_a_compiler_that_contracts_still_passes(flags: list[str], tmp_path: Path) -> None:
    source = write(tmp_path, case("f32", "df1")[1])
    assert build("gcc", source, *flags).returncode == 0
    if "haswell" in flags[1] and "fma" not in Path("/proc/cpuinfo").read_text():
        pytest.skip("this processor has no fused multiply-add")
    run(source)


@pytest.mark.parametrize(("number", "structure"), [("f32", "tdf2"), ("q32", "ef2")])
def test_without_the_ramp(number: str, structure: str, tmp_path: Path) -> None:
    source = write(tmp_path, case(number, structure)[1])
    assert build("gcc", source, "-DCOVE_NO_RAMP").returncode == 0
    run(source)


def swapped(text: str, one: str, other: str) -> str:
    return text.replace(one, "\0").replace(other, one).replace("\0", other)


def swap_b1_b2(files: dict[str, str]) -> dict[str, str]:
    return files | {"cove_kernel.h": swapped(files["cove_kernel.h"], "COVE_B1]", "COVE_B2]")}


def flip_sign(files: dict[str, str]) -> dict[str, str]:
    kernel = files["cove_kernel.h"]
    for one in ("- a1 * y", "- (int64_t)a1 * y", "- ((a1 * y)"):
        kernel = kernel.replace(one, "+" + one[1:])
    return files | {"cove_kernel.h": kernel}


def shift_off_by_one(files: dict[str, str]) -> dict[str, str]:
    kernel = files["cove_kernel.h"]
    kernel = kernel.replace("const int shift = fractions[0];", "const int shift = fractions[0] - 1;")
    kernel = kernel.replace("half) >> COVE_GUARD)", "half) >> (COVE_GUARD - 1))")
    return files | {"cove_kernel.h": kernel}


def half_the_state(files: dict[str, str]) -> dict[str, str]:
    """The second of a section's state variables is lost between blocks."""
    kernel = files["cove_kernel.h"]
    for line in (
        "state[1] = s2;",
        "state[3] = y2;",
        "state[1] = v2;",
        "state->y2 = y2;",
        "state->s2 = s2;",
        "state->v2 = v2;",
    ):
        kernel = kernel.replace(line, line.split("=")[0] + "= 0;")
    return files | {"cove_kernel.h": kernel}


def wrong_rate(files: dict[str, str]) -> dict[str, str]:
    check = files["cove_check.c"].replace("*)filter, set)", "*)filter, set != 0 ? &cove_sets[0] : set)")
    return files | {"cove_check.c": check}


def one_bit(files: dict[str, str]) -> dict[str, str]:
    """The smallest fault there is in fixed point: truncated where it should be rounded."""
    kernel = files["cove_kernel.h"]
    kernel = kernel.replace("half = shift > 0 ? (int64_t)1 << (shift - 1) : 0;", "half = 0;")
    return files | {"cove_kernel.h": kernel.replace("half = (int64_t)1 << 28;", "half = 0;")}


FAULTS = [swap_b1_b2, flip_sign, half_the_state, wrong_rate]
FIXED_FAULTS = [shift_off_by_one, one_bit]


@pytest.mark.parametrize(("number", "structure"), CASES)
def test_every_fault_is_caught(number: str, structure: str, tmp_path: Path) -> None:
    files = case(number, structure)[1]
    faults = [*FAULTS, *(FIXED_FAULTS if number.startswith("q") else [])]
    if structure.startswith("ef"):
        faults.remove(one_bit)  # what rounding dropped is fed back: truncation is a change of words, tested in df1
    for fault in faults:
        folder = tmp_path / fault.__name__
        folder.mkdir()
        faulty = fault(files)
        assert faulty != files, fault.__name__
        source = write(folder, faulty)
        result = build("gcc", source)
        assert result.returncode == 0, result.stderr
        assert subprocess.run([str(program_of(source))], capture_output=True, check=False).returncode == 1, (
            fault.__name__
        )


def test_files_of_another_design_stop_the_build(tmp_path: Path) -> None:
    files = case("f32", "tdf2")[1]
    source = write(tmp_path, files | {"cove.h": files["cove.h"].replace("0x5a5a5a5au", "0x5a5a5a5bu")})
    result = build("gcc", source)
    assert "come from different designs" in result.stderr
    files["cove.h"] = files["cove.h"].replace("_DIRECT_FORM_2 1", "_DIRECT_FORM_2 0")
    assert "differ in number format, structure" in build("gcc", write(tmp_path, files)).stderr


def test_the_stimulus_is_exact_in_16_bits() -> None:
    x = stimulus()
    np.testing.assert_array_equal(x * 65536, np.rint(x * 65536))
    assert np.max(np.abs(x)) == 0.5
    assert np.all(x[-32:] == 0.0)


@pytest.mark.parametrize("structure", ["direct_form_1", "transposed_direct_form_2", "delta"])
@pytest.mark.parametrize("f0", [20.0, 200.0, 2_000.0])
def test_a_wrong_rate_stands_out_at_any_f0(structure: str, f0: float) -> None:
    """The outputs at two rates differ by more than the tolerance, also where rounding makes that wide."""
    twins = [make_twin(chain_of(peaking(f0, 1.0, 3.0)), rate) for rate in RATES]
    tables = [round_nearest(twin.sos, NUMBERS["f32"], structure) for twin in twins]
    vectors = make_vectors(tuple(tables), None)
    assert np.max(np.abs(vectors.outputs[0] - vectors.outputs[1])) > 1.5 * np.max(vectors.tolerances)
