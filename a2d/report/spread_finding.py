"""Component spread as a table for the report: how far units of the hardware differ, and which parts do it."""

from __future__ import annotations

import msgspec
import numpy as np

from a2d.analog.spread import spread_model
from a2d.analog.spread_causes import sensitivities
from a2d.analog.spread_draws import run_spread
from a2d.conversion import Conversion
from a2d.design.spread import Spread
from a2d.errors import ParameterError
from a2d.firmware.spread_manifest import SHARE, statement
from a2d.report.content import Finding
from a2d.report.text import hertz_with_unit, signed

POINTS = 150  # over the band; `a2d spread` looks at more of them and draws pictures
MOST_UNITS, MOST_PARTS = 1000, 12


def spread_finding(conversion: Conversion) -> tuple[Finding | None, str]:
    """The table, or None and why; the reason is empty where the design says nothing of tolerances."""
    design = msgspec.structs.replace(conversion.design, controls=())
    asked = design.spread or Spread()
    try:
        model = spread_model(design, np.geomspace(*conversion.judged[0].comparison.band_hz, POINTS))
    except ParameterError as error:
        return None, "" if design.spread is None else f"No spread: {error}"
    units = min(asked.units, MOST_UNITS)
    result = run_spread(model, units, asked.seed)
    causes = sensitivities(model)
    rows = [
        (
            row.name,
            f"{100.0 * row.tolerance:g} %",
            f"{signed(row.db_per_percent)} dB at {hertz_with_unit(row.at_hz)}",
            f"{row.contribution_db:.3g} dB",
        )
        for row in causes[:MOST_PARTS]
    ]
    text = (
        f"{units} units were drawn with parts within their tolerances (seed {asked.seed}): {100 * SHARE:g} % of them "
        f"differ from nominal by up to {result.within_db(SHARE):.3g} dB."
    )
    shown = f", the {MOST_PARTS} of {len(causes)} that do most" if len(causes) > MOST_PARTS else ""
    columns = ("Part", "Tolerance", "For +1 %", "At its tolerance")
    lines = tuple(statement(conversion, result))
    return Finding("Component spread", text, f"What each part does to the level{shown}", columns, rows, None, lines), ""
