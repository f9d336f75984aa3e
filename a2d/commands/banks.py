"""What `a2d convert` writes and says of banks that are kept as parallel twins."""

from __future__ import annotations

import numpy as np

from a2d.commands.terminal import hertz
from a2d.compare.banks import JudgedBank, parallel_banks
from a2d.compare.parallel import compare_bank
from a2d.conversion import Conversion
from a2d.design.model import Design
from a2d.digital.parallel import ParallelTwin
from a2d.firmware.bank_header import bank_header, bank_symbol, round_bank


def bank_files(conversion: Conversion, sha256: str) -> dict[str, bytes | str]:
    """SYMBOL.bank.h for every section with `form = "parallel"`."""
    design = conversion.design
    files: dict[str, bytes | str] = {}
    for judged in parallel_banks(design):
        symbol, number = bank_symbol(design.design.name, judged.name), _number(design)
        twins = [round_bank(twin, number) for twin in judged.twins]
        files[f"{symbol}.bank.h"] = bank_header(symbol, sha256, twins, number)
    return files


def bank_notes(conversion: Conversion) -> list[str]:
    """The errors of each parallel twin against the analog sum, before and after rounding."""
    return [line for judged in parallel_banks(conversion.design) for line in _lines(conversion.design, judged)]


def _lines(design: Design, judged: JudgedBank) -> list[str]:
    lines, number = [], _number(design)
    for twin, comparison in zip(judged.twins, judged.comparisons, strict=True):
        rounded = compare_bank(judged.bank, round_bank(twin, number), comparison.band_hz)
        lines.append(
            f"{judged.name} in parallel at {hertz(twin.sample_rate_hz)}: "
            f"{comparison.magnitude_db.worst:+.3g} dB at {hertz(comparison.magnitude_db.at_hz)}, "
            f"{comparison.phase_deg.worst:+.3g}° at {hertz(comparison.phase_deg.at_hz)}; "
            f"{rounded.magnitude_db.worst:+.3g} dB in {number}{_moved(judged, twin, comparison.band_hz[1])}"
        )
    return lines


def _moved(judged: JudgedBank, twin: ParallelTwin, top_hz: float) -> str:
    """Which bands are exact at the band's upper end, since their own f0 lies above."""
    pairs = zip(judged.bank.names, judged.bank.bands, twin.bands, strict=True)
    names = [name for name, analog, band in pairs if np.any((analog.f0_hz > top_hz) & (band.match_hz == top_hz))]
    return f"; exact at {hertz(top_hz)} for an f0 above the band: {', '.join(names)}" if names else ""


def _number(design: Design) -> str:
    number = design.firmware.number
    return number if isinstance(number, str) else "fixed"
