"""NAME_kernel.h: C that computes a header's sections, put together from the pieces in `kernels/`.

One piece holds what every structure needs (coefficients, reset, ramp, blocks), another the inner loop of a structure.
A word between @ signs stands for what differs between headers.
"""

from __future__ import annotations

from functools import cache
from pathlib import Path

from a2d.firmware.header import word_type
from a2d.firmware.model import Header
from a2d.wordlength.arithmetic import Arithmetic
from a2d.wordlength.structures import TITLES

_PIECES = Path(__file__).parent / "kernels"
_FLOAT_STATES = {"direct_form_1": 4, "transposed_direct_form_2": 2, "delta": 2}
_LIMITS = {
    "saturate": (
        "    const int64_t highest = @NAME@_HIGHEST;\n"
        "    if ((uint64_t)(sample + highest + 1) > (uint64_t)(2 * highest + 1)) {\n"
        "        return (int32_t)(sample > 0 ? highest : -highest - 1);\n"
        "    }\n"
        "    return (int32_t)sample;"
    ),
    "wrap": (
        "    const int64_t half = (int64_t)@NAME@_HIGHEST + 1;\n"
        "    return (int32_t)(((sample + half) & (2 * half - 1)) - half);"
    ),
}
_IN_WORDS = {"saturate": "saturated", "wrap": "wrapped around", "nearest": "rounded", "truncate": "truncated"}


def write_kernel(header: Header, arithmetic: Arithmetic | None = None) -> str:
    """The text of NAME_kernel.h.

    Parameters
    ----------
    header
        What NAME.h holds.
    arithmetic
        The signal path; needed for fixed point.
    """
    kind = "fixed" if header.number.kind == "fixed" else "float"
    text = piece(f"common_{kind}").replace("@section@\n", piece(f"{header.structure}_{kind}") + "\n")
    words = _common_words(header)
    if arithmetic is None:
        words |= _float_words(header)
    else:
        text = text.replace("@state@", piece(f"{header.structure}_fixed.state").rstrip("\n") + "\n")
        text = text.replace("@limit@", _LIMITS[arithmetic.overflow])
        words |= _fixed_words(arithmetic)
    for word, value in words.items():
        text = text.replace(f"@{word}@", value)
    return text


@cache
def piece(name: str) -> str:
    """The text of one piece, by its file's name; .h may be left out."""
    return (_PIECES / (name if name.endswith(".c") else f"{name}.h")).read_text(encoding="utf-8")


def arithmetic_of(header: Header, overflow: str = "saturate", rounding: str = "nearest") -> Arithmetic | None:
    """The signal path of a fixed-point header; None for floating point."""
    if header.number.kind != "fixed":
        return None
    return Arithmetic(header.sample_bits, header.sample_fraction, overflow, rounding, header.error_feedback)


def _common_words(header: Header) -> dict[str, str]:
    negated = header.feedback == "negated"
    return {
        "name": header.name,
        "NAME": header.name.upper(),
        "title": TITLES[header.structure],
        "design": f"0x{header.sha256[:8]}u",
        "negated": str(int(negated)),
        "minus": "+" if negated else "-",
        "stored_sign": "-" if negated else "",
        "STRUCTURE": header.structure.upper(),
        "word": word_type(header),
        "value": word_type(header),
    }


def _float_words(header: Header) -> dict[str, str]:
    return {
        "number": header.number.kind,
        "NUMBER": header.number.kind.upper(),
        "states": str(_FLOAT_STATES[header.structure]),
        "zero": "0.0f" if header.number.kind == "float32" else "0.0",
    }


def _fixed_words(arithmetic: Arithmetic) -> dict[str, str]:
    nearest = arithmetic.rounding == "nearest"
    return {
        "highest": str(arithmetic.highest),
        "half": "shift > 0 ? (int64_t)1 << (shift - 1) : 0" if nearest else "0",
        "guard": str(arithmetic.guard_bits),
        "guard_half": f"(int64_t)1 << {arithmetic.guard_bits - 1}" if nearest else "0",
        "rounded": _IN_WORDS[arithmetic.rounding],
        "limited": _IN_WORDS[arithmetic.overflow],
    }
