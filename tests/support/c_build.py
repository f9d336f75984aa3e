"""Compiling and running C as firmware teams do: the strict flags of the header's contract."""

from __future__ import annotations

import subprocess
from pathlib import Path

from tests.support.tools import need

STRICT = ["-Wall", "-Wextra", "-Wpedantic", "-Wconversion", "-Wdouble-promotion", "-Werror"]
LANGUAGE = {"gcc": ["-std=c99"], "g++": ["-std=c++11", "-x", "c++"], "clang": ["-std=c99"]}
COMPILERS = tuple(LANGUAGE)
# Debian's clang comes without the address sanitizer's library; traps on undefined behaviour need none.
SANITIZE = {
    "gcc": ["-fsanitize=address,undefined", "-fno-sanitize-recover=all"],
    "g++": ["-fsanitize=address,undefined", "-fno-sanitize-recover=all"],
    "clang": ["-fsanitize=undefined", "-fsanitize-trap=undefined"],
}


def build(compiler: str, source: Path, *flags: str) -> subprocess.CompletedProcess[str]:
    """Compile `source` to a program beside it, with no suffix; the result says whether it went well."""
    command = [need(compiler), *LANGUAGE[compiler], *STRICT, "-O1", *flags, str(source), "-o", str(program_of(source))]
    return subprocess.run(command, capture_output=True, text=True, check=False)


def program_of(source: Path) -> Path:
    return source.with_suffix("")


def run(source: Path, data: bytes = b"") -> bytes:
    """What the compiled program writes."""
    done = subprocess.run([str(program_of(source))], input=data, capture_output=True, check=False)
    assert done.returncode == 0, done.stderr.decode()
    return done.stdout


def build_and_run(compiler: str, source: Path, text: str, *flags: str, stdin: bytes = b"") -> bytes:
    """Write, compile and run a source text."""
    source.write_text(text)
    result = build(compiler, source, *flags)
    assert result.returncode == 0, result.stderr
    return run(source, stdin)
