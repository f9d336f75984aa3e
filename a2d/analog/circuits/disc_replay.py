"""Disc replay equalisation, active and passive: time constants 3180, 318 and 75 µs (IEC 60098)."""

from __future__ import annotations

import math

from a2d.analog.circuits.textbook import Textbook, capacitor, network, op_amp, resistor
from a2d.design.circuits import ActiveDiscParts, TwoRTwoC
from a2d.design.network import Network


def disc_replay_active(p: ActiveDiscParts) -> Network:
    """H = 1 + (R2/(1 + sR2C2) + R3/(1 + sR3C3))/(R1 + 1/(sC1)): poles R2C2 and R3C3, zero between them.

    S. Franco, Design with Operational Amplifiers and Analog Integrated Circuits, 3rd ed., example 3.6.
    """
    return network(
        R1=resistor(p.R1, "minus", "x"),
        C1=capacitor(p.C1, "x", "gnd"),
        R2=resistor(p.R2, "minus", "y"),
        C2=capacitor(p.C2, "minus", "y"),
        R3=resistor(p.R3, "y", "out"),
        C3=capacitor(p.C3, "y", "out"),
        U1=op_amp("in", "minus", "out"),
    )


def disc_replay_passive(p: TwoRTwoC) -> Network:
    """H = (1 + sR2C1)/(1 + s[R1(C1 + C2) + R2C1] + s²R1R2C1C2).

    R2C1 = 318 µs, R1R2C1C2 = 3180·75 µs², R1(C1 + C2) + R2C1 = 3180 + 75 µs; S. P. Lipshitz, "On RIAA equalization
    networks", J. Audio Eng. Soc. 27 (1979) 458-481.
    """
    return network(
        R1=resistor(p.R1, "in", "out"),
        R2=resistor(p.R2, "out", "x"),
        C1=capacitor(p.C1, "x", "gnd"),
        C2=capacitor(p.C2, "out", "gnd"),
    )


def disc_replay_passive_textbook(p: TwoRTwoC) -> Textbook:
    """f0 = 1/(2π√(R1R2C1C2)), Q = √(R1R2C1C2)/(R1(C1 + C2) + R2C1), gain 1 at 0 Hz."""
    t = math.sqrt(p.R1 * p.R2 * p.C1 * p.C2)
    return Textbook(1 / (2 * math.pi * t), t / (p.R1 * (p.C1 + p.C2) + p.R2 * p.C1), 1.0)
