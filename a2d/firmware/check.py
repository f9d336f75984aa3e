"""A shipped header against its design: does it hold the design's twin?"""

from __future__ import annotations

import numpy as np

from a2d.arrays import FloatArray
from a2d.firmware.model import Header, Table
from a2d.wordlength.structures import VALUE_NAMES

FLOAT64_TOLERANCE = 1e-12  # of the largest coefficient: another machine's tan and sqrt may differ in the last place


def differences(expected: Header, found: Header) -> tuple[str, ...]:
    """What keeps a header from being the twin of its design, one text a difference; none when it is.

    Parameters
    ----------
    expected
        What the design gives now.
    found
        What was read from the file.

    Notes
    -----
    A coefficient may be one step of its number format off (1e-12 of the largest in float64): arithmetic libraries
    differ by so much. The design's hash and title may differ too, since a comment in the design changes them.
    """
    faults = [
        f"{what} is {theirs} in the header, {ours} in the design"
        for what, ours, theirs in (
            ("the name", expected.name, found.name),
            ("the number format", str(expected.number), str(found.number)),
            ("the structure", expected.structure, found.structure),
            ("the order of the error feedback", expected.error_feedback, found.error_feedback),
            ("the order of coefficients", " ".join(expected.order), " ".join(found.order)),
            ("the feedback sign", expected.feedback, found.feedback),
            ("the sample format", _sample(expected), _sample(found)),
            ("the list of sections", ", ".join(expected.section_names), ", ".join(found.section_names)),
        )
        if ours != theirs
    ]
    return tuple(faults) if faults else _table_differences(expected, found)


def _sample(header: Header) -> str:
    return f"{header.sample_bits} bits, {header.sample_fraction} of them fraction"


def _table_differences(expected: Header, found: Header) -> tuple[str, ...]:
    theirs = {table.sample_rate_hz: table for table in found.tables}
    faults = []
    for table in expected.tables:
        rate = table.sample_rate_hz
        if rate not in theirs:
            faults.append(f"the header has no table for {rate:g} Hz")
            continue
        faults += _value_differences(expected, table, theirs[rate])
    extra = sorted(set(theirs) - {table.sample_rate_hz for table in expected.tables})
    return (*faults, *(f"the header has a table for {rate:g} Hz, the design has not" for rate in extra))


def _value_differences(header: Header, ours: Table, theirs: Table) -> list[str]:
    """Coefficients that are further off than a step, and shifts that differ, in one table."""
    at = f"at {ours.sample_rate_hz:g} Hz"
    if ours.fractions != theirs.fractions or ours.output_shift != theirs.output_shift:
        return [f"the shifts {at} are not the design's"]
    mine, read = np.array(ours.values, dtype=np.float64), np.array(theirs.values, dtype=np.float64)
    off = np.abs(read - mine) > _steps(header, mine)
    return [
        f'{VALUE_NAMES[column]} of section "{header.section_names[row]}" {at} is {read[row, column]:.17g} in the '
        f"header, {mine[row, column]:.17g} by the design"
        for row, column in np.argwhere(off)
    ]


def _steps(header: Header, values: FloatArray) -> FloatArray:
    """How far each value may be off."""
    if header.number.kind == "fixed":
        return np.ones_like(values)
    if header.number.kind == "float64":
        return np.full_like(values, FLOAT64_TOLERANCE * np.max(np.abs(values)))
    return np.spacing(np.abs(values).astype(np.float32)).astype(np.float64)
