"""The stages are modules in one direction, start-up stays light, and the public names are these."""

from __future__ import annotations

import ast
import subprocess
import sys
from pathlib import Path

import pytest

import a2d
from tests.support.paths import ROOT

STAGES = [
    "version", "errors", "arrays", "checks", "files", "design", "analog", "digital", "compare", "conversion",
    "wordlength", "firmware", "listening", "report", "commands", "cli",
]  # fmt: skip
EDGE = ["__init__", "__main__"]  # may import everything
MODULES = sorted((ROOT / "a2d").rglob("*.py"))


def own_stage(path: Path) -> str:
    return path.relative_to(ROOT / "a2d").with_suffix("").parts[0]


def stage_of(module: str) -> str:
    return module.split(".")[1] if module.count(".") else "__init__"


def imports_of(path: Path) -> set[str]:
    """Modules of a2d that a file imports, anywhere in it."""
    found = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            found |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom) and node.module:
            assert node.level == 0, f"{path}: relative import"
            found.add(node.module)
            if node.module == "a2d":
                found |= {f"a2d.{alias.name}" for alias in node.names}
    return {name for name in found if name == "a2d" or name.startswith("a2d.")} - {"a2d"}


def test_every_module_belongs_to_a_stage() -> None:
    assert MODULES
    assert {own_stage(path) for path in MODULES} <= set(STAGES) | set(EDGE)


@pytest.mark.parametrize(
    "path", [path for path in MODULES if own_stage(path) not in EDGE], ids=lambda p: str(p.relative_to(ROOT))
)
def test_imports_go_one_way(path: Path) -> None:
    stage = own_stage(path)
    allowed = set(STAGES[: STAGES.index(stage) + 1])
    wrong = {name for name in imports_of(path) if stage_of(name) not in allowed}
    assert not wrong, f"{stage} stands left of {sorted(wrong)}"


def test_no_cycles_between_modules() -> None:
    graph = {}
    for path in MODULES:
        name = ".".join(path.relative_to(ROOT).with_suffix("").parts).removesuffix(".__init__")
        graph[name] = imports_of(path) - {name}  # a package's __init__ that names its own modules
    done: set[str] = set()

    def visit(name: str, trail: tuple[str, ...]) -> None:
        assert name not in trail, f"cycle: {' -> '.join([*trail, name])}"
        if name not in done:
            for other in graph.get(name, ()):
                visit(other, (*trail, name))
            done.add(name)

    for name in graph:
        visit(name, ())


HEAVY = ["scipy", "matplotlib", "soundfile", "jinja2", "numpy.ma", "importlib.metadata"]


def test_a_plain_conversion_loads_nothing_heavy(tmp_path: Path) -> None:
    code = (
        "import sys; from a2d.cli import main;"
        f"status = main(['convert', {str(ROOT / 'audio_examples' / 'harbour_eq.toml')!r}, '--out', {str(tmp_path)!r}]);"
        f"assert status == 0, status; heavy = [m for m in {HEAVY!r} if m in sys.modules];"
        "sys.exit(', '.join(heavy) or 0)"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False, cwd=ROOT)
    assert done.returncode == 0, done.stderr


def test_importing_the_library_loads_nothing_heavy() -> None:
    code = f"import sys, a2d; sys.exit(', '.join(m for m in {HEAVY!r} if m in sys.modules) or 0)"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False, cwd=ROOT)
    assert done.returncode == 0, done.stderr


def test_public_names() -> None:
    assert a2d.__all__ == sorted(a2d.__all__, key=lambda n: (not n.isupper(), not n[0].isupper(), n))
    for name in a2d.__all__:
        assert getattr(a2d, name) is not None
    public = {name for name in vars(a2d) if not name.startswith("_")}
    loaded = {"annotations", "import_module", "Any"}
    submodules = {path.stem for path in (ROOT / "a2d").iterdir()}
    assert public - loaded - submodules <= set(a2d.__all__)


def test_every_public_function_is_documented() -> None:
    for name in a2d.__all__:
        value = getattr(a2d, name)
        if callable(value):
            assert (value.__doc__ or "").strip(), name
