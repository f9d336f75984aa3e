"""docs/firmware.md is true: its design, its C, its Make and CMake files and its tables."""

from __future__ import annotations

import re
import subprocess
from pathlib import Path

import pytest

from a2d.wordlength.formats import Number
from a2d.wordlength.lowest import lowest_f0_hz
from tests.firmware.test_deliver import DESIGN, delivered
from tests.support.c_build import STRICT
from tests.support.paths import ROOT
from tests.support.tools import need

GUIDE = (ROOT / "docs" / "firmware.md").read_text(encoding="utf-8")
NUMBERS = {
    "float32": Number("float32"),
    "16 bits, 14 fraction": Number("fixed", 16, 14),
    "24 bits, 22 fraction": Number("fixed", 24, 22),
    "32 bits, 30 fraction": Number("fixed", 32, 30),
}
STRUCTURES = {"direct": "direct_form_1", "difference": "delta"}


def block(language: str) -> str:
    return re.search(rf"```{language}\n(.*?)```", GUIDE, re.DOTALL)[1]


def project(folder: Path) -> None:
    """The files of a small firmware: what a2d wrote, and the guide's main file."""
    for name, text in delivered().files.items():
        (folder / name).write_text(text)
    main = block("c") + "\nint main(void)\n{\n    audio_start();\n    return 0;\n}\n"
    declared = "void audio_start(void);\nvoid audio_block(const float *in, float *out, uint32_t count);\n"
    (folder / "main.c").write_text(main.replace("\nstatic cove", "\n" + declared + "\nstatic cove", 1))


def test_make(tmp_path: Path) -> None:
    project(tmp_path)
    (tmp_path / "Makefile").write_text(block("make"))
    command = [need("make"), "firmware", "check", "CC=gcc"]
    done = subprocess.run(command, cwd=tmp_path, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
    assert "0 of 448 samples are wrong" in done.stdout


def test_cmake(tmp_path: Path) -> None:
    project(tmp_path)
    (tmp_path / "CMakeLists.txt").write_text(block("cmake"))
    for command in (
        [need("cmake"), "-S", ".", "-B", "build", f"-DCMAKE_C_FLAGS={' '.join(STRICT)}"],
        ["cmake", "--build", "build"],
        ["ctest", "--test-dir", "build"],
    ):
        done = subprocess.run(command, cwd=tmp_path, capture_output=True, text=True, check=False)
        assert done.returncode == 0, done.stdout + done.stderr


def test_the_design_example_delivers() -> None:
    example = re.search(r"( {4}\[firmware\]\n(?: {4}.*\n)+)", GUIDE)[1]
    made = delivered(re.sub(r"^ {4}", "", example, flags=re.MULTILINE), DESIGN)
    assert made.header.error_feedback == 2
    assert str(made.header.number) == "32-bit words, 30 fraction bits"


@pytest.mark.parametrize("row", [0, 1, 2, 3, 4, 5])
def test_the_table_of_lowest_f0(row: int) -> None:
    rows = re.findall(r"^\| ([^|]*) \| (direct|difference) \| (.* Hz) \|$", GUIDE, re.MULTILINE)
    assert len(rows) == 6
    number, structure, cells = rows[row]
    stated = [float(cell) for cell in re.findall(r"([\d.]+) Hz", cells)]
    rates = (44_100.0, 48_000.0, 88_200.0, 96_000.0, 176_400.0, 192_000.0)
    for rate, value in list(zip(rates, stated, strict=True))[row % 2 :: 3]:
        assert f"{lowest_f0_hz(NUMBERS[number], STRUCTURES[structure], rate):.1f}" == f"{value:.1f}"


def test_every_key_is_explained() -> None:
    from a2d.design.firmware import Firmware

    for key in Firmware.__struct_fields__:
        assert f"`{key}`" in GUIDE
