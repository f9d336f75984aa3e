"""What a circuit does, in figures: f0, Q and gain of its sections, and what op-amps, source and load change."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from a2d.analog.network.change import with_op_amps, without_ends
from a2d.analog.network.parts import lay_out
from a2d.analog.network.pencil import direct_response
from a2d.analog.network.stability import growing_pole
from a2d.arrays import ComplexArray, FloatArray
from a2d.design.network import Network, OpAmp, OpAmpModel
from a2d.design.quantities import Decibel, Hertz

EVERYDAY_OP_AMP = OpAmpModel(gain_bandwidth=Hertz(3e6), dc_gain=Decibel(100.0))
"""Stands for an audio op-amp where a design has ideal ones: 3 MHz and 100 dB, common practice."""

_POINTS = 121


@dataclass(frozen=True)
class Figures:
    """Of one section, gains in dB; -inf where there is a zero.

    Attributes
    ----------
    f0_hz, q
        Of its poles; None without poles, q None with one.
    gain_0_db, gain_f0_db, gain_inf_db
        At 0 Hz, at f0, and towards infinity.
    """

    f0_hz: float | None
    q: float | None
    gain_0_db: float
    gain_f0_db: float
    gain_inf_db: float


@dataclass(frozen=True)
class Change:
    """The largest change of level in a band, dB, and where.

    Attributes
    ----------
    what
        The reason: `op-amps of 3 MHz in place of ideal ones`.
    worst_db, at_hz
        The change where it is largest, with its sign; infinite, at the frequency of the pole in the right half-plane,
        where the network would be unstable.
    """

    what: str
    worst_db: float
    at_hz: float


def figures(b: FloatArray, a: FloatArray) -> Figures:
    """f0, Q and gains of one section b, a [3]."""
    highest = int(np.flatnonzero((a != 0.0) | (b != 0.0))[0])
    low, high = _gain(b[2], a[2]), _gain(b[highest], a[highest])
    if a[0] == 0.0 and a[1] == 0.0:
        return Figures(None, None, low, low, low)
    w0 = float(np.sqrt(a[2] / a[0])) if a[0] else float(a[2] / a[1])
    q = float(np.sqrt(a[2] * a[0]) / a[1]) if a[0] else None
    s = 1j * w0
    at_f0 = float(abs((b[0] * s + b[1]) * s + b[2]) / abs((a[0] * s + a[1]) * s + a[2]))
    return Figures(w0 / (2.0 * np.pi), q, low, _gain(at_f0, 1.0), high)


def _gain(over: float, under: float) -> float:
    if over == 0.0:
        return -np.inf
    return float(20.0 * np.log10(abs(over / under))) if under else np.inf


def changes(network: Network, band_hz: tuple[float, float]) -> tuple[Change, ...]:
    """What finite op-amps, the source and the load change in a band: one entry for each that the network has.

    Op-amps with a stated model are held against ideal ones; for ideal ones it is told what `EVERYDAY_OP_AMP` would
    change.
    """
    f_hz = np.geomspace(*band_hz, _POINTS)
    here = _response(network, f_hz)
    found: list[Change] = []
    if any(isinstance(part, OpAmp) and part.opamp != "ideal" for part in network.parts.values()):
        ideal = _response(with_op_amps(network, "ideal"), f_hz)
        found.append(_change("the op-amps' finite gain-bandwidth", here, ideal, f_hz))
    elif any(isinstance(part, OpAmp) for part in network.parts.values()):
        found.append(_everyday(network, here, f_hz))
    if network.entry.source > 0.0:
        without = _response(without_ends(network, source=True), f_hz)
        found.append(_change(f"the source of {network.entry.source:g} Ω", here, without, f_hz))
    if network.exit.load is not None:
        without = _response(without_ends(network, load=True), f_hz)
        found.append(_change(f"the load of {network.exit.load:g} Ω", here, without, f_hz))
    return tuple(found)


def _everyday(network: Network, ideal: ComplexArray, f_hz: FloatArray) -> Change:
    """The change without bound when the circuit is unstable with such op-amps: their delay can undo its damping."""
    real, what = with_op_amps(network, EVERYDAY_OP_AMP), "op-amps of 3 MHz in place of ideal ones (would change)"
    pole = growing_pole(real)
    if pole is not None:
        return Change(what, np.inf, abs(pole) / (2.0 * np.pi))
    return _change(what, _response(real, f_hz), ideal, f_hz)


def _response(network: Network, f_hz: FloatArray) -> ComplexArray:
    layout = lay_out(network)
    return direct_response(layout.pencil(np.array(layout.nominal)), f_hz)


def _change(what: str, here: ComplexArray, without: ComplexArray, f_hz: FloatArray) -> Change:
    level = 20.0 * np.log10(np.maximum(np.abs(here), 1e-30) / np.maximum(np.abs(without), 1e-30))
    worst = int(np.argmax(np.abs(level)))
    return Change(what, float(level[worst]), float(f_hz[worst]))
