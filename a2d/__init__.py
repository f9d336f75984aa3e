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
    "Certificate": "a2d.digital.certificate",
    "LoudnessMeter": "a2d.listening.loudness",
    "MeasuredResponse": "a2d.analog.fit.measured",
    "SignalSettings": "a2d.listening.signals",
    "SweepPlan": "a2d.listening.sweep",
    "analog_whole": "a2d.listening.filters",
    "blind_page": "a2d.report.blind",
    "block_source": "a2d.listening.render",
    "cascade_of": "a2d.analog.bank",
    "certify": "a2d.digital.certificate",
    "click_levels": "a2d.listening.clicks",
    "deliver": "a2d.firmware.deliver",
    "differences": "a2d.firmware.check",
    "fewest_sections": "a2d.digital.reduce",
    "fit_response": "a2d.analog.fit.fit",
    "fit_values": "a2d.analog.fit.values",
    "judge_measured": "a2d.listening.judge",
    "manifest": "a2d.firmware.manifest",
    "mask_of": "a2d.compare.masks",
    "measure_channel": "a2d.listening.measure",
    "network_response": "a2d.analog.network.response",
    "nominal_values": "a2d.analog.network.response",
    "null_test": "a2d.listening.null_test",
    "p_value": "a2d.listening.trials",
    "parse_response": "a2d.analog.fit.measured",
    "plots": "a2d.report.plots",
    "prove": "a2d.wordlength.choose",
    "read_header": "a2d.firmware.read_header",
    "remedies": "a2d.compare.advice",
    "report_page": "a2d.report.page",
    "signal_source": "a2d.listening.render",
    "solve_network": "a2d.analog.network.solve",
    "sos_table": "a2d.firmware.manifest",
    "spread_model": "a2d.analog.spread",
    "sweep_controls": "a2d.compare.control_tables",
    "twin_whole": "a2d.listening.filters",
    "value_names": "a2d.analog.network.response",
    "write_header": "a2d.firmware.header",
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
    "Certificate",
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
    "blind_page",
    "block_source",
    "build_chain",
    "cascade_of",
    "certify",
    "click_levels",
    "compare",
    "compare_sections",
    "convert",
    "convert_at",
    "deliver",
    "design_schema",
    "differences",
    "fewest_sections",
    "fit_response",
    "fit_values",
    "judge",
    "judge_measured",
    "make_twin",
    "manifest",
    "mask_of",
    "measure_channel",
    "network_response",
    "nominal_values",
    "null_test",
    "p_value",
    "parse_design",
    "parse_response",
    "plots",
    "prove",
    "read_design",
    "read_header",
    "remedies",
    "report_page",
    "signal_source",
    "solve_network",
    "sos_table",
    "spread_model",
    "sweep_controls",
    "twin_whole",
    "value_names",
    "write_header",
    "write_versions",
]
