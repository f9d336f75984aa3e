"""The base of every table in a design file, and the texts that name the nearest valid word."""

from __future__ import annotations

import difflib
from collections.abc import Iterable
from typing import Any

import msgspec


class DesignStruct(msgspec.Struct, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """A table of the design file. Subclasses say `frozen=True, kw_only=True`
    again; one that stands for several sorts of table overrides `choose`.

    `__post_init__` of a subclass holds the rules that concern more than one key, and raises ValueError.
    """

    @classmethod
    def choose(cls, table: dict[str, Any]) -> type[DesignStruct]:
        """The class that reads this table; raises `Unrecognised` when its keys fit none."""
        del table
        return cls

    @classmethod
    def variants(cls) -> tuple[type[DesignStruct], ...]:
        """The classes that `choose` may give, for the schema."""
        return (cls,)


class Unrecognised(ValueError):
    """The keys of a table fit no sort of table that may stand there."""


def nearest(word: str, allowed: Iterable[str]) -> str:
    """`; nearest "x"` for the closest allowed word, else the list of all."""
    names = list(allowed)
    close = difflib.get_close_matches(word, names, n=1, cutoff=0.6)
    return f'; nearest is "{close[0]}"' if close else f" (allowed: {', '.join(names)})"
