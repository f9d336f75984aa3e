"""What `a2d convert` shows: sections, coefficients on demand, errors at each rate, notes."""

from __future__ import annotations

import numpy as np
from rich.console import RenderableType

from a2d.analog.kinds import peaking_w3c_q
from a2d.analog.kinds.equalisers import equivalent_q
from a2d.commands.banks import bank_notes
from a2d.commands.circuits import FIGURE_COLUMNS, circuit_notes, figure_rows
from a2d.commands.terminal import hertz, table
from a2d.compare.errors import Worst
from a2d.conversion import Conversion
from a2d.design import kinds
from a2d.design.hardware import BankSection, NetworkSection
from a2d.design.section import Section
from a2d.digital.methods import EXACT_AT_MATCH
from a2d.digital.twin import Twin


def sections_table(conversion: Conversion) -> RenderableType:
    """One row a section: what it is, where it is exact, and its own worst magnitude error at each rate."""
    chain, judged = conversion.chain, conversion.judged
    rates = [f"at {hertz(j.twin.sample_rate_hz)}" for j in judged]
    rows = []
    for i, name in enumerate(chain.names):
        errors = [_decibels(j.sections[i].magnitude_db) if j.sections else "" for j in judged]
        methods = "\n".join(dict.fromkeys(_method(j.twin, i, len(chain)).replace("_", " ") for j in judged))
        entry = conversion.design.sections[chain.owners[i]]
        flat = not np.any(chain.a[i, :2])
        f0 = "" if flat else hertz(float(chain.f0_hz[i]))
        rows.append([name, describe(entry), f0, "everywhere" if flat else _match(conversion, i), methods, *errors])
    columns = ["section", "what", "f0", "exact at", "method", *rates]
    return table("Sections, and the worst magnitude error of each", columns, rows, left=2, folding=(1, 4))


def _method(twin: Twin, index: int, sections: int) -> str:
    """A section's method, or what all sections of a fit have in common."""
    return twin.methods[index] if len(twin) == sections else f"{twin.methods[0]}, {len(twin)} sections together"


def _match(conversion: Conversion, index: int) -> str:
    """Where a section is exact, when twin and chain have one section each for each and its method has such a point."""
    twin = conversion.judged[0].twin
    matched = len(twin) == len(conversion.chain) and twin.methods[index] in EXACT_AT_MATCH
    return hertz(float(twin.match_hz[index])) if matched else ""


def errors_table(conversion: Conversion) -> RenderableType:
    """Worst errors of the whole chain, the verdict, four rows a rate."""
    stated = conversion.design.limits is not None
    rows = []
    for judged in conversion.judged:
        c = judged.comparison
        verdict = "no limits stated" if not stated else ("over the limit" if judged.breaches else "within limits")
        found = [
            ("magnitude", c.magnitude_db, "dB"),
            ("phase", c.phase_deg, "°"),
            (f"phase, {c.delay_us:+.3f} µs taken out", c.phase_without_delay_deg, "°"),
            ("group delay", c.group_delay_us, "µs"),
        ]
        for i, (what, worst, unit) in enumerate(found):
            first = i == 0
            rows.append(
                [
                    hertz(judged.twin.sample_rate_hz) if first else "",
                    f"{hertz(c.band_hz[0])} to {hertz(c.band_hz[1])}" if first else "",
                    what,
                    f"{worst.worst:+.3g} {unit}",
                    hertz(worst.at_hz),
                    verdict if first else "",
                ]
            )
    columns = ["rate", "band", "error", "worst", "at", "verdict"]
    return table("Twin minus analog, all sections together", columns, rows, left=3)


def coefficient_lines(conversion: Conversion) -> list[str]:
    """Every coefficient, as many digits as the double holds, in plain columns."""
    width = max(len(name) for j in conversion.judged for name in j.twin.names)
    lines = ["Coefficients: y = b0·x + b1·x1 + b2·x2 - a1·y1 - a2·y2"]
    for judged in conversion.judged:
        lines.append(f"at {hertz(judged.twin.sample_rate_hz)}: b0, b1, b2, a1, a2")
        for name, row in zip(judged.twin.names, judged.twin.sos, strict=True):
            lines.append(f"  {name:<{width}}" + "".join(f" {float(v)!r:>24}" for v in row[[0, 1, 2, 4, 5]]))
    return lines


def q_table(conversion: Conversion) -> RenderableType | None:
    """Peaking sections: which Q or bandwidth the file gave, and all its equivalents; None without such a section."""
    peaking = [entry for entry in conversion.design.sections if isinstance(entry, kinds.Peaking)]
    rows = [_q_row(entry) for entry in peaking]
    columns = ["section", "given", "W3C Q", "pole Q", "mirrored Q", "oct. half gain", "oct. -3 dB"]
    return table("Peaking sections: what was given, and its equivalents", columns, rows, left=2) if rows else None


def _q_row(entry: kinds.Peaking) -> list[str]:
    q = equivalent_q(peaking_w3c_q(entry), entry.gain)
    if entry.bandwidth is not None:
        given = f"{entry.bandwidth:g} octaves at {entry.bandwidth_at.replace('_', ' ')}"
    else:
        given = f"Q {entry.q:g}, {Q_MEANINGS[entry.q_meaning]}"
    at_3_db = "none" if q.octaves_at_3_db is None else f"{q.octaves_at_3_db:.4g}"
    numbers = (q.w3c, q.pole, q.constant_mirrored, q.octaves_at_half_gain)
    return [entry.name, given, *(f"{v:.4g}" for v in numbers), at_3_db]


Q_MEANINGS = {
    "w3c": "W3C note",
    "pole": "pole Q",
    "constant_mirrored": "constant, cut mirrors boost",
    "constant_unmirrored": "constant, cut unlike boost",
}


def notes(conversion: Conversion) -> list[str]:
    """What the file left unsaid and the output must say."""
    shelves = [e for e in conversion.design.sections if isinstance(e, (kinds.LowShelf, kinds.HighShelf))]
    return (
        circuit_notes(conversion)
        + bank_notes(conversion)
        + [
            f"{e.name}: shelf {'of first order' if e.order == 1 else 'as in the W3C note'}, half the gain in dB at f0"
            for e in shelves
        ]
        + _unused_matches(conversion)
    )


def _unused_matches(conversion: Conversion) -> list[str]:
    """Sections whose `match` has no effect, since their method has no frequency at which it is exact."""
    unused: dict[str, list[str]] = {}
    for judged in conversion.judged:
        twin, chain = judged.twin, conversion.chain
        for i, owner in enumerate(chain.owners):
            entry = conversion.design.sections[owner]
            exact = len(twin) == len(chain) and twin.methods[i] in EXACT_AT_MATCH
            parallel = isinstance(entry, BankSection) and entry.form == "parallel"  # its bands may use it
            if entry.match is not None and not exact and not parallel:
                rates = unused.setdefault(entry.name, [])
                rates += [rate for rate in [hertz(twin.sample_rate_hz)] if rate not in rates]
    return [
        f"{name}: match has no effect at {', '.join(rates)}: minimax is exact at no stated frequency"
        for name, rates in unused.items()
    ]


def circuits_table(conversion: Conversion) -> RenderableType | None:
    """f0, Q and gains of sections that came out of component values; None without such a section."""
    rows = figure_rows(conversion)
    return table("Sections out of circuits", FIGURE_COLUMNS, rows) if rows else None


def choices_table(conversion: Conversion) -> RenderableType | None:
    """Where `auto` took more than the simplest method: what it took and what was tried; None where it did not."""
    rows = [
        [hertz(judged.twin.sample_rate_hz), name, method, tried]
        for judged in conversion.judged
        for name, method, why in zip(judged.twin.names, judged.twin.methods, judged.twin.why, strict=False)
        for tried in [why.partition(": ")[2]]
        if "," in tried
    ]
    columns = ["rate", "section", "taken", "the section's own worst error by each method tried"]
    return (
        table("Methods chosen, where the simplest was not enough", columns, rows, left=4, folding=(3,))
        if rows
        else None
    )


def reasons(conversion: Conversion) -> list[str]:
    """Why sections have the method that they have, where that was chosen and not stated; each reason once."""
    found: dict[str, list[str]] = {}
    for judged in conversion.judged:
        twin = judged.twin
        for name, method, why in zip(twin.names, twin.methods, twin.why, strict=False):
            if why:
                found.setdefault(f"at {hertz(twin.sample_rate_hz)}: {method}, {why}", []).append(name)
    return [f"{', '.join(names)} {reason}" for reason, names in found.items()]


def describe(entry: Section) -> str:
    """A section in a few words: `peaking +4.5 dB, Q 1.4`."""
    kind = getattr(entry, "kind", None) or getattr(entry, "circuit", None) or _parts_or_bands(entry)
    words = [str(kind)]
    if getattr(entry, "response", None):
        words.append(f"{entry.response} of order {entry.order}")  # type: ignore[attr-defined]
    elif getattr(entry, "order", 2) == 1:
        words.append("of order 1")
    details = [_detail(entry, key) for key in ("gain", "q", "bandwidth", "slope", "ripple")]
    if entry.factor != 1.0:
        details.append(f"× {float(entry.factor):g}")
    return f"{' '.join(words)} {', '.join(d for d in details if d)}".strip()


def _parts_or_bands(entry: Section) -> str:
    if isinstance(entry, NetworkSection):
        return f"network of {_count(len(entry.network.parts), 'part')}"
    return (
        f"bank of {_count(len(entry.band), 'band')}" if isinstance(entry, BankSection) else type(entry).__name__.lower()
    )


def _count(number: int, noun: str) -> str:
    return f"{number} {noun}" if number == 1 else f"{number} {noun}s"


def _detail(entry: Section, key: str) -> str:
    value = getattr(entry, key, None)
    if value is None or (key == "gain" and value == 0.0):
        return ""
    return {
        "gain": f"{value:+g} dB",
        "q": f"Q {value:g}",
        "bandwidth": f"{value:g} octaves",
        "slope": f"slope {value:g}",
        "ripple": f"ripple {value:g} dB",
    }[key]


def _decibels(worst: Worst) -> str:
    return f"{worst.worst:+.3f} dB" if abs(worst.worst) >= 0.0005 else "0.000 dB"
