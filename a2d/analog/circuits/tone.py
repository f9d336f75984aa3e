"""Tone controls: Baxandall's by feedback, and the passive one."""

from __future__ import annotations

from a2d.analog.circuits.textbook import capacitor, network, op_amp, potentiometer, resistor
from a2d.design.circuits import ActiveToneParts, PassiveToneParts
from a2d.design.network import Network


def baxandall(p: ActiveToneParts) -> Network:
    """Bass and treble by feedback: far below, boost (R1 + P1)/R1; cut mirrors boost; flat with both at 0.5.

    P. J. Baxandall, "Negative-feedback tone control", Wireless World 58 (1952) 402-405; drawn as in S. Franco, Design
    with Operational Amplifiers and Analog Integrated Circuits, 3rd ed., example 3.7.
    """
    return network(
        R1a=resistor(p.R1, "in", "b1"),
        P1=potentiometer(p.P1, "b2", "bw", "b1", p.bass),
        R1b=resistor(p.R1, "b2", "out"),
        C1a=capacitor(p.C1, "b1", "bw"),
        C1b=capacitor(p.C1, "bw", "b2"),
        R3=resistor(p.R3, "bw", "minus"),
        R2a=resistor(p.R2, "in", "t1"),
        P2=potentiometer(p.P2, "t2", "tw", "t1", p.treble),
        R2b=resistor(p.R2, "t2", "out"),
        C2=capacitor(p.C2, "tw", "minus"),
        U1=op_amp("gnd", "minus", "out"),
    )


def passive_tone(p: PassiveToneParts) -> Network:
    """Bass and treble by loading dividers only; the loss at the middle is some R2/(R1 + R2)."""
    return network(
        R1=resistor(p.R1, "in", "b1"),
        P1=potentiometer(p.P1, "b2", "bw", "b1", p.bass),
        R2=resistor(p.R2, "b2", "gnd"),
        C1=capacitor(p.C1, "b1", "bw"),
        C2=capacitor(p.C2, "bw", "b2"),
        R3=resistor(p.R3, "bw", "out"),
        C3=capacitor(p.C3, "in", "t1"),
        P2=potentiometer(p.P2, "t2", "out", "t1", p.treble),
        C4=capacitor(p.C4, "t2", "gnd"),
    )
