"""Round-off noise and levels inside a cascade, from textbook formulas.

Rounding to a step q adds white noise of the power q²/12 at each section's output; a source reaches the cascade's
output through 1/A of its own section and through the sections behind it (Jackson 1970, "On the interaction of roundoff
noise and dynamic range in digital filters", Bell System Technical Journal 49, 159-184).
"""

from __future__ import annotations

import numpy as np

from a2d.arrays import ComplexArray, FloatArray, rising
from a2d.digital.response import polynomial
from a2d.wordlength.stability import margin_to_circle

_DOUBLINGS = 60  # of the time that the sum runs over: poles within 2^-55 of the circle settle
_SETTLED = 1e-17
_LONGEST_RESPONSE = 1 << 20
_TIME_CONSTANTS = 30.0  # exp(-30) = 1e-13 is left
_EXACT_UP_TO = 12  # sections; the work of the exact sum grows with the fourth power
_AROUND = np.concatenate([-np.geomspace(0.02, 6.0, 24)[::-1], [0.0], np.geomspace(0.02, 6.0, 24)])
_EVEN = np.concatenate([[0.0], np.geomspace(1e-5, 0.5, 200), np.linspace(0.5, np.pi, 200)[1:]])

SHAPES = {0: (1.0, 0.0, 0.0), 1: (1.0, -1.0, 0.0), 2: (1.0, -2.0, 1.0)}


def shape_of(structure: str, error_feedback: int) -> tuple[float, float, float]:
    """The numerator by which a structure shapes its rounding noise before 1/A.

    (1 - z⁻¹)^m with error feedback of order m. The difference form rounds only what leaves it, while its states run on
    exactly: A/d² is its loop, so that its noise is shaped like error feedback of second order.
    """
    return SHAPES[2 if structure == "delta" else error_feedback]


def power_gain(sos: FloatArray) -> FloatArray:
    """Σh² of cascades `sos` [..., S, 6], shape [...].

    With the state equations x' = F·x + g·u, y = c·x + d·u, Σh² = d² + c·P·cᵀ, where P = Σ Fᵏ·g·gᵀ·Fᵏᵀ is summed by
    doubling (Smith 1968, SIAM J. Applied Mathematics 16(1), "Matrix equation XA + BX = C").
    """
    f, g, c, d = state_equations(sos)
    p = g[..., :, np.newaxis] * g[..., np.newaxis, :]
    for _ in range(_DOUBLINGS):
        more = f @ p @ np.swapaxes(f, -1, -2)
        p = p + more
        f = f @ f
        if np.all(np.abs(more) <= _SETTLED * np.max(np.abs(p))):
            break
    return np.asarray(d * d + np.einsum("...i,...ij,...j->...", c, p, c))


def state_equations(sos: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray]:
    """F [..., 2S, 2S], g [..., 2S], c [..., 2S], d [...] of cascades in transposed direct form II."""
    lead, sections = sos.shape[:-2], sos.shape[-2]
    f = np.zeros((*lead, 2 * sections, 2 * sections))
    g, c, d = np.zeros((*lead, 2 * sections)), np.zeros((*lead, 2 * sections)), np.ones(lead)
    for k in range(sections):
        b0, b1, b2, a1, a2 = (sos[..., k, i] for i in (0, 1, 2, 4, 5))
        rows = slice(2 * k, 2 * k + 2)
        drive = np.stack([b1 - a1 * b0, b2 - a2 * b0], axis=-1)
        f[..., rows, :] = drive[..., :, np.newaxis] * c[..., np.newaxis, :]
        f[..., 2 * k, 2 * k] = -a1
        f[..., 2 * k, 2 * k + 1] = 1.0
        f[..., 2 * k + 1, 2 * k] = -a2
        g[..., rows] = drive * d[..., np.newaxis]
        c = b0[..., np.newaxis] * c
        c[..., 2 * k] = 1.0
        d = b0 * d
    return f, g, c, d


def noise_gains(sos: FloatArray, structure: str = "direct_form_1", error_feedback: int = 0) -> FloatArray:
    """The power gain from each section's rounding to the output of a cascade `sos` [S, 6]; shape [S].

    The noise power at the output is their sum times q²/12. Long cascades are integrated over frequency, which is good
    to 0.5 % (0.02 dB).
    """
    if len(sos) > _EXACT_UP_TO:
        return noise_gains_by_frequency(sos, structure, error_feedback)
    return np.array([source_gain(sos, k, structure, error_feedback) for k in range(len(sos))])


def noise_gains_by_frequency(sos: FloatArray, structure: str = "direct_form_1", error_feedback: int = 0) -> FloatArray:
    """`noise_gains` by Parseval's theorem, (1/π)·∫|H|² dw from 0 to π, on a grid dense around every resonance."""
    w, u = circle_grid(sos)
    shaped, passed = squared_responses(sos, u, structure, error_feedback)
    behind = np.ones_like(passed)
    behind[:-1] = np.cumprod(passed[:0:-1], axis=0)[::-1]
    return mean_over_circle(shaped * behind, w)


def squared_responses(
    sos: FloatArray, u: ComplexArray, structure: str, error_feedback: int
) -> tuple[FloatArray, FloatArray]:
    """|shape/A|² of each section's own noise and |B/A|² of what passes it, at 1 - z⁻¹ = `u` [F]; both [S, F]."""
    shape = np.broadcast_to(np.array(shape_of(structure, error_feedback)), (len(sos), 3))
    below = polynomial(sos[:, 3:], u)
    return np.abs(polynomial(shape, u) / below) ** 2, np.abs(polynomial(sos[:, :3], u) / below) ** 2


def mean_over_circle(values: FloatArray, w: FloatArray) -> FloatArray:
    """(1/π)·∫ values dw by the trapezoidal rule, `values` [..., F] at angles `w` [F] rising from 0 to π."""
    return np.asarray(np.sum((values[..., 1:] + values[..., :-1]) * np.diff(w), axis=-1) / (2.0 * np.pi))


def source_gain(sos: FloatArray, k: int, structure: str, error_feedback: int) -> float:
    """The power gain from section k's rounding through the sections after it."""
    path = sos[k:].copy()
    path[0, :3] = shape_of(structure, error_feedback)
    return float(power_gain(path))


def noise_dbfs(gains: FloatArray, sample_fraction: int, output_shift: int = 0) -> float:
    """The noise at the output in dB re full scale: 10·lg(Σ gains·q²/12), q = 2^-sample_fraction."""
    q = 2.0 ** (output_shift - sample_fraction)
    return float(10.0 * np.log10(np.sum(gains) * q * q / 12.0))


def boundary_peaks(sos: FloatArray) -> FloatArray:
    """The largest |H| from the input to each section's output: what a sine can reach there; [S, 6] -> [S]."""
    _, u = circle_grid(sos)
    sections = np.abs(polynomial(sos[:, :3], u) / polynomial(sos[:, 3:], u))
    return np.asarray(np.max(np.cumprod(sections, axis=0), axis=-1))


def boundary_sums(sos: FloatArray) -> FloatArray:
    """Σ|h| from the input to each section's output: what any signal within ±1 can reach there; [S, 6] -> [S].

    With a pole closer than 3e-5 to the circle the response is folded, and the sum a lower bound.
    """
    margin = max(float(np.min(margin_to_circle(sos))), _TIME_CONSTANTS / _LONGEST_RESPONSE)
    count = min(_LONGEST_RESPONSE, 1 << max(8, int(np.ceil(np.log2(2.0 * _TIME_CONSTANTS / margin)))))
    w = 2.0 * np.pi * np.arange(count // 2 + 1) / count
    u = 2.0 * np.sin(w / 2.0) ** 2 + 1j * np.sin(w)
    prefix = np.cumprod(polynomial(sos[:, :3], u) / polynomial(sos[:, 3:], u), axis=0)
    return np.asarray(np.sum(np.abs(np.fft.irfft(prefix, count)), axis=-1))


def circle_grid(sos: FloatArray) -> tuple[FloatArray, ComplexArray]:
    """Angles [F] from 0 to π that miss no resonance of `sos` [S, 6], rising, and 1 - z⁻¹ there."""
    angles = [_EVEN]
    for c0, c1, c2 in (sos[:, :3].T, sos[:, 3:].T):
        pair = c1 * c1 < 4.0 * c0 * c2
        radius = np.sqrt(c2[pair] / c0[pair])
        angle = np.arctan2(np.sqrt(4.0 * c0[pair] * c2[pair] - c1[pair] ** 2), -c1[pair] * np.sign(c0[pair]))
        width = np.clip(np.abs(1.0 - radius), 1e-6 * angle, angle)
        angles.append((angle[:, np.newaxis] + width[:, np.newaxis] * _AROUND).ravel())
    w = rising(np.clip(np.concatenate(angles), 0.0, np.pi))
    return w, np.asarray(2.0 * np.sin(w / 2.0) ** 2 + 1j * np.sin(w))
