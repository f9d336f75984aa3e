"""Pages from the templates beside this file; every value that goes in is escaped."""

from __future__ import annotations

import re
from collections.abc import Callable
from pathlib import Path
from typing import Any

from jinja2 import Environment, FileSystemLoader, StrictUndefined

from a2d.report.text import error_text, hertz_with_unit, plain, rate_label, signed

_BEFORE_UNIT = re.compile(r"(?<=[0-9]) (?=(?:[kM]?Hz|dB|µs|LU)\b)")


def units(text: str) -> str:
    """`text` with the spaces between number and unit made unbreakable."""
    return _BEFORE_UNIT.sub("\u00a0", text)


_FILTERS: dict[str, Callable[..., str]] = {
    "error": error_text,
    "hertz": hertz_with_unit,
    "rate": rate_label,
    "signed": signed,
    "plain": plain,
    "units": units,
}


def render(template: str, **values: Any) -> bytes:
    """The template of that name with `values`, as UTF-8 with a line end at the end."""
    environment = Environment(
        loader=FileSystemLoader(Path(__file__).parent),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        keep_trailing_newline=True,
    )
    environment.filters.update(_FILTERS)
    return environment.get_template(template).render(values).encode("utf-8")
