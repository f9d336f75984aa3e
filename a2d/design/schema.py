"""A JSON Schema of the design file, for editors that check TOML while it is typed.

Made here and not by msgspec, whose generator cannot show a default that is a quantity, nor a table that is one of
several sorts.
"""

from __future__ import annotations

import typing
from typing import Any, get_args, get_origin

import msgspec

from a2d.design.model import Design
from a2d.design.quantities import Quantity
from a2d.design.structs import DesignStruct

_DIALECT = "https://json-schema.org/draft/2020-12/schema"
_PLAIN = {str: "string", int: "integer", float: "number", bool: "boolean"}


def design_schema() -> dict[str, Any]:
    """The schema of a whole design file (JSON Schema, draft 2020-12)."""
    definitions: dict[str, Any] = {}
    waiting: list[type[DesignStruct]] = [Design]
    while waiting:
        struct = waiting.pop()
        if struct.__name__ in definitions:
            continue
        if struct.variants() == (struct,):
            definitions[struct.__name__] = _table(struct)
            waiting.extend(_structs_in(list(typing.get_type_hints(struct).values())))
        else:
            definitions[struct.__name__] = {"anyOf": [_of(variant) for variant in struct.variants()]}
            waiting.extend(struct.variants())
    ordered = dict(sorted(definitions.items()))
    return {"$schema": _DIALECT, "title": "a2d design file", **_of(Design), "$defs": ordered}


def _table(struct: type[DesignStruct]) -> dict[str, Any]:
    hints, fields = typing.get_type_hints(struct), msgspec.structs.fields(struct)
    return {
        "type": "object",
        "description": (struct.__doc__ or "").partition("\n\n")[0].strip(),
        "properties": {f.encode_name: _of(hints[f.name]) | _default(f) for f in fields},
        "required": [f.encode_name for f in fields if f.required],
        "additionalProperties": False,
    }


def _default(field: msgspec.structs.FieldInfo) -> dict[str, Any]:
    value = field.default
    return {"default": value} if isinstance(value, (str, int, float)) else {}


def _of(wanted: Any) -> dict[str, Any]:
    """The schema of one type of the model."""
    origin, arguments = get_origin(wanted), get_args(wanted)
    if origin is typing.Literal:
        return {"enum": list(arguments)}
    if origin is tuple and arguments[-1] is Ellipsis:
        return {"type": "array", "items": _of(arguments[0])}
    if origin is tuple:
        return {"type": "array", "prefixItems": [_of(t) for t in arguments], "minItems": len(arguments), "items": False}
    if origin is dict:
        return {"type": "object", "additionalProperties": _of(arguments[1])}
    options = [_of(t) for t in arguments if t is not type(None)]
    if options:
        return options[0] if len(options) == 1 else {"anyOf": options}
    if issubclass(wanted, DesignStruct):
        return {"$ref": f"#/$defs/{wanted.__name__}"}
    return _quantity(wanted) if issubclass(wanted, Quantity) else {"type": _PLAIN[wanted]}


def _quantity(kind: type[Quantity]) -> dict[str, Any]:
    """A number in the SI unit, or a text with its unit."""
    low = {"exclusiveMinimum" if kind.above_low else "minimum": kind.low}
    unit = f" in {kind.unit}" if kind.unit else ""
    text = {"type": "string", "description": f"a value{unit}, {kind.allowed()}"}
    return {
        "description": (kind.__doc__ or "").strip(),
        "anyOf": [{"type": "number", **low, "maximum": kind.high}, text],
    }


def _structs_in(wanted: list[Any]) -> list[type[DesignStruct]]:
    """The tables that stand anywhere in some types."""
    found: list[type[DesignStruct]] = []
    for t in wanted:
        if isinstance(t, type) and issubclass(t, DesignStruct):
            found.append(t)
        else:
            found.extend(_structs_in([a for a in get_args(t) if a is not Ellipsis]))
    return found
