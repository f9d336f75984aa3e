"""A measured response: frequencies with level, and with phase where it was measured; read from CSV text."""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from a2d.arrays import ComplexArray, FloatArray
from a2d.errors import AudioError

FEWEST_POINTS = 8
NAMES = {
    "hz": "hz", "f": "hz", "frequency": "hz", "freq": "hz", "frequency_hz": "hz", "f_hz": "hz",
    "db": "db", "magnitude_db": "db", "level_db": "db", "gain_db": "db", "magnitude": "db",
    "deg": "deg", "phase_deg": "deg", "phase": "deg", "degrees": "deg",
    "re": "re", "real": "re", "im": "im", "imag": "im", "imaginary": "im",
}  # fmt: skip
_SEPARATOR = re.compile(r"[;\t,]|\s+")


@dataclass(frozen=True, eq=False)
class MeasuredResponse:
    """What was measured.

    Parameters
    ----------
    f_hz
        Shape [F], Hz, rising.
    log_gain
        Shape [F]: ln|H|.
    phase
        Shape [F], radians, known but for whole turns; None where only the level was measured.
    """

    f_hz: FloatArray
    log_gain: FloatArray
    phase: FloatArray | None

    @classmethod
    def of(cls, f_hz: FloatArray, response: ComplexArray) -> MeasuredResponse:
        """From complex values."""
        return cls(f_hz, np.log(np.abs(response)), np.angle(response))

    @property
    def level_db(self) -> FloatArray:
        return np.asarray(self.log_gain * (20.0 / math.log(10.0)))

    def between(self, low_hz: float, high_hz: float) -> MeasuredResponse:
        """The part from `low_hz` to `high_hz`."""
        kept = (self.f_hz >= low_hz) & (self.f_hz <= high_hz)
        if np.count_nonzero(kept) < FEWEST_POINTS:
            raise AudioError(
                f"{np.count_nonzero(kept)} points lie from {low_hz:g} to {high_hz:g} Hz (needed: {FEWEST_POINTS})"
            )
        return MeasuredResponse(self.f_hz[kept], self.log_gain[kept], None if self.phase is None else self.phase[kept])


def parse_response(text: str, name: str = "response") -> MeasuredResponse:
    """Read columns Hz, dB, deg or Hz, re, im out of CSV text.

    The first line that is no comment (#) may name the columns; without names they are Hz, dB and, where there are
    three, deg. Columns of other names are left out. Columns are separated by comma, semicolon, tab or blanks, the
    decimal sign is the point.

    Raises
    ------
    AudioError
        With the number of the line: text that is no number, a missing column, frequencies that are not above zero or
        twice the same.

    Examples
    --------
    >>> measured = parse_response("Hz,dB\\n" + "\\n".join(f"{f},0" for f in range(10, 20)))
    >>> len(measured.f_hz), measured.phase is None
    (10, True)
    """
    lines = [(i, line.strip()) for i, line in enumerate(text.lstrip("\ufeff").splitlines(), 1)]
    lines = [(i, line) for i, line in lines if line and not line.startswith("#")]
    if not lines:
        raise AudioError(f"{name} has no lines with numbers")
    first = _split(lines[0][1])
    if any(_number(word) is None for word in first):
        columns = [NAMES.get(word.strip("\"'()[] ").lower(), "") for word in first]
        lines = lines[1:]
    else:
        columns = ["hz", "db", "deg"][: len(first)]
    used = {column: k for k, column in enumerate(columns) if column}
    rows = [_row(name, i, line, len(columns), list(used.values())) for i, line in lines]
    table = dict(zip(used, np.reshape(rows, (-1, len(used))).T, strict=True))
    return _checked(name, _measured(name, table))


def _split(line: str) -> list[str]:
    separator = next((s for s in ";\t," if s in line), None)
    return [word.strip() for word in line.split(separator)]


def _number(word: str) -> float | None:
    try:
        value = float(word)
    except ValueError:
        return None
    return value if math.isfinite(value) else None


def _row(name: str, line_number: int, line: str, count: int, used: Sequence[int]) -> list[float]:
    words = _split(line)
    if len(words) != count:
        raise AudioError(f"{name} line {line_number} has {len(words)} columns ({count} expected): {line[:60]!r}")
    values = []
    for k in used:
        value = _number(words[k])
        if value is None:
            raise AudioError(f"{name} line {line_number}: {words[k]!r} is not a finite number (write 0.5, not 0,5)")
        values.append(value)
    return values


def _from_level(t: dict[str, FloatArray]) -> MeasuredResponse:
    return MeasuredResponse(t["hz"], t["db"] * (math.log(10.0) / 20.0), np.radians(t["deg"]) if "deg" in t else None)


def _from_parts(t: dict[str, FloatArray]) -> MeasuredResponse:
    value = t["re"] + 1j * t["im"]
    if np.any(value == 0.0):
        raise AudioError("a response is zero, which has no level (leave that line out)")
    return MeasuredResponse.of(t["hz"], value)


FORMS: dict[tuple[str, ...], Callable[[dict[str, FloatArray]], MeasuredResponse]] = {
    ("hz", "db"): _from_level,
    ("hz", "re", "im"): _from_parts,
}


def _measured(name: str, table: dict[str, FloatArray]) -> MeasuredResponse:
    for needed, build in FORMS.items():
        if set(needed) <= table.keys():
            return build(table)
    raise AudioError(
        f"{name} needs the columns Hz and dB (and deg), or Hz, re and im (found: {', '.join(table) or 'none'})"
    )


def _checked(name: str, measured: MeasuredResponse) -> MeasuredResponse:
    if len(measured.f_hz) < FEWEST_POINTS:
        raise AudioError(f"{name} has {len(measured.f_hz)} points (needed: {FEWEST_POINTS} or more)")
    if np.any(measured.f_hz <= 0.0):
        raise AudioError(f"{name} has a frequency that is not above zero ({measured.f_hz.min():g} Hz)")
    order = np.argsort(measured.f_hz, kind="stable")
    f = measured.f_hz[order]
    twice = np.flatnonzero(np.diff(f) == 0.0)
    if twice.size:
        raise AudioError(f"{name} has {f[twice[0]]:g} Hz twice")
    return MeasuredResponse(f, measured.log_gain[order], None if measured.phase is None else measured.phase[order])
