"""What the terminal and the report say of sections that are given by component values."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence

from a2d.analog.bank import cascade_of
from a2d.analog.build import bank_of
from a2d.analog.hardware import network_of
from a2d.analog.insight import Change, Figures, changes, figures
from a2d.analog.network.solve import solve_network
from a2d.commands.terminal import hertz
from a2d.conversion import Conversion, Judged
from a2d.design.hardware import BankSection, CircuitSection, NetworkSection
from a2d.design.section import Section
from a2d.digital.methods import EXACT_AT_MATCH


def circuit_notes(conversion: Conversion) -> list[str]:
    """What cancels, what op-amps and ends change, and match points that were moved."""
    lines: list[str] = []
    band = conversion.judged[0].comparison.band_hz
    for name, entry in _drawn(conversion.design.sections):
        network = network_of(entry)
        lines += [f"{name}: {note}" for note in solve_network(network).notes]
        lines += [f"{name}: {_change(change)}" for change in changes(network, band)]
    banks = [section for section in conversion.design.sections if isinstance(section, BankSection)]
    lines += [f"{bank.name}: {note}" for bank in banks for note in cascade_of(bank_of(bank)).notes]
    return lines + _moved(conversion)


def _drawn(sections: Sequence[Section], prefix: str = "") -> Iterator[tuple[str, NetworkSection | CircuitSection]]:
    """The sections given by component values, those in banks included, by name."""
    for section in sections:
        if isinstance(section, (NetworkSection, CircuitSection)):
            yield prefix + section.name, section
        elif isinstance(section, BankSection):
            yield from _drawn(section.band, f"{section.name}.")


def _is_hardware(conversion: Conversion, index: int) -> bool:
    entry = conversion.design.sections[conversion.chain.owners[index]]
    return isinstance(entry, (NetworkSection, CircuitSection, BankSection))


FIGURE_COLUMNS = ("section", "f0", "Q", "gain at 0 Hz", "at f0", "far above")


def figure_rows(conversion: Conversion) -> list[list[str]]:
    """f0, Q and gains of each section that came out of component values; the cells of `FIGURE_COLUMNS`."""
    chain = conversion.chain
    rows = [i for i in range(len(chain)) if _is_hardware(conversion, i)]
    return [[chain.names[i], *_figures(figures(chain.b[i], chain.a[i]))] for i in rows]


def _figures(f: Figures) -> list[str]:
    if f.f0_hz is None:
        return ["", "a plain gain", _decibels(f.gain_0_db), "", ""]
    q = "first order" if f.q is None else f"{f.q:.4g}"
    return [hertz(f.f0_hz), q, _decibels(f.gain_0_db), _decibels(f.gain_f0_db), _decibels(f.gain_inf_db)]


def _decibels(value: float) -> str:
    return "none" if math.isinf(value) else f"{round(value, 2) + 0.0:+.2f} dB"


def _change(change: Change) -> str:
    if math.isinf(change.worst_db):
        return f"{change.what}: unstable, a pole in the right half-plane at {hertz(change.at_hz)}"
    return f"{change.what}: {change.worst_db:+.2g} dB at {hertz(change.at_hz)}"


def _moved(conversion: Conversion) -> list[str]:
    """Sections whose own f0 lies above the band and whose method is exact at its end instead, one line a rate."""
    lines = []
    for judged in conversion.judged:
        names = _above_band(conversion, judged)
        if names:
            rate, top = hertz(judged.twin.sample_rate_hz), hertz(judged.comparison.band_hz[1])
            lines.append(
                f"at {rate} exact at the band's upper end, {top}, for an f0 above the band: {', '.join(names)}"
            )
    return lines


def _above_band(conversion: Conversion, judged: Judged) -> list[str]:
    chain, top = conversion.chain, judged.comparison.band_hz[1]
    if len(judged.twin) != len(chain):
        return []
    stated = [conversion.design.sections[owner].match is not None for owner in chain.owners]
    exact = [method in EXACT_AT_MATCH and not there for method, there in zip(judged.twin.methods, stated, strict=True)]
    above = [_is_hardware(conversion, i) and exact[i] and chain.f0_hz[i] > top for i in range(len(chain))]
    return [f"{chain.names[i]} ({hertz(float(chain.f0_hz[i]))})" for i in range(len(chain)) if above[i]]
