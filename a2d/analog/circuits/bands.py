"""Equaliser bands in an op-amp's boost-cut position: one, or any number that act on one another.

The potentiometers lie between the op-amp's inputs. A series resonant circuit from a wiper to ground divides the input
down at the one end (cut) and the feedback at the other (boost).
"""

from __future__ import annotations

from a2d.analog.circuits.textbook import capacitor, inductor, network, op_amp, potentiometer, resistor
from a2d.design.circuits import SeriesResonantParts, SimulatedInductorParts
from a2d.design.network import Network, Part


def series_resonant_bands(p: SeriesResonantParts) -> Network:
    """One band alone, full boost: H = 1 + R2/Z, cut: Z/(Z + R1), Z = R + sL + 1/(sC); P1 lies across both ends."""
    parts: dict[str, Part] = {}
    for i, band in enumerate(p.band, 1):
        parts |= {
            f"P1_{i}": potentiometer(band.P1, "plus", f"w{i}", "minus", band.position),
            f"C1_{i}": capacitor(band.C1, f"w{i}", f"x{i}"),
            f"L1_{i}": inductor(band.L1, f"x{i}", "gnd", band.R1),
        }
    return _between_inputs(p.R1, p.R2, parts)


def simulated_inductor_bands(p: SimulatedInductorParts) -> Network:
    """As `series_resonant_bands`, with Z = 1/(sC1) + R1(1 + sR2C2)/(1 + sR1C2): L = R1R2C2 nearly."""
    parts: dict[str, Part] = {}
    for i, band in enumerate(p.band, 1):
        parts |= {
            f"P1_{i}": potentiometer(band.P1, "plus", f"w{i}", "minus", band.position),
            f"C1_{i}": capacitor(band.C1, f"w{i}", f"x{i}"),
            f"R1_{i}": resistor(band.R1, f"x{i}", f"y{i}"),
            f"C2_{i}": capacitor(band.C2, f"x{i}", f"z{i}"),
            f"R2_{i}": resistor(band.R2, f"z{i}", "gnd"),
            f"U1_{i}": op_amp(f"z{i}", f"y{i}", f"y{i}"),
        }
    return _between_inputs(p.R1, p.R2, parts)


def _between_inputs(r1: float, r2: float, parts: dict[str, Part]) -> Network:
    return network(
        R1=resistor(r1, "in", "plus"), R2=resistor(r2, "out", "minus"), U1=op_amp("plus", "minus", "out"), **parts
    )
