"""Paths such as `tone.P1.position` into the sections of a design: what they point at, and setting it."""

from __future__ import annotations

import typing
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from types import UnionType
from typing import Any, TypeAlias, TypeVar, get_args, get_origin

import msgspec

from a2d.design.control import Control, Plain
from a2d.design.network import Part
from a2d.design.quantities import Quantity, parse
from a2d.design.section import Section
from a2d.design.structs import nearest
from a2d.errors import QuantityError

Value: TypeAlias = float | str
Table = TypeVar("Table", bound=msgspec.Struct)


@dataclass(frozen=True)
class Move:
    """A value of the design that something moves.

    Attributes
    ----------
    path
        As written.
    entry
        The index of the `[[section]]`.
    keys
        From that section to the value: attributes, and keys of tables.
    kind
        The class of its quantity; None for a word.
    words
        The words allowed; empty for a quantity.
    now
        The value that the design file has there.
    """

    path: str
    entry: int
    keys: tuple[str, ...]
    kind: type[Quantity] | None
    words: tuple[str, ...]
    now: Value | None

    @property
    def unit(self) -> str:
        """The SI unit; empty for a word, a ratio or a fraction."""
        return self.kind.unit if self.kind is not None else ""


def resolve(sections: Sequence[Section], path: str) -> Move:
    """What `path` points at.

    Raises
    ------
    ValueError
        Nothing that can be moved; the message names the part of the path that is wrong and what is there.
    """
    entry = _entry(sections, path)
    keys: list[str] = []
    here: Any = sections[entry]
    for word in path[len(sections[entry].name) + 1 :].split("."):
        steps, here = _step(here, word, path)
        keys += steps
    if isinstance(here, Part):
        key = next(key for key, kind in Part.by_key.items() if isinstance(here, kind))
        keys, here = [*keys, key], getattr(here, key)
    return _move(sections[entry], path, entry, tuple(keys))


def _entry(sections: Sequence[Section], path: str) -> int:
    fitting = [i for i, section in enumerate(sections) if path.startswith(section.name + ".")]
    if not fitting:
        first = path.partition(".")[0]
        raise ValueError(f'"{path}" starts with no section{nearest(first, [s.name for s in sections])}')
    return max(fitting, key=lambda i: len(sections[i].name))


def _step(here: Any, word: str, path: str) -> tuple[list[str], Any]:
    """One word further: an attribute, a part of a network or circuit, a band."""
    below = _below(here)
    if word not in below:
        raise ValueError(f'"{path}": there is no "{word}"{nearest(word, below)}')
    return below[word]


def _below(here: Any) -> dict[str, tuple[list[str], Any]]:
    """Everything that one more word can point at: the word -> keys, and what is there."""
    found: dict[str, tuple[list[str], Any]] = {}
    if isinstance(here, dict):
        found = {key: ([key], value) for key, value in here.items()}
    elif isinstance(here, tuple):
        found = {name: ([name], item) for name, item in _named(here).items()}
    elif isinstance(here, msgspec.Struct):
        for field in here.__struct_fields__:
            value = getattr(here, field)
            found[field] = ([field], value)
            if field in ("network", "parts", "band"):
                found |= {key: ([field, *keys], item) for key, (keys, item) in _below(value).items()}
    return found


def _named(items: tuple[Any, ...]) -> dict[str, Any]:
    """The tables of a list by their names; those without one are `1`, `2`, ..."""
    return {str(getattr(item, "name", k + 1)): item for k, item in enumerate(items)}


def _move(section: Section, path: str, entry: int, keys: tuple[str, ...]) -> Move:
    holder = section
    for key in keys[:-1]:
        holder = _get(holder, key)
    now = _get(holder, keys[-1])
    hint = type(now) if isinstance(holder, dict) else typing.get_type_hints(type(holder))[keys[-1]]
    options = get_args(hint) if get_origin(hint) in (typing.Union, UnionType) else (hint,)
    kinds = [o for o in options if isinstance(o, type) and issubclass(o, Quantity)]
    words = [w for o in options if get_origin(o) is typing.Literal for w in get_args(o) if isinstance(w, str)]
    if len(kinds) + (len(words) > 1) != 1:
        raise ValueError(f'"{path}" is nothing that a control can move (allowed: a quantity, or a switch)')
    return Move(path, entry, keys, kinds[0] if kinds else None, tuple(words), now)


def _get(holder: Any, key: str) -> Any:
    if isinstance(holder, dict):
        return holder[key]
    if isinstance(holder, tuple):
        return _named(holder)[key]
    return getattr(holder, key)


def read_value(move: Move, value: Plain) -> Value:
    """A value as the file writes it, for the place that `move` points at.

    Raises
    ------
    ValueError
        It does not fit there.
    """
    if move.kind is None:
        if value not in move.words:
            raise ValueError(f'"{move.path}" cannot be {value!r}{nearest(str(value), move.words)}')
        return str(value)
    try:
        return parse(value, move.kind)
    except QuantityError as error:
        raise ValueError(f'"{move.path}" {error}') from error


def with_value(section: Section, move: Move, value: Value) -> Section:
    """The section with another value at the place that `move` points at.

    Raises
    ------
    ValueError
        The section's own rules do not allow it.
    """
    fitting = move.kind(value) if move.kind is not None else value
    changed = _set(section, move.keys, fitting)
    assert isinstance(changed, Section)
    return changed


def _set(holder: Any, keys: tuple[str, ...], value: object) -> Any:
    if not keys:
        return value
    inner = _set(_get(holder, keys[0]), keys[1:], value)
    if isinstance(holder, dict):
        return {**holder, keys[0]: inner}
    if isinstance(holder, tuple):
        return tuple(inner if name == keys[0] else item for name, item in _named(holder).items())
    return msgspec.structs.replace(holder, **{keys[0]: inner})


def control_faults(sections: Sequence[Section], controls: Sequence[Control]) -> list[str]:
    """What is wrong between controls and sections, each fault with the control's name."""
    faults = []
    for control in controls:
        try:
            check_control(sections, control)
        except ValueError as error:
            faults.append(f'control "{control.name}": {error}')
    names = [control.name for control in controls] + list({c.grid for c in controls if c.grid is not None})
    twice = sorted({name for name in names if names.count(name) > 1})
    faults += [f'two controls or grids are called "{name}" (allowed each name once)' for name in twice]
    return faults + _shared_sections(sections, controls) + _moved_twice(controls)


def _shared_sections(sections: Sequence[Section], controls: Sequence[Control]) -> list[str]:
    """Two controls that move one section need a grid: the section's coefficients depend on both."""
    owner: dict[str, Control] = {}
    faults = []
    for control in controls:
        group = control.grid or control.name
        for name in {s.name for path in control.moves for s in sections if path.startswith(s.name + ".")}:
            other = owner.setdefault(name, control)
            if (other.grid or other.name) != group:
                faults.append(
                    f'controls "{other.name}" and "{control.name}" both move section "{name}", whose coefficients '
                    "then depend on both (give the two the same grid)"
                )
    return faults


def _moved_twice(controls: Sequence[Control]) -> list[str]:
    owner: dict[str, Control] = {}
    faults = []
    for control in controls:
        for path in control.moves:
            if path in owner:
                faults.append(f'controls "{owner[path].name}" and "{control.name}" both move "{path}" (allowed one)')
            owner[path] = control
    return faults


def check_control(sections: Sequence[Section], control: Control) -> None:
    """Raise ValueError when a control's paths or values do not fit the sections."""
    moves = [resolve(sections, path) for path in control.moves]
    for index, move in enumerate(moves):
        if control.stepped:
            for value in control.at_positions(index):
                with_value(sections[move.entry], move, read_value(move, value))
        else:
            _check_range(control, index, move, sections[move.entry])


def _check_range(control: Control, index: int, move: Move, section: Section) -> None:
    if move.kind is None:
        raise ValueError(f'"{move.path}" is a word and has nothing between its ends (write values = ["...", "..."])')
    start, stop = (float(read_value(move, value)) for value in control.ends(index))
    for value in (start, stop):
        with_value(section, move, value)
    if start == stop:
        raise ValueError(f'"{move.path}" has the same value at both ends ({start:g} {move.unit})')
    if control.spacing == "logarithmic" and not (start > 0.0 and stop > 0.0):
        raise ValueError(f"logarithmic spacing needs values above zero ({start:g} and {stop:g} {move.unit})")


def measured_faults(sections: Sequence[Section], measured: Mapping[str, Plain]) -> list[str]:
    """What is wrong with measured values, each fault with its path."""
    faults = []
    for path, value in measured.items():
        try:
            with_values(sections, {path: value})
        except ValueError as error:
            faults.append(f"spread.measured: {error}")
    return faults


def with_values(sections: Sequence[Section], values: Mapping[str, Plain]) -> tuple[Section, ...]:
    """The sections with the values at the paths of `values`, as a file writes them.

    Raises
    ------
    ValueError
        A path points at nothing, or a value does not fit there.
    """
    changed = list(sections)
    for path, value in values.items():
        move = resolve(sections, path)
        changed[move.entry] = with_value(changed[move.entry], move, read_value(move, value))
    return tuple(changed)
