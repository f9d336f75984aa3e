"""Filters of two integrators in a loop, with all of their outputs: state-variable and Tow-Thomas.

W. J. Kerwin, L. P. Huelsman, R. W. Newcomb, IEEE J. Solid-State Circuits SC-2 (1967) 87-92; J. Tow, IEEE Spectrum 6
(1969) no. 12, 64-68; L. C. Thomas, IEEE Trans. Circuit Theory CT-18 (1971) 350-357.
"""

from __future__ import annotations

import math

from a2d.analog.circuits.textbook import Textbook, capacitor, network, op_amp, resistor
from a2d.design.circuits import StateVariableParts, TowThomasParts
from a2d.design.network import Network


def state_variable_lowpass(p: StateVariableParts) -> Network:
    """H = -(R3/R1)/D, D = R3/R2 + k·sR7C2 + s²R6R7C1C2, k = (1 + R3/R1 + R3/R2)·R5/(R4 + R5)."""
    return _state_variable(p, "lp")


def state_variable_bandpass(p: StateVariableParts) -> Network:
    """H = +(R3/R1)·sR7C2/D, D as for the low-pass output."""
    return _state_variable(p, "bp")


def state_variable_highpass(p: StateVariableParts) -> Network:
    """H = -(R3/R1)·s²R6R7C1C2/D, D as for the low-pass output."""
    return _state_variable(p, "hp")


def _state_variable(p: StateVariableParts, out: str) -> Network:
    """R1 input, R2 from lp, R3 from hp to the sum; R4 from bp, R5 to ground on the other side."""
    return network(
        out,
        R1=resistor(p.R1, "in", "sum"),
        R2=resistor(p.R2, "lp", "sum"),
        R3=resistor(p.R3, "hp", "sum"),
        R4=resistor(p.R4, "bp", "damp"),
        R5=resistor(p.R5, "damp", "gnd"),
        U1=op_amp("damp", "sum", "hp"),
        R6=resistor(p.R6, "hp", "x"),
        C1=capacitor(p.C1, "x", "bp"),
        U2=op_amp("gnd", "x", "bp"),
        R7=resistor(p.R7, "bp", "y"),
        C2=capacitor(p.C2, "y", "lp"),
        U3=op_amp("gnd", "y", "lp"),
    )


def _loop(p: StateVariableParts) -> tuple[float, float, float]:
    """ω0, Q and k of the loop."""
    k = (1.0 + p.R3 / p.R1 + p.R3 / p.R2) * p.R5 / (p.R4 + p.R5)
    w0 = math.sqrt(p.R3 / p.R2 / (p.R6 * p.R7 * p.C1 * p.C2))
    return w0, w0 * p.R6 * p.C1 / k, k


def state_variable_lowpass_textbook(p: StateVariableParts) -> Textbook:
    """f0 = √(R3/R2)/(2π√(R6R7C1C2)), Q = 2πf0·R6C1/k, gain -R2/R1."""
    w0, q, _ = _loop(p)
    return Textbook(w0 / (2 * math.pi), q, -p.R2 / p.R1)


def state_variable_bandpass_textbook(p: StateVariableParts) -> Textbook:
    """f0, Q as for the low-pass output; gain at f0 (R3/R1)/k."""
    w0, q, k = _loop(p)
    return Textbook(w0 / (2 * math.pi), q, p.R3 / p.R1 / k)


def state_variable_highpass_textbook(p: StateVariableParts) -> Textbook:
    """f0, Q as for the low-pass output; gain -R3/R1."""
    w0, q, _ = _loop(p)
    return Textbook(w0 / (2 * math.pi), q, -p.R3 / p.R1)


def tow_thomas_bandpass(p: TowThomasParts) -> Network:
    """H = -(R2/R1)·sT/D, D = R6/R5 + sT + s²R3R4C1C2, T = C2R3R4/R2."""
    return _tow_thomas(p, "bp")


def tow_thomas_lowpass_inverted(p: TowThomasParts) -> Network:
    """H = +(R3/R1)/D, the output of the second integrator; D as for the band-pass output."""
    return _tow_thomas(p, "lp")


def tow_thomas_lowpass(p: TowThomasParts) -> Network:
    """H = -(R3/R1)·(R6/R5)/D, the output of the inverter; D as for the band-pass output."""
    return _tow_thomas(p, "inv")


def _tow_thomas(p: TowThomasParts, out: str) -> Network:
    return network(
        out,
        R1=resistor(p.R1, "in", "x"),
        R2=resistor(p.R2, "bp", "x"),
        C1=capacitor(p.C1, "bp", "x"),
        R3=resistor(p.R3, "inv", "x"),
        U1=op_amp("gnd", "x", "bp"),
        R4=resistor(p.R4, "bp", "y"),
        C2=capacitor(p.C2, "lp", "y"),
        U2=op_amp("gnd", "y", "lp"),
        R5=resistor(p.R5, "lp", "z"),
        R6=resistor(p.R6, "inv", "z"),
        U3=op_amp("gnd", "z", "inv"),
    )


def _tow_thomas_loop(p: TowThomasParts) -> tuple[float, float]:
    w0 = math.sqrt(p.R6 / p.R5 / (p.R3 * p.R4 * p.C1 * p.C2))
    return w0 / (2 * math.pi), w0 * p.R2 * p.C1


def tow_thomas_bandpass_textbook(p: TowThomasParts) -> Textbook:
    """f0 = √(R6/R5)/(2π√(R3R4C1C2)), Q = 2πf0·R2C1, gain at f0 -R2/R1."""
    return Textbook(*_tow_thomas_loop(p), -p.R2 / p.R1)


def tow_thomas_lowpass_inverted_textbook(p: TowThomasParts) -> Textbook:
    """f0, Q as for the band-pass output; gain (R3/R1)·R5/R6."""
    return Textbook(*_tow_thomas_loop(p), p.R3 / p.R1 * p.R5 / p.R6)


def tow_thomas_lowpass_textbook(p: TowThomasParts) -> Textbook:
    """f0, Q as for the band-pass output; gain -R3/R1."""
    return Textbook(*_tow_thomas_loop(p), -p.R3 / p.R1)
