"""a2d: from an analog audio equaliser to its proven digital twin.

    design = a2d.read_design("harbour_eq.toml")
    conversion = a2d.convert(design)
    sos = conversion.judged[0].twin.sos            # as scipy.signal.sosfilt takes it

Everything that the commands do is here by name. What needs matplotlib, soundfile or scipy is loaded when it is used.
"""

from __future__ import annotations

from importlib import import_module
from typing import Any

from a2d.analog.build import build_chain
from a2d.analog.chain import AnalogChain
from a2d.analog.kinds import KINDS
from a2d.compare.errors import Comparison, Worst, compare, compare_sections
from a2d.compare.verdict import Breach, judge
from a2d.conversion import Conversion, Judged, convert, convert_at
from a2d.design.model import Design
from a2d.design.read import parse_design, read_design
from a2d.design.schema import design_schema
from a2d.digital.methods import METHODS
from a2d.digital.twin import Twin, make_twin
from a2d.errors import A2dError

_LATER = {
    "CIRCUITS": "a2d.analog.circuits",
    "LoudnessMeter": "a2d.listening.loudness",
    "MeasuredResponse": "a2d.analog.measured",
    "SignalSettings": "a2d.listening.signals",
    "SweepPlan": "a2d.listening.sweep",
    "analog_whole": "a2d.listening.filters",
    "block_source": "a2d.listening.render",
    "fit_response": "a2d.analog.fit",
    "fit_values": "a2d.analog.fit_values",
    "judge_measured": "a2d.listening.judge",
    "measure_channel": "a2d.listening.measure",
    "network_response": "a2d.analog.network.response",
    "nominal_values": "a2d.analog.network.response",
    "null_test": "a2d.listening.null_test",
    "p_value": "a2d.listening.trials",
    "parse_response": "a2d.analog.measured",
    "plots": "a2d.report.plots",
    "signal_source": "a2d.listening.render",
    "solve_network": "a2d.analog.network.solve",
    "twin_whole": "a2d.listening.filters",
    "value_names": "a2d.analog.network.response",
    "write_versions": "a2d.listening.render",
}


def __getattr__(name: str) -> Any:
    if name not in _LATER:
        raise AttributeError(f"module 'a2d' has no attribute {name!r}")
    return getattr(import_module(_LATER[name]), name)


__all__ = [
    "CIRCUITS",
    "KINDS",
    "METHODS",
    "A2dError",
    "AnalogChain",
    "Breach",
    "Comparison",
    "Conversion",
    "Design",
    "Judged",
    "LoudnessMeter",
    "MeasuredResponse",
    "SignalSettings",
    "SweepPlan",
    "Twin",
    "Worst",
    "analog_whole",
    "block_source",
    "build_chain",
    "compare",
    "compare_sections",
    "convert",
    "convert_at",
    "design_schema",
    "fit_response",
    "fit_values",
    "judge",
    "judge_measured",
    "make_twin",
    "measure_channel",
    "network_response",
    "nominal_values",
    "null_test",
    "p_value",
    "parse_design",
    "parse_response",
    "plots",
    "read_design",
    "signal_source",
    "solve_network",
    "twin_whole",
    "value_names",
    "write_versions",
]
