"""The documentation is true: the README's commands run, its files appear, every link leads somewhere."""

from __future__ import annotations

import re
import shlex
from pathlib import Path

import pytest

from a2d.cli import COMMANDS, main
from tests.support.paths import ROOT

README = (ROOT / "README.md").read_text(encoding="utf-8")
PAGES = [ROOT / "README.md", ROOT / "DEVELOPERS.md", *sorted((ROOT / "docs").glob("*.md"))]


def shell_lines() -> list[str]:
    return [line for block in re.findall(r"```sh\n(.*?)```", README, re.DOTALL) for line in block.splitlines()]


def test_there_are_two_commands_and_each_sets_itself_up() -> None:
    lines = shell_lines()
    assert len(lines) == 2
    assert all(line.startswith("python3 -m venv ") and "pip install" in line for line in lines)
    assert "pytest" in lines[1]


def test_the_first_command_writes_what_the_readme_lists(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    arguments = shlex.split(shell_lines()[0].partition("/bin/a2d ")[2])
    design = arguments[1]
    assert (ROOT / design).exists()
    monkeypatch.chdir(tmp_path)
    assert main([arguments[0], str(ROOT / design), *arguments[2:]]) == 0
    written = {path.name for path in (tmp_path / "out").iterdir()}
    listed = re.findall(r"^\| `(harbour_eq\.[^`]+)`", README, re.MULTILINE)
    assert listed
    for pattern in listed:
        assert any(re.fullmatch(pattern.replace(".", r"\.").replace("*", "[a-z_]+"), name) for name in written), pattern


def test_every_command_is_named() -> None:
    for name in COMMANDS:
        assert f"a2d {name}" in README or name == "convert"


@pytest.mark.parametrize("page", PAGES, ids=lambda p: p.name)
def test_links_lead_somewhere(page: Path) -> None:
    for target in re.findall(r"\]\(([^)#]+)[^)]*\)", page.read_text(encoding="utf-8")):
        if not target.startswith("http"):
            assert (page.parent / target).exists(), f"{page.name}: {target}"
