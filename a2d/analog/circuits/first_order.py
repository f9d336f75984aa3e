"""Circuits with one pole, and the lead-lag network with two."""

from __future__ import annotations

import math

from a2d.analog.circuits.textbook import Textbook, capacitor, inductor, network, op_amp, resistor
from a2d.design.circuits import AllpassParts, OneRC, OneRL, ShelvingParts, TwoRC, TwoRTwoC
from a2d.design.network import Network


def rc_lowpass(p: OneRC) -> Network:
    """H = 1/(1 + sRC)."""
    return network(R1=resistor(p.R1, "in", "out"), C1=capacitor(p.C1, "out", "gnd"))


def rc_highpass(p: OneRC) -> Network:
    """H = sRC/(1 + sRC)."""
    return network(C1=capacitor(p.C1, "in", "out"), R1=resistor(p.R1, "out", "gnd"))


def rc_textbook(p: OneRC) -> Textbook:
    """f0 = 1/(2πRC)."""
    return Textbook(_hertz(p.R1 * p.C1), None, 1.0)


def rl_lowpass(p: OneRL) -> Network:
    """H = R1/(R1 + r + sL), r the winding's resistance."""
    return network(L1=inductor(p.L1, "in", "out", p.L1_resistance), R1=resistor(p.R1, "out", "gnd"))


def rl_highpass(p: OneRL) -> Network:
    """H = (r + sL)/(R1 + r + sL), r the winding's resistance."""
    return network(R1=resistor(p.R1, "in", "out"), L1=inductor(p.L1, "out", "gnd", p.L1_resistance))


def rl_lowpass_textbook(p: OneRL) -> Textbook:
    """f0 = (R1 + r)/(2πL)."""
    total = p.R1 + p.L1_resistance
    return Textbook(_hertz(p.L1 / total), None, p.R1 / total)


def rl_highpass_textbook(p: OneRL) -> Textbook:
    """f0 = (R1 + r)/(2πL)."""
    return Textbook(_hertz(p.L1 / (p.R1 + p.L1_resistance)), None, 1.0)


def inverting_high_shelf(p: ShelvingParts) -> Network:
    """H = -(R2/R1)·(1 + sC(R1 + R3))/(1 + sCR3)."""
    return network(
        R1=resistor(p.R1, "in", "minus"),
        R3=resistor(p.R3, "in", "x"),
        C1=capacitor(p.C1, "x", "minus"),
        R2=resistor(p.R2, "minus", "out"),
        U1=op_amp("gnd", "minus", "out"),
    )


def inverting_high_shelf_textbook(p: ShelvingParts) -> Textbook:
    """f0 (the pole) = 1/(2πR3C1)."""
    return Textbook(_hertz(p.R3 * p.C1), None, -p.R2 / p.R1)


def inverting_low_shelf(p: ShelvingParts) -> Network:
    """H = -(R2/R1)·(1 + sCR3)/(1 + sC(R2 + R3))."""
    return network(
        R1=resistor(p.R1, "in", "minus"),
        R2=resistor(p.R2, "minus", "out"),
        R3=resistor(p.R3, "minus", "x"),
        C1=capacitor(p.C1, "x", "out"),
        U1=op_amp("gnd", "minus", "out"),
    )


def inverting_low_shelf_textbook(p: ShelvingParts) -> Textbook:
    """f0 (the pole) = 1/(2π(R2 + R3)C1)."""
    return Textbook(_hertz((p.R2 + p.R3) * p.C1), None, -p.R2 / p.R1)


def lead(p: TwoRC) -> Network:
    """H = R2/(R1 + R2)·(1 + sCR1)/(1 + sC·R1∥R2)."""
    return network(R1=resistor(p.R1, "in", "out"), C1=capacitor(p.C1, "in", "out"), R2=resistor(p.R2, "out", "gnd"))


def lead_textbook(p: TwoRC) -> Textbook:
    """f0 (the pole) = 1/(2πC1·R1∥R2)."""
    return Textbook(_hertz(p.C1 * p.R1 * p.R2 / (p.R1 + p.R2)), None, p.R2 / (p.R1 + p.R2))


def lag(p: TwoRC) -> Network:
    """H = (1 + sCR2)/(1 + sC(R1 + R2))."""
    return network(R1=resistor(p.R1, "in", "out"), R2=resistor(p.R2, "out", "x"), C1=capacitor(p.C1, "x", "gnd"))


def lag_textbook(p: TwoRC) -> Textbook:
    """f0 (the pole) = 1/(2πC1(R1 + R2))."""
    return Textbook(_hertz(p.C1 * (p.R1 + p.R2)), None, 1.0)


def lead_lag(p: TwoRTwoC) -> Network:
    """H = (1 + sR1C1)(1 + sR2C2)/(1 + s(R1C1 + R2C2 + R1C2) + s²R1R2C1C2)."""
    return network(
        R1=resistor(p.R1, "in", "out"),
        C1=capacitor(p.C1, "in", "out"),
        R2=resistor(p.R2, "out", "x"),
        C2=capacitor(p.C2, "x", "gnd"),
    )


def lead_lag_textbook(p: TwoRTwoC) -> Textbook:
    """f0 = 1/(2π√(R1R2C1C2)), Q = √(R1R2C1C2)/(R1C1 + R2C2 + R1C2), gain 1 far from f0."""
    t = math.sqrt(p.R1 * p.R2 * p.C1 * p.C2)
    return Textbook(_hertz(t), t / (p.R1 * p.C1 + p.R2 * p.C2 + p.R1 * p.C2), 1.0)


def allpass_first_order(p: AllpassParts) -> Network:
    """H = (1 - sCR3)/(1 + sCR3) with R1 = R2: phase -2·arctan(2πf·R3C1)."""
    return network(
        R1=resistor(p.R1, "in", "minus"),
        R2=resistor(p.R2, "minus", "out"),
        R3=resistor(p.R3, "in", "plus"),
        C1=capacitor(p.C1, "plus", "gnd"),
        U1=op_amp("plus", "minus", "out"),
    )


def allpass_textbook(p: AllpassParts) -> Textbook:
    """f0 = 1/(2πR3C1)."""
    return Textbook(_hertz(p.R3 * p.C1), None, 1.0)


def _hertz(seconds: float) -> float:
    return 1.0 / (2.0 * math.pi * seconds)
