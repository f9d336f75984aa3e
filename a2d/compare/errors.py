"""How far a twin is from its analog original: worst errors over a band, and where they lie."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from a2d import checks
from a2d.analog.chain import AnalogChain
from a2d.arrays import FloatArray
from a2d.compare.curves import MAGNITUDE, PHASE, error_curves, largest_magnitude
from a2d.compare.grid import frequency_grid, largest_between
from a2d.digital.twin import Twin, default_band_hz
from a2d.errors import ParameterError

_GOLDEN = (np.sqrt(5.0) - 1.0) / 2.0


@dataclass(frozen=True)
class Worst:
    """The error of largest modulus in the band, with its sign, and the frequency in Hz where it lies."""

    worst: float
    at_hz: float


@dataclass(frozen=True)
class Comparison:
    """Twin minus analog over a band.

    Attributes
    ----------
    band_hz
        Lower and upper end, Hz.
    magnitude_db, phase_deg, group_delay_us
        Worst errors, in dB, degrees and µs.
    phase_without_delay_deg
        The worst phase error that is left when the best constant delay is taken out.
    delay_us
        That delay, µs: by how much the twin is late.
    """

    band_hz: tuple[float, float]
    magnitude_db: Worst
    phase_deg: Worst
    group_delay_us: Worst
    phase_without_delay_deg: Worst
    delay_us: float


def compare(chain: AnalogChain, twin: Twin, band_hz: tuple[float, float] | None = None) -> Comparison:
    """Worst errors of the whole twin, maximised between grid points.

    Parameters
    ----------
    chain, twin
        The analog original and its twin; they need not have the same number of sections.
    band_hz
        Hz; 20 Hz to 20 kHz, or to 0.4535 of the sample rate where that is lower, when absent.

    Examples
    --------
    >>> from a2d.digital.twin import make_twin
    >>> chain = AnalogChain.of(["rc"], b=[[0, 0, 1]], a=[[0, 1e-3, 1]])
    >>> result = compare(chain, make_twin(chain, 48_000.0))
    >>> round(result.magnitude_db.worst, 3), result.magnitude_db.at_hz
    (-9.1, 20000.0)
    """
    rows = _compare(chain.b[np.newaxis], chain.a[np.newaxis], twin.sos[np.newaxis], twin.sample_rate_hz, band_hz)
    return rows[0]


def compare_sections(
    chain: AnalogChain, twin: Twin, band_hz: tuple[float, float] | None = None
) -> tuple[Comparison, ...]:
    """`compare` for each section alone; the twin has one section an analog section.

    Raises
    ------
    ParameterError
        The twin has another number of sections.
    """
    if len(chain) != len(twin):
        raise ParameterError(f"the twin has {len(twin)} sections, the analog chain {len(chain)}")
    b, a, sos = chain.b[:, np.newaxis], chain.a[:, np.newaxis], twin.sos[:, np.newaxis]
    return _compare(b, a, sos, twin.sample_rate_hz, band_hz)


def band_of(sample_rate_hz: float, band_hz: tuple[float, float] | None) -> FloatArray:
    """The band to judge in, checked against half the sample rate; shape [2], Hz."""
    band = default_band_hz(sample_rate_hz) if band_hz is None else checks.positive("band", band_hz, "Hz")
    if not band[0] < band[1]:
        raise ParameterError(f"the band must rise ({band[0]:g} Hz to {band[1]:g} Hz)")
    checks.below_half_rate("the band's upper end", band[1], sample_rate_hz)
    return band


def _compare(
    b: FloatArray, a: FloatArray, sos: FloatArray, rate: float, band_hz: tuple[float, float] | None
) -> tuple[Comparison, ...]:
    """Comparisons of N chains: `b`, `a` [N, S, 3], `sos` [N, T, 6]."""
    band = band_of(rate, band_hz)
    f = frequency_grid(b.reshape(-1, 3), a.reshape(-1, 3), band, sos, rate)
    peak = largest_magnitude(b, a, f)
    on_grid = error_curves(b, a, sos, rate, f, peak)
    jumps = b.shape[-2] != sos.shape[-2]  # see `curves`: only then the phase is known to 360 degrees alone
    unwrapped = np.unwrap(on_grid[PHASE], period=360.0, axis=-1) if jumps else on_grid[PHASE]
    delay = best_delay(f, unwrapped)
    residual = unwrapped + 360.0 * f * delay[:, np.newaxis]
    values = np.concatenate([on_grid[:PHASE], unwrapped[np.newaxis], on_grid[PHASE + 1 :], residual[np.newaxis]])

    def between(at: FloatArray) -> FloatArray:
        """The four curves at `at` [4, N, F], each at its own frequencies; phase continued from the grid's."""
        out = np.empty_like(at)
        for row in range(4):
            source = row if row < 3 else PHASE
            out[row] = error_curves(b, a, sos, rate, at[row], peak)[source]
        for row in (PHASE, 3) if jumps else ():
            near = np.stack([np.interp(at[row, n], f, unwrapped[n]) for n in range(len(b))])
            out[row] += 360.0 * np.round((near - out[row]) / 360.0)
        out[3] += 360.0 * at[3] * delay[:, np.newaxis]
        return out

    worst, at_hz = largest_between(between, f, values)
    return tuple(_row(band, worst[:, n], at_hz[:, n], float(delay[n])) for n in range(len(b)))


def _row(band: FloatArray, worst: FloatArray, at_hz: FloatArray, delay_s: float) -> Comparison:
    found = [Worst(float(w), float(f)) for w, f in zip(worst, at_hz, strict=True)]
    return Comparison(
        band_hz=(float(band[0]), float(band[1])),
        magnitude_db=found[MAGNITUDE],
        phase_deg=found[PHASE],
        group_delay_us=found[2],
        phase_without_delay_deg=found[3],
        delay_us=1e6 * delay_s,
    )


def best_delay(f_hz: FloatArray, phase_deg: FloatArray) -> FloatArray:
    """The constant delay (s, positive when late) that leaves the smallest worst phase error on the grid.

    Parameters
    ----------
    f_hz
        Shape [F].
    phase_deg
        Continuous phase errors, shape [N, F].

    Returns
    -------
    Shape [N]. The worst error is a convex function of the delay, so golden-section search finds its minimum.
    """
    bound = np.max(np.abs(phase_deg) / (360.0 * f_hz), axis=-1) + 1e-12
    low, high = -bound, bound.copy()

    def worst(delay: FloatArray) -> FloatArray:
        return np.asarray(np.max(np.abs(phase_deg + 360.0 * f_hz * delay[:, np.newaxis]), axis=-1))

    left, right = high - _GOLDEN * (high - low), low + _GOLDEN * (high - low)
    at_left, at_right = worst(left), worst(right)
    for _ in range(60):
        keep_left = at_left < at_right
        low, high = np.where(keep_left, low, left), np.where(keep_left, right, high)
        left, right = high - _GOLDEN * (high - low), low + _GOLDEN * (high - low)
        at_left, at_right = worst(left), worst(right)
    return np.asarray(0.5 * (low + high))
