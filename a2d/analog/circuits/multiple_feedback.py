"""Multiple-feedback filters: an inverting op-amp with two paths of feedback.

T. Kugelstadt, "Active filter design techniques", chapter 16 of Op Amps for Everyone, Texas Instruments.
"""

from __future__ import annotations

import math

from a2d.analog.circuits.textbook import Textbook, capacitor, network, op_amp, resistor
from a2d.design.circuits import ThreeRTwoC, TwoRThreeC
from a2d.design.network import Network


def multiple_feedback_lowpass(p: ThreeRTwoC) -> Network:
    """H = -(R3/R1)/(1 + sC2(R2 + R3 + R2R3/R1) + s²R2R3C1C2)."""
    return network(
        R1=resistor(p.R1, "in", "a"),
        C1=capacitor(p.C1, "a", "gnd"),
        R2=resistor(p.R2, "a", "minus"),
        R3=resistor(p.R3, "a", "out"),
        C2=capacitor(p.C2, "minus", "out"),
        U1=op_amp("gnd", "minus", "out"),
    )


def multiple_feedback_lowpass_textbook(p: ThreeRTwoC) -> Textbook:
    """f0 = 1/(2π√(R2R3C1C2)), Q = √(R2R3C1C2)/(C2(R2 + R3 + R2R3/R1)), gain -R3/R1."""
    t = math.sqrt(p.R2 * p.R3 * p.C1 * p.C2)
    return Textbook(1 / (2 * math.pi * t), t / (p.C2 * (p.R2 + p.R3 + p.R2 * p.R3 / p.R1)), -p.R3 / p.R1)


def multiple_feedback_highpass(p: TwoRThreeC) -> Network:
    """H = -(C1/C2)·s²R1R2C2C3/(1 + sR1(C1 + C2 + C3) + s²R1R2C2C3)."""
    return network(
        C1=capacitor(p.C1, "in", "a"),
        R1=resistor(p.R1, "a", "gnd"),
        C3=capacitor(p.C3, "a", "minus"),
        C2=capacitor(p.C2, "a", "out"),
        R2=resistor(p.R2, "minus", "out"),
        U1=op_amp("gnd", "minus", "out"),
    )


def multiple_feedback_highpass_textbook(p: TwoRThreeC) -> Textbook:
    """f0 = 1/(2π√(R1R2C2C3)), Q = √(R1R2C2C3)/(R1(C1 + C2 + C3)), gain -C1/C2."""
    t = math.sqrt(p.R1 * p.R2 * p.C2 * p.C3)
    return Textbook(1 / (2 * math.pi * t), t / (p.R1 * (p.C1 + p.C2 + p.C3)), -p.C1 / p.C2)


def multiple_feedback_bandpass(p: ThreeRTwoC) -> Network:
    """H = -sC1R3(Rp/R1)/(1 + sRp(C1 + C2) + s²RpR3C1C2), Rp = R1∥R2."""
    return network(
        R1=resistor(p.R1, "in", "a"),
        R2=resistor(p.R2, "a", "gnd"),
        C1=capacitor(p.C1, "a", "minus"),
        C2=capacitor(p.C2, "a", "out"),
        R3=resistor(p.R3, "minus", "out"),
        U1=op_amp("gnd", "minus", "out"),
    )


def multiple_feedback_bandpass_textbook(p: ThreeRTwoC) -> Textbook:
    """f0 = 1/(2π√(RpR3C1C2)), Q = √(RpR3C1C2)/(Rp(C1 + C2)), gain at f0 -(R3/R1)·C1/(C1 + C2)."""
    rp = p.R1 * p.R2 / (p.R1 + p.R2)
    t = math.sqrt(rp * p.R3 * p.C1 * p.C2)
    return Textbook(1 / (2 * math.pi * t), t / (rp * (p.C1 + p.C2)), -p.R3 / p.R1 * p.C1 / (p.C1 + p.C2))
