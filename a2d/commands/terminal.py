"""Tables and notes on a terminal."""

from __future__ import annotations

import sys
from collections.abc import Iterable, Sequence
from typing import Literal, TextIO

from rich import box
from rich.console import Console
from rich.table import Table
from rich.text import Text

_PIPED_WIDTH = 120


def console(stream: TextIO | None = None) -> Console:
    """A console on `stream` (standard output when absent); a pipe gets a fixed width and no colour."""
    target = stream or sys.stdout
    width = None if target.isatty() else _PIPED_WIDTH
    return Console(file=target, width=width, highlight=False, soft_wrap=False, emoji=False, markup=False)


def table(
    title: str, columns: Sequence[str], rows: Iterable[Sequence[str]], *, left: int = 1, folding: Sequence[int] = (1,)
) -> Table:
    """A table; the first `left` columns are aligned left, the others right, and only those in `folding` break their
    lines. Cells are plain text.
    """
    built = Table(title=Text(title), box=box.SIMPLE_HEAD, title_justify="left", pad_edge=False, title_style="bold")
    for index, name in enumerate(columns):
        justify: Literal["left", "right"] = "left" if index < left else "right"
        built.add_column(Text(name), justify=justify, overflow="fold", no_wrap=index not in folding)
    for row in rows:
        built.add_row(*(Text(cell) for cell in row))
    return built


def hertz(f_hz: float) -> str:
    """`63 Hz`, `3.2 kHz`, `2.7 MHz`: five digits at most."""
    if f_hz >= 999_995.0:
        return f"{f_hz / 1e6:.5g} MHz"
    return f"{f_hz / 1000.0:.5g} kHz" if f_hz >= 999.995 else f"{f_hz:.5g} Hz"
