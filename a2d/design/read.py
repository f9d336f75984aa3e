"""Reading a design file: TOML to the model, with all of its faults collected."""

from __future__ import annotations

import hashlib
import re
import tomllib
import types
import typing
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any, Union, get_args, get_origin

import msgspec

from a2d.design.model import Design
from a2d.design.quantities import Quantity, parse
from a2d.design.structs import DesignStruct, Unrecognised, nearest
from a2d.errors import DesignError, Fault, FileError, QuantityError

LARGEST_FILE = 4_000_000  # bytes; a design is text written by hand


@dataclass(frozen=True)
class DesignFile:
    """A design as read, with what a header or manifest says of its origin.

    Attributes
    ----------
    design
        The checked model.
    sha256
        Of the file's bytes, hexadecimal.
    """

    design: Design
    sha256: str


def read_design(path: str | Path) -> Design:
    """The design in the file at `path`.

    Raises
    ------
    FileError
        The file cannot be read.
    DesignError
        It has faults; all of them are in the error.
    """
    return read_design_file(path).design


def read_design_file(path: str | Path) -> DesignFile:
    """`read_design`, with the hash of the file's bytes."""
    source = Path(path)
    try:
        with source.open("rb") as stream:
            data = stream.read(LARGEST_FILE + 1)
    except OSError as error:
        raise FileError(f"cannot read the design: {error.strerror or error} @ {source}") from error
    return DesignFile(parse_design(data, source.name), hashlib.sha256(data).hexdigest())


def parse_design(data: bytes | str, name: str = "design") -> Design:
    """The design in a text; `name` stands for the file in messages.

    Examples
    --------
    >>> text = '''
    ... [design]
    ... name = "demo"
    ... sample_rates = ["48 kHz"]
    ... [[section]]
    ... name = "presence"
    ... kind = "peaking"
    ... f0 = "3k2"
    ... q = 1.4
    ... gain = "4.5 dB"
    ... '''
    >>> parse_design(text).sections[0].f0
    3200.0
    """
    return check_design(_toml(data, name), name)


def check_design(table: dict[str, Any], name: str = "design") -> Design:
    """The design in a table such as `tomllib` gives; `name` stands for the file in messages."""
    reader = _Reader()
    design = reader.table(table, Design, _Place(f"{name}:"))
    if reader.faults or not isinstance(design, Design):
        raise DesignError(reader.faults)
    return design


def _toml(data: bytes | str, name: str) -> dict[str, Any]:
    text = ""
    try:
        text = data.decode("utf-8") if isinstance(data, bytes) else data
        if len(text) > LARGEST_FILE:
            raise ValueError(f"is longer than {LARGEST_FILE} bytes, too long for a design")
        return tomllib.loads(text)
    except RecursionError as error:
        raise DesignError([Fault("is nested too deeply to be a design", name)]) from error
    except ValueError as error:  # tomllib.TOMLDecodeError and UnicodeDecodeError are ValueErrors
        raise DesignError([Fault(f"is not TOML: {_told(text, str(error))}", name)]) from error


def _told(text: str, message: str) -> str:
    """The parser's message; where it only says that something is there twice, with the name of that."""
    if not message.startswith("Cannot overwrite a value"):
        return message
    lines = text.splitlines()
    place = re.search(r"line (\d+)", message)
    written = lines[: int(place[1])] if place is not None else [line for line in lines if line.strip()]
    return f'"{written[-1].partition("=")[0].strip()}" is there twice, or is a value and a table{message[24:]}'


@dataclass(frozen=True)
class _Place:
    """Where in the file: `harbour.toml: section "presence".q`."""

    text: str

    def key(self, name: str) -> _Place:
        return _Place(f"{self.text}{' ' if self.text.endswith(':') else '.'}{name}")

    def item(self, index: int, value: object, name: str) -> _Place:
        label = value.get("name") if isinstance(value, dict) else None
        shown = f' "{label}"' if isinstance(label, str) else f" {index + 1}"
        return _Place(f"{self.text.removesuffix(name)}{name}{shown}")


@dataclass
class _Reader:
    """Walks a parsed TOML tree along the model's types and collects every fault on the way."""

    faults: list[Fault] = field(default_factory=list)

    def fault(self, what: str, place: _Place) -> None:
        self.faults.append(Fault(what, place.text.removesuffix(":")))

    def table(self, value: object, struct: type[DesignStruct], place: _Place) -> DesignStruct | None:
        """`value` as a `struct`, or None with the faults noted."""
        if not isinstance(value, dict):
            self.fault(f"is not a table ({_shown(value)})", place)
            return None
        try:
            chosen = struct.choose(value)
        except Unrecognised as error:
            self.fault(str(error), place)
            return None
        before = len(self.faults)
        values = self._fields(value, chosen, place)
        if len(self.faults) > before:
            return None
        try:
            return chosen(**values)
        except ValueError as error:
            self.fault(str(error), place)
            return None

    def _fields(self, table: dict[str, Any], struct: type[DesignStruct], place: _Place) -> dict[str, Any]:
        fields = {f.encode_name: f for f in msgspec.structs.fields(struct)}
        hints = typing.get_type_hints(struct)
        for key in table:
            if key not in fields:
                self.fault(f'there is no "{key}" here{nearest(key, fields)}', place)
        for key, info in fields.items():
            if info.required and key not in table:
                self.fault(f"{key} is missing ({_wanted(hints[info.name])})", place)
        return {f.name: self.value(table[k], hints[f.name], place.key(k)) for k, f in fields.items() if k in table}

    def value(self, value: object, wanted: Any, place: _Place) -> Any:
        """`value` as the type `wanted`: a table, a list, a map, a quantity, a word or a plain value."""
        origin = get_origin(wanted)
        if origin in (Union, types.UnionType):
            return self._choice(value, [t for t in get_args(wanted) if t is not type(None)], place)
        if origin is tuple:
            return self._list(value, get_args(wanted), place)
        if origin is dict:
            return self._map(value, get_args(wanted)[1], place)
        if origin is typing.Literal:
            return self._word(value, get_args(wanted), place)
        if isinstance(wanted, type) and issubclass(wanted, DesignStruct):
            return self.table(value, wanted, place)
        if isinstance(wanted, type) and issubclass(wanted, Quantity):
            return self._quantity(value, wanted, place)
        return self._plain(value, wanted, place)

    def _choice(self, value: object, options: list[Any], place: _Place) -> Any:
        """One of several types: the one whose shape the value has."""
        for option in options[:-1]:
            if _fits(value, option):
                return self.value(value, option, place)
        return self.value(value, options[-1], place)

    def _list(self, value: object, arguments: tuple[Any, ...], place: _Place) -> tuple[Any, ...]:
        if not isinstance(value, list):
            self.fault(f"is not a list ({_shown(value)}; write it in square brackets)", place)
            return ()
        if arguments[-1] is Ellipsis:
            element_types: list[Any] = [arguments[0]] * len(value)
        elif len(value) == len(arguments):
            element_types = list(arguments)
        else:
            self.fault(f"has {len(value)} values (allowed {len(arguments)})", place)
            return ()
        name = place.text.rpartition(".")[2].rpartition(" ")[2]
        return tuple(
            self.value(v, t, place.item(i, v, name)) for i, (v, t) in enumerate(zip(value, element_types, strict=True))
        )

    def _map(self, value: object, wanted: Any, place: _Place) -> dict[str, Any]:
        if not isinstance(value, dict):
            self.fault(f"is not a table ({_shown(value)})", place)
            return {}
        return {key: self.value(v, wanted, place.key(key)) for key, v in value.items()}

    def _word(self, value: object, allowed: tuple[Any, ...], place: _Place) -> Any:
        if any(value == word and type(value) is type(word) for word in allowed):
            return value
        if isinstance(value, str):
            self.fault(f"there is no {value!r}{nearest(value, [str(w) for w in allowed])}", place)
        else:
            self.fault(f"is not one of: {', '.join(str(w) for w in allowed)} ({_shown(value)})", place)
        return None

    def _quantity(self, value: object, kind: type[Quantity], place: _Place) -> Quantity | None:
        try:
            return parse(value, kind)
        except QuantityError as error:
            self.fault(str(error), place)
            return None

    def _plain(self, value: object, wanted: Any, place: _Place) -> Any:
        try:
            return msgspec.convert(value, wanted, strict=True)
        except msgspec.ValidationError as error:
            self.fault(f"{_first_lower(str(error))} ({_shown(value)})", place)
            return None


def _fits(value: object, wanted: Any) -> bool:
    """Whether the value has the outer shape of the type."""
    if get_origin(wanted) is typing.Literal:
        return value in get_args(wanted)
    if get_origin(wanted) is tuple:
        return isinstance(value, list)
    if isinstance(wanted, type) and issubclass(wanted, (DesignStruct, dict)):
        return isinstance(value, dict)
    if isinstance(wanted, type) and issubclass(wanted, Quantity):
        return isinstance(value, (str, int, float)) and not isinstance(value, bool)
    return isinstance(wanted, type) and isinstance(value, wanted)


def _wanted(wanted: Any) -> str:
    if isinstance(wanted, type) and issubclass(wanted, Quantity):
        return wanted.allowed()
    if get_origin(wanted) is typing.Literal:
        return "allowed: " + ", ".join(str(w) for w in get_args(wanted))
    return "needed"


def _shown(value: object) -> str:
    text = repr(value)
    return text if len(text) <= 60 else text[:57] + "..."


def _first_lower(text: str) -> str:
    return text[:1].lower() + text[1:]
