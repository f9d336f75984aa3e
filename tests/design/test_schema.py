"""The JSON Schema: valid by its own standard, and of one mind with the reader on what it can express."""

from __future__ import annotations

import tomllib
from pathlib import Path

import jsonschema
import pytest

from a2d.design.read import check_design
from a2d.design.schema import design_schema
from tests.support import paths

EXAMPLES = sorted(paths.EXAMPLES.glob("*.toml"))


@pytest.fixture(scope="module")
def validator() -> jsonschema.Draft202012Validator:
    schema = design_schema()
    jsonschema.Draft202012Validator.check_schema(schema)
    return jsonschema.Draft202012Validator(schema)


@pytest.mark.parametrize("path", EXAMPLES, ids=lambda p: p.stem)
def test_examples_fit(validator: jsonschema.Draft202012Validator, path: Path) -> None:
    table = tomllib.loads(path.read_text(encoding="utf-8"))
    validator.validate(table)
    assert check_design(table, path.name).design.name == path.stem


def test_there_are_examples() -> None:
    assert EXAMPLES


@pytest.mark.parametrize(
    "change",
    [{"qq": 1}, {"f0": -3}, {"f0": None}, {"kind": "peeking"}, {"q_meaning": "my own"}, {"gain": [1]}],
    ids=str,
)
def test_wrong_tables_do_not(validator: jsonschema.Draft202012Validator, change: dict[str, object]) -> None:
    section = {"name": "a", "kind": "peaking", "f0": "1 kHz", "gain": 3, "q": 1}
    head = {"design": {"name": "demo", "sample_rates": [48000]}}
    validator.validate(head | {"section": [section]})
    with pytest.raises(jsonschema.ValidationError):
        validator.validate(head | {"section": [section | change]})
