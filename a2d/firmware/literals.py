"""Numbers and texts as C writes them, and back: each pair of functions is exact in both directions."""

from __future__ import annotations

import json
import re

import numpy as np

from a2d.errors import HeaderError

_LOWEST_INT32 = "(-2147483647 - 1)"  # -2147483648 is a minus sign before a constant that no int holds (C99 6.4.4.1)


def float32_text(value: float) -> str:
    """A float literal; 9 significant digits tell every binary32 from its neighbours (IEEE 754-2019, 5.12.2)."""
    if float(np.float32(value)) != value:
        raise HeaderError(f"a table of float32 holds a number that is none ({value!r}, allowed: round it first)")
    return _with_point(f"{value + 0.0:.9g}") + "f"


def float64_text(value: float) -> str:
    """A double literal, the shortest that reads back to the same double."""
    return _with_point(repr(float(value) + 0.0))


def integer_text(value: float) -> str:
    """An integer constant of up to 32 bits."""
    if value != int(value):
        raise HeaderError(f"a table of fixed-point words holds a number that is none ({value!r})")
    return _LOWEST_INT32 if value == -(2**31) else str(int(value))


def float32_value(text: str) -> float:
    """The binary32 that a float literal stands for."""
    if not text.endswith(("f", "F")):
        raise HeaderError(f"a literal in a float32 table lacks its f ({text!r})")
    with np.errstate(over="ignore"):
        value = float(np.float32(_number(text[:-1])))
    if not np.isfinite(value):
        raise HeaderError(f"a literal in a float32 table is too large for one ({text!r})")
    return value


def float64_value(text: str) -> float:
    """The double that a double literal stands for."""
    return _number(text)


def integer_value(text: str) -> int:
    """The integer that a constant stands for."""
    if text.replace(" ", "") == _LOWEST_INT32.replace(" ", ""):
        return -(2**31)
    if not re.fullmatch(r"-?[0-9]+", text):
        raise HeaderError(f"a fixed-point table holds what is no integer ({text!r})")
    return int(text)


def quoted(text: str) -> str:
    """A text in quotes, ASCII only, that cannot open or end a comment: JSON's string with such a / escaped."""
    return json.dumps(text, ensure_ascii=True).replace("/*", "\\u002f*").replace("*/", "*\\/")


def unquoted(text: str) -> str:
    """The text that `quoted` wrote."""
    try:
        return str(json.loads(text))
    except ValueError as error:
        raise HeaderError(f"a name in the header is not in quotes ({text!r})") from error


def _with_point(digits: str) -> str:
    return digits if any(mark in digits for mark in ".en") else digits + ".0"


def _number(text: str) -> float:
    try:
        value = float(text)
    except ValueError as error:
        raise HeaderError(f"a table holds what is no number ({text!r})") from error
    if not np.isfinite(value):
        raise HeaderError(f"a table holds what is not finite ({text!r})")
    return value
