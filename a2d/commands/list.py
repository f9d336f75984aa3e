"""`a2d list`: section kinds and circuits, their parameters and transfer functions; the design file's schema."""

from __future__ import annotations

import argparse
import json
import typing
from typing import Any, get_args, get_origin

import msgspec

from a2d.analog.circuits import CIRCUITS
from a2d.analog.kinds import KINDS
from a2d.commands.terminal import console
from a2d.design.quantities import Quantity
from a2d.design.schema import design_schema
from a2d.design.section import Section
from a2d.design.structs import DesignStruct, nearest
from a2d.errors import ParameterError

HELP = "show section kinds and circuits, their parameters and transfer functions; --schema for editors"
_COMMON = frozenset(f.name for f in msgspec.structs.fields(Section)) | {"kind"}


def add_options(parser: argparse.ArgumentParser) -> None:
    """Declare the command's options."""
    parser.add_argument("names", nargs="*", metavar="NAME", help="only these kinds or circuits")
    parser.add_argument("--schema", action="store_true", help="print a JSON Schema of the design file")


def run(args: argparse.Namespace) -> int:
    """Print what was asked for."""
    if args.schema and args.names:
        raise ParameterError(f"--schema is that of the whole design file ({args.names[0]!r}; leave out one of the two)")
    if args.schema:
        print(json.dumps(design_schema(), indent=1, ensure_ascii=False))
        return 0
    entries = {name: ([kind.equation], parameters(Section.by_kind[name])) for name, kind in KINDS.items()}
    entries |= {
        name: ([circuit.equation, circuit.formulas], parameters(circuit.parts)) for name, circuit in CIRCUITS.items()
    }
    unknown = next((name for name in args.names if name not in entries), None)
    if unknown is not None:
        raise ParameterError(f"there is no kind or circuit {unknown!r}{nearest(unknown, entries)}")
    out = console()
    for name in args.names or entries:
        equations, lines = entries[name]
        out.print(name, style="bold")
        for line in [*filter(None, equations), *lines]:
            out.print(f"    {line}", soft_wrap=True)
    return 0


def parameters(struct: type[DesignStruct]) -> list[str]:
    """One line a parameter: name, what it takes, and what it is when absent."""
    hints = typing.get_type_hints(struct)
    return [
        f"{f.encode_name}: {_takes(hints[f.name])}{_default(f)}"
        for f in msgspec.structs.fields(struct)
        if f.name not in _COMMON
    ]


def _default(field: msgspec.structs.FieldInfo) -> str:
    if field.required:
        return "; needed"
    if field.default in (None, ()):
        return ""
    return f"; {_plain(field.default)} when absent"


def _plain(value: object) -> str:
    return f"{value:g}" if isinstance(value, float) else str(value)


def _takes(wanted: Any) -> str:
    """A type in words."""
    if get_origin(wanted) is typing.Literal:
        return " | ".join(str(w) for w in get_args(wanted))
    if get_origin(wanted) is tuple:
        inner = [_takes(t) for t in get_args(wanted) if t is not Ellipsis]
        return f"[{', '.join(inner)}{', ...' if Ellipsis in get_args(wanted) else ''}]"
    options = [t for t in get_args(wanted) if t is not type(None)]
    if options:
        return " or ".join(_takes(t) for t in options)
    if isinstance(wanted, type) and issubclass(wanted, DesignStruct):
        return f"{{ {', '.join(f.encode_name for f in msgspec.structs.fields(wanted))} }}"
    if isinstance(wanted, type) and issubclass(wanted, Quantity):
        return (wanted.__doc__ or "").strip().rstrip(".").lower() + (f" ({wanted.unit})" if wanted.unit else "")
    return {int: "whole number", str: "text", bool: "true | false"}.get(wanted, getattr(wanted, "__name__", "").lower())
