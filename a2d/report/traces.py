"""The curves that plots and pages show, as numbers: no drawing here."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from a2d.analog.chain import AnalogChain
from a2d.analog.response import polynomial as s_polynomial
from a2d.analog.response import section_group_delay as analog_group_delay
from a2d.arrays import ArrayLike, BoolArray, ComplexArray, FloatArray, IntArray
from a2d.compare.curves import FLOOR_DB, error_curves
from a2d.digital.response import section_group_delay as digital_group_delay
from a2d.digital.twin import Twin
from a2d.report.roots import Roots, s_of_z, s_roots, z_roots

LOWEST_DB = -300.0  # what a response of exactly zero is shown as
POINTS = 900  # of the logarithmic grid; 300 a decade over the audible band
AROUND_A_ROOT = np.linspace(-4.0, 4.0, 33)  # half bandwidths either side of a resonance


@dataclass(frozen=True, eq=False)
class Curves:
    """Magnitude (dB), continuous phase (degrees) and group delay (µs), each [F], at `f_hz` [F].

    The phase starts within ±180 degrees; the delay is NaN where the magnitude is `FLOOR_DB` below its maximum.
    """

    f_hz: FloatArray
    magnitude_db: FloatArray
    phase_deg: FloatArray
    group_delay_us: FloatArray


@dataclass(frozen=True, eq=False)
class TwinTraces:
    """One sample rate: the twin's curves over its band, their error against the analog ones, poles and zeros."""

    sample_rate_hz: float
    curves: Curves
    error: Curves
    roots: Roots


@dataclass(frozen=True, eq=False)
class Traces:
    """All that the plots of one design show.

    Parameters
    ----------
    analog
        The analog curves over the union of the bands.
    asymptote_db
        Shape [F] on the analog grid: the straight-line approximation of the magnitude.
    roots
        Poles and zeros of H(s), rad/s.
    names
        The sections' names.
    twins
        One a sample rate.
    """

    analog: Curves
    asymptote_db: FloatArray
    roots: Roots
    names: tuple[str, ...]
    twins: tuple[TwinTraces, ...]


def traces(chain: AnalogChain, twins: Sequence[Twin], bands_hz: ArrayLike) -> Traces:
    """The curves of a chain and its twins; `bands_hz` [T, 2] holds the band of each twin's comparison, in Hz."""
    bands = np.asarray(bands_hz, dtype=np.float64).reshape(-1, 2)
    roots = s_roots(chain)
    analog_f = frequency_grid((float(bands[:, 0].min()), float(bands[:, 1].max())), roots.values)
    return Traces(
        analog_curves(chain, analog_f),
        asymptote_db(chain, analog_f),
        roots,
        chain.names,
        tuple(_twin_traces(chain, twin, (low, high), roots) for twin, (low, high) in zip(twins, bands, strict=True)),
    )


def _twin_traces(chain: AnalogChain, twin: Twin, band_hz: tuple[float, float], analog_roots: Roots) -> TwinTraces:
    roots = z_roots(twin)
    resonances = np.concatenate([analog_roots.values, s_of_z(roots, twin.sample_rate_hz).values])
    f = frequency_grid(band_hz, resonances)
    curves = twin_curves(twin, f)
    turns = np.round((curves.phase_deg[0] - analog_curves(chain, f).phase_deg[0]) / 360.0)
    curves = replace(curves, phase_deg=curves.phase_deg - 360.0 * turns)
    return TwinTraces(twin.sample_rate_hz, curves, error_of(chain, twin, f), roots)


def error_of(chain: AnalogChain, twin: Twin, f_hz: FloatArray) -> Curves:
    """Twin minus analog, as `a2d.compare` judges it; phase made continuous, gaps (NaN) where it is not judged."""
    analog_db = analog_curves(chain, f_hz).magnitude_db
    peak = np.asarray(10.0 ** (analog_db.max() / 20.0))
    magnitude, phase, delay = error_curves(chain.b, chain.a, twin.sos, twin.sample_rate_hz, f_hz, peak)
    gap = np.where(near_zero(analog_db), np.nan, 0.0)
    return Curves(f_hz, magnitude, np.unwrap(phase, period=360.0) + gap, delay + gap)


def near_zero(magnitude_db: FloatArray) -> BoolArray:
    """True where a response is too small for its phase or delay to mean anything: `FLOOR_DB` below its maximum."""
    return np.asarray(magnitude_db <= magnitude_db.max() - FLOOR_DB)


def frequency_grid(band_hz: tuple[float, float], s: ComplexArray) -> FloatArray:
    """A logarithmic grid over the band (Hz), with more points around the resonances `s` (rad/s, [N]); ascending."""
    low, high = band_hz
    width = np.abs(s.real) / (2.0 * np.pi)
    near = np.abs(s.imag)[:, np.newaxis] / (2.0 * np.pi) + width[:, np.newaxis] * AROUND_A_ROOT
    inside = near[(near > low) & (near < high)]
    return np.asarray(np.unique(np.concatenate([np.geomspace(low, high, POINTS), inside])))


def analog_curves(chain: AnalogChain, f_hz: FloatArray) -> Curves:
    """The curves of H(j2πf). Each polynomial stays in one half plane, so that its angle needs no unwrapping."""
    w = 2.0 * np.pi * f_hz
    delay_s = analog_group_delay(chain.b, chain.a, f_hz).sum(axis=0)
    return _curves(f_hz, s_polynomial(chain.b, w), s_polynomial(chain.a, w), delay_s)


def twin_curves(twin: Twin, f_hz: FloatArray) -> Curves:
    """The curves of H(e^jw). Turned by e^jw a polynomial's imaginary part is (c0 - c2)·sin w, which keeps its sign."""
    w = 2.0 * np.pi * f_hz / twin.sample_rate_hz
    delay_s = digital_group_delay(twin.sos, f_hz, twin.sample_rate_hz).sum(axis=0)
    return _curves(f_hz, _centred(twin.sos[:, :3], w), _centred(twin.sos[:, 3:], w), delay_s)


def _curves(f_hz: FloatArray, numerator: ComplexArray, denominator: ComplexArray, delay_s: FloatArray) -> Curves:
    magnitude = decibels(numerator, denominator)
    phase = np.degrees(np.sum(np.angle(numerator) - np.angle(denominator), axis=0))
    phase -= 360.0 * np.round(phase[0] / 360.0)
    return Curves(f_hz, magnitude, phase, np.where(near_zero(magnitude), np.nan, 1e6 * delay_s))


def _centred(c: FloatArray, w: FloatArray) -> ComplexArray:
    """e^jw·C(e^jw) = (c0 + c1 + c2) - 2·(c0 + c2)·sin²(w/2) + j·(c0 - c2)·sin w: [S, 3], [F] -> [S, F]."""
    c0, c1, c2 = c[:, 0, np.newaxis], c[:, 1, np.newaxis], c[:, 2, np.newaxis]
    return np.asarray((c0 + c1 + c2) - 2.0 * (c0 + c2) * np.sin(w / 2.0) ** 2 + 1j * (c0 - c2) * np.sin(w))


def decibels(numerator: ComplexArray, denominator: ComplexArray) -> FloatArray:
    """20·lg of the product of the ratios over the first axis, not below `LOWEST_DB`: [S, F] -> [F]."""
    ratio = np.prod(np.abs(numerator / denominator), axis=0)
    return np.asarray(20.0 * np.log10(np.maximum(ratio, 10.0 ** (LOWEST_DB / 20.0))))


def asymptote_db(chain: AnalogChain, f_hz: FloatArray) -> FloatArray:
    """Straight-line magnitude of the chain in dB, shape [F].

    Of |s - r| the larger of |s| and |r| is taken: flat below the corner |r|/2π, 20 dB a decade above it (H. W. Bode,
    Network Analysis and Feedback Amplifier Design, 1945, chapter XV).
    """
    w = 2.0 * np.pi * f_hz
    roots = s_roots(chain)
    corner = np.log10(np.maximum(w, np.abs(roots.values)[:, np.newaxis]))
    signs: IntArray = np.where(roots.is_pole, -1, 1)
    return np.asarray(20.0 * (signs[:, np.newaxis] * corner).sum(axis=0) + 20.0 * np.log10(_leading_ratio(chain)))


def _leading_ratio(chain: AnalogChain) -> float:
    """|product over the sections of the highest numerator over the highest denominator coefficient|."""

    def leading(c: FloatArray) -> FloatArray:
        first = np.argmax(c != 0.0, axis=-1)
        return np.asarray(np.abs(np.take_along_axis(c, first[:, np.newaxis], axis=-1)[:, 0]))

    return max(float(np.prod(leading(chain.b) / leading(chain.a))), float(10.0 ** (LOWEST_DB / 20.0)))
