"""A JSON Schema of the design file, for editors that check TOML while it is typed."""

from __future__ import annotations

import typing
from typing import Any, get_args

import msgspec

from a2d.design.model import Design
from a2d.design.quantities import Quantity
from a2d.design.structs import DesignStruct

_DIALECT = "https://json-schema.org/draft/2020-12/schema"
_REFERENCE = "#/$defs/{name}"


def design_schema() -> dict[str, Any]:
    """The schema of a whole design file (JSON Schema, draft 2020-12)."""
    structs = _reachable(Design)
    _, definitions = msgspec.json.schema_components(structs, schema_hook=_quantity, ref_template=_REFERENCE)
    for struct in structs:
        variants = struct.variants()
        if variants != (struct,):
            references = [{"$ref": _REFERENCE.format(name=variant.__name__)} for variant in variants]
            definitions[struct.__name__] = {"title": struct.__name__, "anyOf": references}
    return {"$schema": _DIALECT, "title": "a2d design file", "$ref": "#/$defs/Design", "$defs": definitions}


def _quantity(kind: type) -> dict[str, Any]:
    """A quantity is a number in the SI unit or a text with its unit."""
    if not issubclass(kind, Quantity):
        raise TypeError(f"no schema for {kind}")
    low = {"exclusiveMinimum" if kind.above_low else "minimum": kind.low}
    text = {"type": "string", "description": f"a value{f' in {kind.unit}' if kind.unit else ''}, {kind.allowed()}"}
    return {
        "description": (kind.__doc__ or "").strip(),
        "anyOf": [{"type": "number", **low, "maximum": kind.high}, text],
    }


def _reachable(root: type[DesignStruct]) -> list[type[DesignStruct]]:
    """Every table that a design may hold, the root first."""
    found: dict[type[DesignStruct], None] = {}
    waiting: list[Any] = [root]
    while waiting:
        wanted = waiting.pop()
        waiting.extend(get_args(wanted))
        if isinstance(wanted, type) and issubclass(wanted, DesignStruct) and wanted not in found:
            found[wanted] = None
            waiting.extend(wanted.variants())
            waiting.extend(typing.get_type_hints(wanted).values())
    return list(found)
