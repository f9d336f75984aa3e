"""External programs: a missing one fails where A2D_REQUIRE_TOOLS=1, and is a visible skip elsewhere."""

from __future__ import annotations

import os
import shutil

import pytest


def need(program: str) -> str:
    """The path of `program`."""
    path = shutil.which(program)
    if path is None:
        if os.environ.get("A2D_REQUIRE_TOOLS") == "1":
            pytest.fail(f"{program} is not installed (A2D_REQUIRE_TOOLS=1 asks for it)")
        pytest.skip(f"{program} is not installed")
    return path
