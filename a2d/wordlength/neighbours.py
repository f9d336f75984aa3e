"""Rounding together: the five words of a section chosen among their neighbours for the smallest response error.

For every feedback pair within `REACH` steps of the nearest one, the best real numerator is the solution of a linear
least-squares problem (the numerator is linear in its coefficients); its neighbours are then the candidates. The
nearest rounding is always among the candidates, so the result is never worse than it.
"""

from __future__ import annotations

import itertools
from dataclasses import replace

import numpy as np

from a2d.arrays import BoolArray, ComplexArray, FloatArray
from a2d.digital.response import section_response, unit_delay_complement
from a2d.wordlength.deviation import angular_grid
from a2d.wordlength.rounding import Rounded, fits
from a2d.wordlength.stability import is_stable

REACH = 2
_FEEDBACK_STEPS = np.array(list(itertools.product(range(-REACH, REACH + 1), repeat=2)), dtype=np.float64)
_FORWARD_STEPS = np.array(list(itertools.product((-1.0, 0.0, 1.0), repeat=3)))
_POINTS = 40  # even points of the grid, to which those around each pole and zero are added
_FLOOR = 1e-3  # of the largest response
_TIE = 1e-3
_TINY = 1e-9  # a numerator's sum below this part of its largest value means a zero at d.c. (or half the rate)


def round_together(rounded: Rounded, sos: FloatArray, rate_hz: float, band_hz: tuple[float, float]) -> Rounded:
    """`rounded`, each section's words replaced by the best of their neighbours.

    Parameters
    ----------
    rounded
        The nearest rounding of `sos`.
    sos
        Shape [S, 6], before rounding; without the gain that `rounded` moved to other sections.
    rate_hz, band_hz
        Hz: the band that the error is judged in.
    """
    words = np.stack([_best_row(rounded, sos, row, rate_hz, band_hz) for row in range(len(sos))])
    return replace(rounded, words=words)


def _best_row(rounded: Rounded, sos: FloatArray, row: int, rate_hz: float, band_hz: tuple[float, float]) -> FloatArray:
    nearest, exact = rounded.words[row], sos[row]
    scale = 2.0 ** float(rounded.moved[row])
    f = angular_grid(exact[np.newaxis], rate_hz, band_hz, _POINTS)
    wanted = section_response(exact, f, rate_hz) * scale
    basis = _basis(f, rate_hz, rounded.structure)
    step = _step(rounded, row)
    candidates = _candidates(rounded, row, wanted, basis, step)
    candidates = candidates[_keeps_zeros(candidates, rounded, row, exact)]
    candidates = np.concatenate([nearest[np.newaxis], candidates])
    values = np.ldexp(candidates, -rounded.fractions[row].astype(np.int32))
    error = _error(_response(values, basis), wanted)
    error[~is_stable(values, rounded.structure)] = np.inf
    return np.asarray(candidates[int(np.argmin(error))])


def _error(response: ComplexArray, wanted: ComplexArray) -> FloatArray:
    """The largest level error over the grid in nepers, shape [N]; the vector error decides between equals."""
    weight = _weight(wanted)
    level = np.abs(np.log(np.maximum(np.abs(response), _FLOOR * weight) / np.maximum(np.abs(wanted), _FLOOR * weight)))
    return np.asarray(np.max(level + _TIE * np.abs(response - wanted) / weight, axis=-1))


def _basis(f_hz: FloatArray, rate_hz: float, structure: str) -> ComplexArray:
    """1, d⁻¹, d⁻² for the difference form and 1, z⁻¹, z⁻² for the direct ones, shape [3, F]."""
    u = unit_delay_complement(f_hz, rate_hz)
    one_step = (1.0 - u) / u if structure == "delta" else 1.0 - u
    return np.stack([np.ones_like(one_step), one_step, one_step * one_step])


def _step(rounded: Rounded, row: int) -> FloatArray:
    """The distance of neighbouring words, shape [5]; zero keeps a coefficient that is exactly zero."""
    words = rounded.words[row]
    if rounded.number.kind == "fixed":
        return np.where(words == 0.0, 0.0, 1.0)
    return np.where(words == 0.0, 0.0, np.abs(np.spacing(words.astype(np.float32))).astype(np.float64))


def _response(values: FloatArray, basis: ComplexArray) -> ComplexArray:
    denominator = basis[0] + values[:, 3:] @ basis[1:]
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.asarray((values[:, :3] @ basis) / denominator)


def _candidates(rounded: Rounded, row: int, wanted: ComplexArray, basis: ComplexArray, step: FloatArray) -> FloatArray:
    """Words [N, 5]: all feedback neighbours, each with the neighbours of its best numerator."""
    nearest, unit = rounded.words[row], np.ldexp(1.0, -rounded.fractions[row].astype(np.int32))
    feedback = np.unique(nearest[3:] + _FEEDBACK_STEPS * step[3:], axis=0)
    denominator = basis[0] + (feedback * unit[3:]) @ basis[1:]
    free = np.flatnonzero(step[:3])
    weight = _weight(wanted)
    forward = np.tile(nearest[:3], (len(feedback), 1))
    for index, below in enumerate(denominator):
        # (Σ b_j·basis_j)/below = wanted, weighted by 1/|wanted|, real and imaginary parts stacked
        matrix = (basis[free] * unit[free, np.newaxis] / (below * weight)).T
        target = wanted / weight
        real = np.concatenate([matrix.real, matrix.imag])
        if np.all(np.isfinite(real)) and len(free):
            size = np.maximum(np.max(np.abs(real), axis=0), 1e-300)
            best = np.linalg.lstsq(real / size, np.concatenate([target.real, target.imag]), rcond=None)[0] / size
            grid = np.where(step[free] > 0.0, step[free], 1.0)
            forward[index, free] = np.rint(best / grid) * grid
    around = forward[:, np.newaxis, :] + _FORWARD_STEPS * step[:3]
    pairs = np.broadcast_to(feedback[:, np.newaxis, :], (*around.shape[:2], 2))
    together = np.concatenate([around, pairs], axis=-1).reshape(-1, 5)
    return np.asarray(together[_in_range(together, rounded)])


def _in_range(words: FloatArray, rounded: Rounded) -> BoolArray:
    if rounded.number.kind != "fixed":
        return np.asarray(np.all(words.astype(np.float32).astype(np.float64) == words, axis=-1), dtype=np.bool_)
    forward = fits(words[:, :3], rounded.number.bits, 0, symmetric=False)
    back = fits(words[:, 3:], rounded.number.bits, 0, symmetric=True)
    return np.asarray(np.all(forward, axis=-1) & np.all(back, axis=-1), dtype=np.bool_)


def _keeps_zeros(words: FloatArray, rounded: Rounded, row: int, exact: FloatArray) -> BoolArray:
    """Candidates whose numerator keeps a zero at d.c., at half the rate, or on the unit circle exactly where it was."""
    values = np.ldexp(words, -rounded.fractions[row].astype(np.int32))
    b0, b1, b2 = values[:, 0], values[:, 1], values[:, 2]
    if rounded.structure == "delta":
        at_dc, mirror, at_half = b2, b2 - b1, 4.0 * b0 - 2.0 * b1 + b2
    else:
        at_dc, mirror, at_half = b0 + b1 + b2, b2 - b0, b0 - b1 + b2
    size = _TINY * np.max(np.abs(exact[:3]))
    keep = np.ones(len(words), dtype=np.bool_)
    for value, original in (
        (at_dc, exact[0] + exact[1] + exact[2]),
        (mirror, exact[2] - exact[0]),
        (at_half, exact[0] - exact[1] + exact[2]),
    ):
        if abs(original) <= size:
            keep &= value == 0.0
    return keep


def _weight(wanted: ComplexArray) -> FloatArray:
    """|wanted|, and below a floor the floor: an error in a notch's bottom counts as little as it is heard."""
    size = np.abs(wanted)
    return np.asarray(np.maximum(size, _FLOOR * np.max(size)))
