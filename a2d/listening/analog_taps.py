"""H(j2πf) below half the sample rate as a recursion that rings as the circuit does, times a short filter.

With T = 1/fs every root r of a section contributes (s - r) = (1 - e^{rT}·e^{-sT})·g((s - r)·T)/T, where
g(x) = x/(1 - e^{-x}) is free of zeros and poles for |Im x| < 2π. The bracket is a recursion's factor in z⁻¹ = e^{-sT};
what remains, the product of the g, is smooth over the whole band, so that its impulse response is short whatever the
circuit's time constants are.
"""

from __future__ import annotations

import numpy as np

from a2d.analog.chain import AnalogChain
from a2d.arrays import ComplexArray, FloatArray
from a2d.errors import AudioError

HALF_TAPS = 2048
GRID = 2**15
FAR = 20.0  # |r|·T beyond which a root is left to the short filter: e^{-20} rings no longer
TAPER_BETA = 20.0


def refuse_unstable(chain: AnalogChain) -> None:
    """An error for poles on the axis or right of it: nothing that goes on for ever can be rendered."""
    for name, a in zip(chain.names, chain.a, strict=True):
        roots = np.roots(a)
        if np.any(roots.real >= 0.0):
            worst = roots[np.argmax(roots.real)]
            raise AudioError(
                f'section "{name}" has a pole at {worst:.6g} rad/s; only poles left of the axis can be rendered'
            )


def matched_recursion(chain: AnalogChain, sample_rate_hz: float) -> FloatArray:
    """Second-order sections [S, 6] with zeros and poles at e^{rT} of the analog ones."""
    sos = np.zeros((len(chain), 6))
    for row, b, a in zip(sos, chain.b, chain.a, strict=True):
        row[:3] = _factors(_near(b, sample_rate_hz)[0], sample_rate_hz)
        row[3:] = _factors(_near(a, sample_rate_hz)[0], sample_rate_hz)
    return sos


def _near(polynomial: FloatArray, sample_rate_hz: float) -> tuple[ComplexArray, ComplexArray]:
    """The roots of c2·s² + c1·s + c0 near enough for the recursion, and the far ones."""
    roots = np.asarray(np.roots(polynomial), dtype=np.complex128)
    near = np.abs(roots) < FAR * sample_rate_hz
    return roots[near], roots[~near]


def _factors(roots: ComplexArray, sample_rate_hz: float) -> FloatArray:
    out = np.zeros(3)
    product = np.atleast_1d(np.poly(np.exp(roots / sample_rate_hz)).real)
    out[: product.size] = product
    return out


def correction_response(chain: AnalogChain, sample_rate_hz: float, f_hz: FloatArray) -> ComplexArray:
    """H(j2πf) over the response of `matched_recursion`, at `f_hz` [F] up to half the rate."""
    s = np.asarray(2j * np.pi * f_hz, dtype=np.complex128)
    total = np.ones(f_hz.size, dtype=np.complex128)
    for b, a in zip(chain.b, chain.a, strict=True):
        total *= _remainder(b, s, sample_rate_hz) / _remainder(a, s, sample_rate_hz)
    return total


def _remainder(polynomial: FloatArray, s: ComplexArray, sample_rate_hz: float) -> ComplexArray:
    coefficients = np.trim_zeros(polynomial, "f")
    near, far = _near(polynomial, sample_rate_hz)
    out = np.full(s.size, coefficients[0] if coefficients.size else 0.0, dtype=np.complex128)
    for root in near:
        x = (s - root) / sample_rate_hz
        out *= sample_rate_hz * _g(x)
    for root in far:
        out *= s - root
    return out


def _g(x: ComplexArray) -> ComplexArray:
    """x/(1 - e^{-x}), 1 at x = 0."""
    bottom = -np.expm1(-x)
    return np.divide(x, bottom, out=np.ones_like(x), where=bottom != 0.0)


def short_correction(chain: AnalogChain, sample_rate_hz: float) -> FloatArray:
    """Taps [2·HALF_TAPS + 1] of the smooth remainder; the middle one is at time zero.

    Where H is not real at half the rate the taps fall as 1/n only; the outer half of them is faded by the integral of
    a Kaiser window, which changes the response in a narrow region below half the rate and nowhere else.
    """
    f = np.asarray(np.fft.rfftfreq(GRID, 1.0 / sample_rate_hz), dtype=np.float64)
    taps = np.fft.irfft(correction_response(chain, sample_rate_hz, f), GRID)
    around = np.concatenate([taps[-HALF_TAPS:], taps[: HALF_TAPS + 1]])
    return np.asarray(around * _taper())


def _taper() -> FloatArray:
    edge = HALF_TAPS // 2
    rise = np.cumsum(np.kaiser(edge + 1, TAPER_BETA))
    rise = rise[:-1] / rise[-1]
    return np.concatenate([rise, np.ones(2 * (HALF_TAPS - edge) + 1), rise[::-1]])
