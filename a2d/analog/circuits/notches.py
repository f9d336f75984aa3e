"""Twin-T, Fliege and bridged-T notches, and the Wien band."""

from __future__ import annotations

import math

from a2d.analog.circuits.textbook import Textbook, capacitor, network, op_amp, resistor
from a2d.design.circuits import BootstrappedTwinTParts, FliegeNotchParts, TwinTParts, TwoRTwoC
from a2d.design.network import Network, Part


def twin_t(p: TwinTParts) -> Network:
    """H = (1 + x²)/(1 + 4x + x²), x = sRC, with R1 = R2 = R, R3 = R/2, C1 = C2 = C, C3 = 2C; a follower behind it."""
    return network(**_twin_t(p, foot="gnd"), U1=op_amp("plus", "out", "out"))


def twin_t_textbook(p: TwinTParts) -> Textbook:
    """f0 = 1/(2πR1C1), Q = 1/4, gain 1 (balanced values)."""
    return Textbook(1 / (2 * math.pi * p.R1 * p.C1), 0.25, 1.0)


def twin_t_bootstrapped(p: BootstrappedTwinTParts) -> Network:
    """H = K(1 + x²)/(1 + 2(2 - K)x + x²), x = sRC, K = 1 + RB/RA: C3 goes to the output in place of ground.

    S. Franco, Design with Operational Amplifiers and Analog Integrated Circuits, 3rd ed., ch. 3.
    """
    return network(
        **_twin_t(p, foot="out"),
        RA=resistor(p.RA, "minus", "gnd"),
        RB=resistor(p.RB, "minus", "out"),
        U1=op_amp("plus", "minus", "out"),
    )


def twin_t_bootstrapped_textbook(p: BootstrappedTwinTParts) -> Textbook:
    """f0 = 1/(2πR1C1), Q = 1/(2(2 - K)), gain K (balanced values)."""
    k = 1.0 + p.RB / p.RA
    return Textbook(1 / (2 * math.pi * p.R1 * p.C1), 1.0 / (2.0 * (2.0 - k)), k)


def _twin_t(p: TwinTParts, foot: str) -> dict[str, Part]:
    return {
        "R1": resistor(p.R1, "in", "a"),
        "R2": resistor(p.R2, "a", "plus"),
        "C3": capacitor(p.C3, "a", foot),
        "C1": capacitor(p.C1, "in", "b"),
        "C2": capacitor(p.C2, "b", "plus"),
        "R3": resistor(p.R3, "b", "gnd"),
    }


def fliege_notch(p: FliegeNotchParts) -> Network:
    """H = (s² + sδ + ω0²)/(s² + s(1/R1 + 1/R2)/C1 + ω0²), ω0² = R6/(R3R4R5C1C2), δ = (1/R1 - R6/(R5R2))/C1.

    N. Fliege's two-op-amp section as a notch: δ = 0 for R1 = R2 and R5 = R6.
    """
    return network(
        R1=resistor(p.R1, "in", "a"),
        C1=capacitor(p.C1, "in", "a"),
        R2=resistor(p.R2, "a", "gnd"),
        R3=resistor(p.R3, "a", "b"),
        C2=capacitor(p.C2, "b", "c"),
        R4=resistor(p.R4, "c", "out"),
        R6=resistor(p.R6, "out", "e"),
        R5=resistor(p.R5, "in", "e"),
        U1=op_amp("a", "c", "out"),
        U2=op_amp("e", "c", "b"),
    )


def fliege_notch_textbook(p: FliegeNotchParts) -> Textbook:
    """f0 = √(R6/(R3R4R5C1C2))/2π, Q = 2πf0C1/(1/R1 + 1/R2), gain 1."""
    w0 = math.sqrt(p.R6 / (p.R3 * p.R4 * p.R5 * p.C1 * p.C2))
    return Textbook(w0 / (2 * math.pi), w0 * p.C1 / (1 / p.R1 + 1 / p.R2), 1.0)


def bridged_t(p: TwoRTwoC) -> Network:
    """H = (1 + sR1(C1 + C2) + s²R1R2C1C2)/(1 + s[R1(C1 + C2) + R2C2] + s²R1R2C1C2)."""
    return network(
        C1=capacitor(p.C1, "in", "a"),
        C2=capacitor(p.C2, "a", "out"),
        R1=resistor(p.R1, "a", "gnd"),
        R2=resistor(p.R2, "in", "out"),
    )


def bridged_t_textbook(p: TwoRTwoC) -> Textbook:
    """f0 = 1/(2π√(R1R2C1C2)), Q = √(R1R2C1C2)/(R1(C1 + C2) + R2C2), gain 1 far from f0."""
    t = math.sqrt(p.R1 * p.R2 * p.C1 * p.C2)
    return Textbook(1 / (2 * math.pi * t), t / (p.R1 * (p.C1 + p.C2) + p.R2 * p.C2), 1.0)


def wien_band(p: TwoRTwoC) -> Network:
    """H = sR2C1/(1 + s(R1C1 + R2C2 + R2C1) + s²R1R2C1C2)."""
    return network(
        R1=resistor(p.R1, "in", "a"),
        C1=capacitor(p.C1, "a", "out"),
        R2=resistor(p.R2, "out", "gnd"),
        C2=capacitor(p.C2, "out", "gnd"),
    )


def wien_band_textbook(p: TwoRTwoC) -> Textbook:
    """f0 = 1/(2π√(R1R2C1C2)), Q = √(R1R2C1C2)/d, gain at f0 R2C1/d, d = R1C1 + R2C2 + R2C1."""
    t, d = math.sqrt(p.R1 * p.R2 * p.C1 * p.C2), p.R1 * p.C1 + p.R2 * p.C2 + p.R2 * p.C1
    return Textbook(1 / (2 * math.pi * t), t / d, p.R2 * p.C1 / d)
