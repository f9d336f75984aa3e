"""Second-order LC crossovers into a driver whose impedance is corrected: R3 and C2 across it, R3 = R2, C2 = L2/R2²."""

from __future__ import annotations

import math

from a2d.analog.circuits.textbook import Textbook, capacitor, inductor, network, resistor
from a2d.design.circuits import CrossoverParts
from a2d.design.network import Network, Part


def crossover_lowpass(p: CrossoverParts) -> Network:
    """H = 1/(1 + sL1/R2 + s²L1C1) with the corrected driver, L1 without resistance."""
    return network(L1=inductor(p.L1, "in", "out", p.L1_resistance), C1=capacitor(p.C1, "out", "gnd"), **_driver(p))


def crossover_highpass(p: CrossoverParts) -> Network:
    """H = s²L1C1/(1 + sL1/R2 + s²L1C1) with the corrected driver, L1 without resistance."""
    return network(C1=capacitor(p.C1, "in", "out"), L1=inductor(p.L1, "out", "gnd", p.L1_resistance), **_driver(p))


def crossover_textbook(p: CrossoverParts) -> Textbook:
    """f0 = 1/(2π√(L1C1)), Q = R2·√(C1/L1), gain 1 (corrected driver, L1 without resistance)."""
    return Textbook(1 / (2 * math.pi * math.sqrt(p.L1 * p.C1)), p.R2 * math.sqrt(p.C1 / p.L1), 1.0)


def _driver(p: CrossoverParts) -> dict[str, Part]:
    """The driver's voice coil, and the correction across it: both together are R2 at every frequency."""
    return {
        "R2": resistor(p.R2, "out", "x"),
        "L2": inductor(p.L2, "x", "gnd"),
        "R3": resistor(p.R3, "out", "y"),
        "C2": capacitor(p.C2, "y", "gnd"),
    }
