"""What `a2d convert` writes and says of banks that are kept as parallel twins."""

from __future__ import annotations

import numpy as np

from a2d.commands.terminal import hertz
from a2d.compare.banks import JudgedBank, judge_bank, parallel_banks
from a2d.compare.parallel import BankComparison, compare_bank
from a2d.compare.verdict import Breach
from a2d.conversion import Conversion
from a2d.design.firmware import Firmware
from a2d.design.model import Design
from a2d.digital.parallel import ParallelTwin
from a2d.errors import HeaderError
from a2d.firmware.bank_header import bank_header, bank_symbol, round_bank


def bank_files(conversion: Conversion, sha256: str) -> dict[str, bytes | str]:
    """SYMBOL.bank.h for every section with `form = "parallel"`.

    Raises
    ------
    HeaderError
        Two banks whose names differ only in what C symbols or file names do not tell apart.
    """
    design = conversion.design
    files: dict[str, bytes | str] = {}
    taken: dict[str, str] = {}
    for judged in parallel_banks(design):
        symbol, number = bank_symbol(design.design.name, judged.name), _number(design)
        other = taken.setdefault(symbol.upper(), judged.name)
        if other != judged.name:
            raise HeaderError(
                f'the banks "{other}" and "{judged.name}" have the same name in C ({symbol}; allowed names that differ '
                "in letters or digits, not in capitals or other signs alone)"
            )
        twins = [round_bank(twin, number) for twin in judged.twins]
        files[f"{symbol}.bank.h"] = bank_header(symbol, sha256, twins, number)
    return files


def bank_notes(conversion: Conversion) -> list[str]:
    """The errors of each parallel twin against the analog sum, before and after rounding, and keys without effect."""
    banks = parallel_banks(conversion.design)
    ignored = _not_applied(conversion.design.firmware)
    lines = [line for judged in banks for line in _lines(conversion.design, judged)]
    if banks and ignored:
        lines.append(
            f"{', '.join(ignored)} of [firmware] does not apply to .bank.h: its rows are b0, b1, b2, a1, a2 as "
            "written, in transposed direct form II"
        )
    return lines


def _not_applied(firmware: Firmware) -> list[str]:
    """The keys that ask for another header than a bank's always is."""
    usual = Firmware()
    keys = [key for key in ("order", "feedback") if getattr(firmware, key) != getattr(usual, key)]
    return keys if firmware.structure in (None, "transposed_direct_form_2") else ["structure", *keys]


def bank_breaches(design: Design) -> list[str]:
    """Each limit that a bank in parallel form breaks, as designed or only after rounding."""
    return [
        f"limit broken{after} at {twin.sample_rate_hz:g} Hz by {judged.name} in parallel: {breach}"
        for judged in parallel_banks(design)
        for twin, comparison, breaches in zip(judged.twins, judged.comparisons, judged.breaches, strict=True)
        for after, found in (("", breaches), (" after rounding", _when_rounded(design, judged, twin, comparison)))
        for breach in (found if not after or not breaches else ())
    ]


def _when_rounded(
    design: Design, judged: JudgedBank, twin: ParallelTwin, comparison: BankComparison
) -> tuple[Breach, ...]:
    rounded = round_bank(twin, _number(design))
    return judge_bank(compare_bank(judged.bank, rounded, comparison.band_hz), design.limits)


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
