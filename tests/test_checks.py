"""Format, lint and types: part of the one command that checks everything."""

from __future__ import annotations

import subprocess
import sys

import pytest

from tests.support.paths import ROOT

CHECKS = {
    "format": ["ruff", "format", "--check", "."],
    "lint": ["ruff", "check", "."],
    "types": ["mypy"],
}


@pytest.mark.parametrize("name", CHECKS)
def test_check(name: str) -> None:
    done = subprocess.run([sys.executable, "-m", *CHECKS[name]], cwd=ROOT, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stdout + done.stderr
