"""Sections of a design that are given by component values: from the design's structs to analog sections."""

from __future__ import annotations

from a2d.analog.network.solve import Solution, solve_network
from a2d.analog.sections import Sections, natural_frequency_hz
from a2d.design.hardware import NetworkSection


def network_sections(section: NetworkSection) -> Sections:
    """The sections of a network; each f0 is taken from its poles."""
    return _sections(solve_network(section.network))


def _sections(solution: Solution) -> Sections:
    return Sections(solution.b, solution.a, natural_frequency_hz(solution.b, solution.a))
