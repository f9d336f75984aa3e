"""Sections of a design that are given by component values: from the design's structs to analog sections."""

from __future__ import annotations

from a2d.analog.circuits import CIRCUITS
from a2d.analog.network.change import with_ends, with_op_amps
from a2d.analog.network.solve import Solution, solve_network
from a2d.analog.sections import Sections, natural_frequency_hz
from a2d.design.hardware import CircuitSection, NetworkSection
from a2d.design.network import Network


def network_of(section: NetworkSection | CircuitSection) -> Network:
    """The network that a section stands for, with its op-amps, source and load."""
    if isinstance(section, NetworkSection):
        return section.network
    network = CIRCUITS[section.circuit].build(section.parts)
    return with_ends(with_op_amps(network, section.opamp), section.source, section.load)


def network_sections(section: NetworkSection | CircuitSection) -> Sections:
    """The sections of a network or a ready circuit; each f0 is taken from its poles."""
    return sections_of_solution(solve_network(network_of(section)))


def sections_of_solution(solution: Solution) -> Sections:
    """A solution's sections, each with the characteristic frequency of its poles."""
    return Sections(solution.b, solution.a, natural_frequency_hz(solution.b, solution.a))
