"""Sallen-Key filters: a non-inverting amplifier of gain K = 1 + RB/RA with one path of positive feedback.

R. P. Sallen, E. L. Key, "A practical method of designing RC active filters", IRE Trans. Circuit Theory 2 (1955)
74-85; the forms as in S. Franco, Design with Operational Amplifiers and Analog Integrated Circuits, 3rd ed., ch. 3.
"""

from __future__ import annotations

import math

from a2d.analog.circuits.textbook import Textbook, capacitor, network, op_amp, resistor
from a2d.design.circuits import SallenKeyBandpassParts, SallenKeyParts
from a2d.design.network import Network, Part


def sallen_key_lowpass(p: SallenKeyParts) -> Network:
    """H = K/(1 + s[(1 - K)R1C1 + (R1 + R2)C2] + s²R1R2C1C2)."""
    return network(
        R1=resistor(p.R1, "in", "a"),
        R2=resistor(p.R2, "a", "plus"),
        C1=capacitor(p.C1, "a", "out"),
        C2=capacitor(p.C2, "plus", "gnd"),
        **_amplifier(p),
    )


def sallen_key_lowpass_textbook(p: SallenKeyParts) -> Textbook:
    """f0 = 1/(2π√(R1R2C1C2)), Q = √(R1R2C1C2)/((1 - K)R1C1 + (R1 + R2)C2), gain K."""
    t = math.sqrt(p.R1 * p.R2 * p.C1 * p.C2)
    return Textbook(1 / (2 * math.pi * t), t / ((1 - p.gain) * p.R1 * p.C1 + (p.R1 + p.R2) * p.C2), p.gain)


def sallen_key_highpass(p: SallenKeyParts) -> Network:
    """H = K·s²R1R2C1C2/(1 + s[R1(C1 + C2) + (1 - K)R2C2] + s²R1R2C1C2)."""
    return network(
        C1=capacitor(p.C1, "in", "a"),
        C2=capacitor(p.C2, "a", "plus"),
        R1=resistor(p.R1, "a", "out"),
        R2=resistor(p.R2, "plus", "gnd"),
        **_amplifier(p),
    )


def sallen_key_highpass_textbook(p: SallenKeyParts) -> Textbook:
    """f0 = 1/(2π√(R1R2C1C2)), Q = √(R1R2C1C2)/(R1(C1 + C2) + (1 - K)R2C2), gain K."""
    t = math.sqrt(p.R1 * p.R2 * p.C1 * p.C2)
    return Textbook(1 / (2 * math.pi * t), t / (p.R1 * (p.C1 + p.C2) + (1 - p.gain) * p.R2 * p.C2), p.gain)


def sallen_key_bandpass(p: SallenKeyBandpassParts) -> Network:
    """H = K·sC2R2(Rp/R1)/(1 + s[Rp(C1 + C2) + R2C2 - K·R2C2Rp/R3] + s²RpR2C1C2), Rp = R1∥R3."""
    return network(
        R1=resistor(p.R1, "in", "a"),
        C1=capacitor(p.C1, "a", "gnd"),
        C2=capacitor(p.C2, "a", "plus"),
        R2=resistor(p.R2, "plus", "gnd"),
        R3=resistor(p.R3, "a", "out"),
        **_amplifier(p),
    )


def sallen_key_bandpass_textbook(p: SallenKeyBandpassParts) -> Textbook:
    """f0 = 1/(2π√(RpR2C1C2)); Q and the gain at f0 from the damping term of H."""
    rp = p.R1 * p.R3 / (p.R1 + p.R3)
    t = math.sqrt(rp * p.R2 * p.C1 * p.C2)
    damping = rp * (p.C1 + p.C2) + p.R2 * p.C2 * (1.0 - p.gain * rp / p.R3)
    return Textbook(1 / (2 * math.pi * t), t / damping, p.gain * p.C2 * p.R2 * rp / p.R1 / damping)


def _amplifier(p: SallenKeyParts | SallenKeyBandpassParts) -> dict[str, Part]:
    """The op-amp between `plus` and `out`, with RA and RB where there are any."""
    if p.RA is None or p.RB == 0.0:
        return {"U1": op_amp("plus", "out", "out")}
    return {
        "RA": resistor(p.RA, "minus", "gnd"),
        "RB": resistor(p.RB, "minus", "out"),
        "U1": op_amp("plus", "minus", "out"),
    }
