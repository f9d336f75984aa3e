"""NAME.twin.json and NAME.sos.csv: the numbers for machines."""

from __future__ import annotations

import json
from typing import Any

import numpy as np

from a2d.compare.banks import JudgedBank, parallel_banks
from a2d.compare.errors import Comparison, Worst
from a2d.conversion import Conversion, Judged
from a2d.digital.certificate import Certificate
from a2d.digital.methods import EXACT_AT_MATCH
from a2d.firmware.control_manifest import control_tables
from a2d.version import VERSION

FORMAT = 1


def tool_name() -> str:
    """`a2d` and its version."""
    return f"a2d {VERSION}"


def manifest(conversion: Conversion, sha256: str) -> str:
    """The manifest as JSON; every number reads back to the same double.

    Parameters
    ----------
    conversion
        The judged twins.
    sha256
        Of the design file's bytes.
    """
    table, chain = conversion.design.design, conversion.chain
    content: dict[str, Any] = {
        "format": FORMAT,
        "tool": tool_name(),
        "design": {"name": table.name, "title": table.title, "sha256": sha256},
        "analog": {
            "sections": [
                {"name": name, "b": b.tolist(), "a": a.tolist(), "f0_hz": float(f0)}
                for name, b, a, f0 in zip(chain.names, chain.b, chain.a, chain.f0_hz, strict=True)
            ]
        },
        "twins": [_twin(judged) for judged in conversion.judged],
    }
    banks = parallel_banks(conversion.design)
    if banks:
        content["banks"] = [_bank(bank) for bank in banks]
    if conversion.controls:
        content["controls"] = control_tables(conversion.controls)
    return json.dumps(content, indent=1, ensure_ascii=False, allow_nan=False) + "\n"


def _twin(judged: Judged) -> dict[str, Any]:
    twin = judged.twin
    return {
        "sample_rate_hz": float(twin.sample_rate_hz),
        "sections": [
            {"name": name, "method": method, **_match(method, match), "sos": row.tolist()}
            | ({"why": twin.why[i]} if twin.why and twin.why[i] else {})
            | (_certificate(judged.proofs[i]) if judged.proofs else {})
            for i, (name, method, match, row) in enumerate(
                zip(twin.names, twin.methods, twin.match_hz, twin.sos, strict=True)
            )
        ],
        "comparison": _comparison(judged.comparison),
        "section_comparisons": [_comparison(section) for section in judged.sections],
        "within_limits": not judged.breaches,
        "broken_limits": [str(breach) for breach in judged.breaches],
        "advice": [str(remedy) for remedy in judged.advice],
    }


def _match(method: str, match_hz: float) -> dict[str, Any]:
    """The match frequency, and whether the method is exact there; null where a fit of several sections has none."""
    return {
        "match_hz": float(match_hz) if np.isfinite(match_hz) else None,
        "exact_at_match": method in EXACT_AT_MATCH,
    }


def _bank(judged: JudgedBank) -> dict[str, Any]:
    """A bank's parallel twins: y = direct·x + Σ mix·band(x)."""
    return {
        "name": judged.name,
        "direct": float(judged.bank.direct),
        "bands": list(judged.bank.names),
        "mix": judged.bank.mix.tolist(),
        "twins": [
            {
                "sample_rate_hz": twin.sample_rate_hz,
                "sos": [band.sos.tolist() for band in twin.bands],
                "match_hz": [band.match_hz.tolist() for band in twin.bands],
                "comparison": {
                    "band_hz": list(comparison.band_hz),
                    "magnitude_db": _worst(comparison.magnitude_db),
                    "phase_deg": _worst(comparison.phase_deg),
                },
                "within_limits": not breaches,
                "broken_limits": [str(breach) for breach in breaches],
            }
            for twin, comparison, breaches in zip(judged.twins, judged.comparisons, judged.breaches, strict=True)
        ],
    }


def _certificate(proof: Certificate) -> dict[str, Any]:
    """How near to the best a section is; see docs/fidelity.md."""
    return {
        "certificate": {
            "quantity": proof.quantity,
            "unit": proof.unit,
            "band_hz": list(proof.band_hz),
            "worst": proof.worst,
            "at_hz": proof.at_hz,
            "alternations": proof.alternations,
            "alternations_needed": proof.needed,
            "lower_bound": proof.bound,
        }
    }


def _comparison(comparison: Comparison) -> dict[str, Any]:
    return {
        "band_hz": list(comparison.band_hz),
        "magnitude_db": _worst(comparison.magnitude_db),
        "phase_deg": _worst(comparison.phase_deg),
        "group_delay_us": _worst(comparison.group_delay_us),
        "phase_without_delay_deg": _worst(comparison.phase_without_delay_deg) | {"delay_us": comparison.delay_us},
    }


def _worst(worst: Worst) -> dict[str, float]:
    return {"worst": worst.worst, "at_hz": worst.at_hz}


def sos_table(conversion: Conversion) -> str:
    """NAME.sos.csv: a row a section and rate; y = b0·x + b1·x1 + b2·x2 - a1·y1 - a2·y2.

    `match_hz` is empty where the method is exact at no stated frequency.
    """
    lines = ["sample_rate_hz,section,method,match_hz,b0,b1,b2,a0,a1,a2"]
    for judged in conversion.judged:
        twin = judged.twin
        for name, method, match, row in zip(twin.names, twin.methods, twin.match_hz, twin.sos, strict=True):
            numbers = [repr(float(match)) if method in EXACT_AT_MATCH else "", *(repr(float(v)) for v in row)]
            quoted = '"' + name.replace('"', '""') + '"'
            lines.append(",".join([repr(float(twin.sample_rate_hz)), quoted, method, *numbers]))
    return "\n".join(lines) + "\n"
