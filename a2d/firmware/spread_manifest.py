"""NAME.spread.json: the spread of the hardware for machines, and what it says of the twin in words."""

from __future__ import annotations

import json
from typing import Any

from a2d.analog.spread_causes import Corners, Sensitivity
from a2d.analog.spread_draws import PERCENTILES, SpreadResult
from a2d.arrays import FloatArray
from a2d.conversion import Conversion
from a2d.firmware.manifest import FORMAT, tool_name

SHARE = 0.9


def statement(conversion: Conversion, result: SpreadResult) -> list[str]:
    """For each rate: the twin's worst error, the units' differences, and which is larger."""
    units = result.within_db(SHARE)
    lines = []
    for judged in conversion.judged:
        twin = abs(judged.comparison.magnitude_db.worst)
        verdict = "smaller than" if twin < units else "not smaller than"
        lines.append(
            f"The twin's worst error at {judged.twin.sample_rate_hz:g} Hz is {twin:.3g} dB; {100 * SHARE:g} % of units "
            f"differ from nominal by up to {units:.3g} dB. The twin's error is {verdict} the spread of the hardware."
        )
    return lines


def spread_json(
    conversion: Conversion,
    sha256: str,
    result: SpreadResult,
    worst: Corners,
    causes: list[Sensitivity],
    unit_db: FloatArray | None,
    seed: int,
) -> str:
    """The file's text; levels in dB, frequencies in Hz."""
    table = conversion.design.design
    content: dict[str, Any] = {
        "format": FORMAT,
        "tool": tool_name(),
        "design": {"name": table.name, "title": table.title, "sha256": sha256},
        "units": len(result.unit_worst_db),
        "seed": seed,
        "frequencies_hz": result.f_hz.tolist(),
        "nominal_db": result.nominal_db.tolist(),
        "percentiles": {f"{p:g}": row.tolist() for p, row in zip(PERCENTILES, result.percentiles_db, strict=True)},
        "lowest_db": result.lowest_db.tolist(),
        "highest_db": result.highest_db.tolist(),
        "worst_case_db": [worst.lowest_db.tolist(), worst.highest_db.tolist()],
        "units_within_db": {f"{share:g}": result.within_db(share) for share in (0.5, SHARE, 0.95, 1.0)},
        "sensitivities": [
            {
                "part": row.name,
                "tolerance": row.tolerance,
                "db_per_percent": row.db_per_percent,
                "at_hz": row.at_hz,
                "contribution_db": row.contribution_db,
            }
            for row in causes
        ],
        "twins": [
            {"sample_rate_hz": float(j.twin.sample_rate_hz), "worst_db": float(j.comparison.magnitude_db.worst)}
            for j in conversion.judged
        ],
        "statement": statement(conversion, result),
    }
    if unit_db is not None:
        content["measured_unit_db"] = unit_db.tolist()
    return json.dumps(content, indent=1, ensure_ascii=False, allow_nan=False) + "\n"
