"""What every `[[section]]` of a design file has in common, and how its sort is told from its keys."""

from __future__ import annotations

from typing import Any, ClassVar, Literal, TypeAlias

from a2d.design.quantities import Factor, Hertz
from a2d.design.structs import DesignStruct, Unrecognised, nearest

MethodName: TypeAlias = Literal["bilinear", "magnitude_matched", "minimax", "auto"]


class Section(DesignStruct, frozen=True, kw_only=True):
    """One stage of the cascade.

    Attributes
    ----------
    name
        As on the panel or in the schematic; unique in the file.
    match
        Hz: where the twin is exact; the section's own f0 when absent.
    method
        How this section is converted; the design's method when absent.
    factor
        A factor on the whole section; a negative one is an inverting stage.
    """

    by_kind: ClassVar[dict[str, type[Section]]] = {}
    by_key: ClassVar[dict[str, type[Section]]] = {}

    name: str
    match: Hertz | None = None
    method: MethodName | None = None
    factor: Factor = Factor(1.0)

    def __post_init__(self) -> None:
        if not self.name.strip():
            raise ValueError("name is empty (allowed any text)")
        if self.factor == 0.0:
            raise ValueError("factor is zero, which silences the section (allowed any other number)")

    @classmethod
    def choose(cls, table: dict[str, Any]) -> type[Section]:
        """The class that reads `table`, told by its `kind`, or by a key such as `circuit`."""
        if cls is not Section:
            return cls
        present = [key for key in ("kind", *cls.by_key) if key in table and (key != "band" or has_bands(table))]
        if len(present) != 1:
            found = " and ".join(present) or "none of them"
            raise Unrecognised(f"a section has exactly one of: {', '.join(['kind', *cls.by_key])} ({found})")
        if present[0] != "kind":
            return cls.by_key[present[0]].choose(table)
        kind = table["kind"]
        if not isinstance(kind, str) or kind not in cls.by_kind:
            raise Unrecognised(f"there is no kind {kind!r}{nearest(str(kind), cls.by_kind)}")
        return cls.by_kind[kind]

    @classmethod
    def variants(cls) -> tuple[type[DesignStruct], ...]:
        """All sorts of section."""
        return tuple(cls.by_kind.values()) + tuple(cls.by_key.values()) if cls is Section else (cls,)


def has_bands(table: dict[str, Any]) -> bool:
    """Whether `band` holds tables, as in a bank; two frequencies are the edges of a band-pass."""
    bands = table.get("band")
    return isinstance(bands, list) and all(isinstance(band, dict) for band in bands)
