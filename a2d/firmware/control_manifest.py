"""The manifest's part on controls: tables, the map from scale to index, errors at and between positions."""

from __future__ import annotations

from typing import Any

import numpy as np

from a2d.analog.axis import Axis
from a2d.compare.control_tables import ControlTable, RateTable
from a2d.compare.positions import QUANTITIES

_UNITS = ("db", "deg", "us")


def control_tables(tables: tuple[ControlTable, ...]) -> list[dict[str, Any]]:
    """One object a group of controls.

    `sos` is indexed by the position of each control in turn, then by section, then b0, b1, b2, a0, a1, a2. The index
    that belongs to a value on a control's scale is found by straight lines through `scale_at_index`, and the value that
    belongs to an index the same way.
    """
    return [
        {
            "name": table.group.name,
            "controls": [_axis(axis) for axis in table.group.axes],
            "sections": list(table.names),
            "section_indices": list(table.places),
            "positions_without_continuous_order": table.exchanged,
            "tables": [_rate(table, rate) for rate in table.rates],
        }
        for table in tables
    ]


def _axis(axis: Axis) -> dict[str, Any]:
    return {
        "name": axis.name,
        "moves": list(axis.control.moves),
        "unit": axis.unit,
        "stepped": axis.control.stepped,
        "scale_at_index": axis.knots.tolist(),
        "values_at_index": [[value for _, value in axis.at(float(k))] for k in axis.knots],
    }


def _rate(table: ControlTable, rate: RateTable) -> dict[str, Any]:
    shape = table.group.shape
    return {
        "sample_rate_hz": rate.sample_rate_hz,
        "sos": rate.sos.tolist(),
        "comparison": {
            f"{name}_{unit}": {
                "worst": rate.errors.worst[k].reshape(shape).tolist(),
                "at_hz": rate.errors.at_hz[k].reshape(shape).tolist(),
                "worst_at_index": [int(i) for i in np.unravel_index(rate.errors.worst_position(k), shape)],
            }
            for k, (name, unit) in enumerate(zip(QUANTITIES, _UNITS, strict=True))
        },
        "within_limits": bool(np.all(rate.within)),
        "broken_limits": [f"{breach} with {table.position(k)}" for k, breach in rate.breaches],
        "interpolation": {
            "worst_db": rate.between.worst_db,
            "at_hz": rate.between.at_hz,
            "at_scales": list(rate.between.at),
            "stability_margin": rate.margin,
        },
    }
