"""Rounding together: the five words of a section chosen among their neighbours for the smallest level error.

For every feedback pair within `REACH` steps of the nearest one, the best real numerator is the solution of a linear
least-squares problem (the numerator is linear in its coefficients); its neighbours are then the candidates. A zero at
d.c., at half the rate or on the unit circle is kept exactly: the numerator moves only in directions that keep it. The
result is never worse than the nearest rounding, but where that one has lost such a zero: keeping it may cost 0.001 dB.
"""

from __future__ import annotations

import itertools
from dataclasses import replace

import numpy as np

from a2d.arrays import BoolArray, ComplexArray, FloatArray
from a2d.digital.response import section_response, unit_delay_complement
from a2d.wordlength.deviation import FLOOR, angular_grid
from a2d.wordlength.rounding import Rounded, fits
from a2d.wordlength.stability import is_stable

REACH = 2
_FEEDBACK_STEPS = np.array(list(itertools.product(range(-REACH, REACH + 1), repeat=2)), dtype=np.float64)
_PROMISING = 6  # feedback pairs whose numerator's neighbours are tried
_POINTS = 40  # even points of the grid, to which those around each pole and zero are added
_GOOD_ENOUGH = 2e-6  # nepers, 1.7e-5 dB: a section that is off by less is left alone
_FOR_A_ZERO = 1e-4  # nepers, 0.001 dB: what a zero kept exactly at d.c. or half the rate may cost elsewhere
_TIE = 1e-3
_TINY = 1e-9  # a numerator's sum below this part of its largest value means a zero at d.c. (or half the rate)
# by (zero at d.c., zeros on the circle, zero at half the rate): the directions in b0, b1, b2 that keep them
_DIRECTIONS = {
    (True, True, False): [[1, -2, 1]],
    (False, True, True): [[1, 2, 1]],
    (True, False, True): [[1, 0, -1]],
    (True, False, False): [[1, -1, 0], [0, 1, -1]],
    (False, False, True): [[1, 1, 0], [0, 1, 1]],
    (False, True, False): [[1, 0, 1], [0, 1, 0]],
}


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
    words = np.stack([_best_row(rounded, row, sos[row], rate_hz, band_hz) for row in range(len(sos))])
    return replace(rounded, words=words)


def _best_row(
    rounded: Rounded, row: int, exact: FloatArray, rate_hz: float, band_hz: tuple[float, float]
) -> FloatArray:
    nearest = rounded.words[row]
    f = angular_grid(exact[np.newaxis], rate_hz, band_hz, _POINTS)
    wanted = section_response(exact, f, rate_hz) * 2.0 ** float(rounded.moved[row])
    basis = _basis(f, rate_hz, rounded.structure)
    at_nearest = _errors(nearest[np.newaxis], rounded, row, wanted, basis)[0]
    moves = _moves(rounded, row, exact)
    kept = _keeps_zeros(nearest[:3], moves)
    if kept and at_nearest < _GOOD_ENOUGH:
        return np.asarray(nearest)
    candidates = _candidates(rounded, row, moves, wanted, basis)
    if len(candidates) == 0:
        return np.asarray(nearest)
    error = _errors(candidates, rounded, row, wanted, basis)
    best = int(np.argmin(error))
    allowed = at_nearest if kept else max(2.0 * at_nearest, _FOR_A_ZERO)
    return np.asarray(candidates[best] if error[best] < allowed else nearest)


def _keeps_zeros(forward: FloatArray, moves: FloatArray) -> bool:
    """Whether a numerator [3] is made of whole numbers of moves [M, 3], and so has its zeros exactly."""
    if len(moves) == 0:
        return bool(np.all(forward == 0.0))
    count = np.rint(np.linalg.lstsq(moves.T, forward, rcond=None)[0])
    return bool(np.all(count @ moves == forward))


def _errors(words: FloatArray, rounded: Rounded, row: int, wanted: ComplexArray, basis: ComplexArray) -> FloatArray:
    """The largest level error over the grid in nepers, words [N, 5] -> [N]; infinite where unstable.

    The vector error decides between equals.
    """
    values = np.ldexp(words, -rounded.fractions[row].astype(np.int32))
    with np.errstate(divide="ignore", invalid="ignore"):
        response = (values[:, :3] @ basis) / (basis[0] + values[:, 3:] @ basis[1:])
        floor = FLOOR * np.max(np.abs(wanted))
        size = np.maximum(np.abs(wanted), floor)
        level = np.abs(np.log(np.maximum(np.abs(response), floor) / size))
        error = np.max(level + _TIE * np.abs(response - wanted) / size, axis=-1)
    stable = is_stable(values, rounded.structure)
    return np.where(stable, np.nan_to_num(error, nan=np.inf), np.inf)


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


def _candidates(rounded: Rounded, row: int, moves: FloatArray, wanted: ComplexArray, basis: ComplexArray) -> FloatArray:
    """Words [N, 5]: the most promising feedback pairs, each with the neighbours of its best numerator."""
    step, unit = _step(rounded, row), np.ldexp(1.0, -rounded.fractions[row].astype(np.int32))
    pairs_around = rounded.words[row, 3:] + _FEEDBACK_STEPS * step[3:]
    feedback = np.array(sorted(set(map(tuple, pairs_around.tolist()))))
    denominator = basis[0] + (feedback * unit[3:]) @ basis[1:]
    best = _best_numerators(moves * unit[:3], denominator, wanted, basis)
    centres = np.concatenate([best @ moves, feedback], axis=-1)
    promising = np.argsort(_errors(centres, rounded, row, wanted, basis), kind="stable")[:_PROMISING]
    around = np.array(list(itertools.product((-1.0, 0.0, 1.0), repeat=len(moves))))
    forward = (best[promising, np.newaxis] + around) @ moves
    pairs = np.broadcast_to(feedback[promising, np.newaxis], (*forward.shape[:2], 2))
    together = np.concatenate([forward, pairs], axis=-1).reshape(-1, 5)
    return np.asarray(together[_in_range(together, rounded)])


def _moves(rounded: Rounded, row: int, exact: FloatArray) -> FloatArray:
    """Steps of the numerator's words that keep its zeros where they are, shape [M, 3]."""
    step = _step(rounded, row)[:3]
    directions = _directions(rounded, row, exact)
    if directions is None or np.any((np.abs(directions).sum(axis=0) > 0) & (step == 0.0)):
        directions = np.eye(3)[step > 0.0]
    widest = np.divide(step, np.abs(directions), out=np.zeros_like(directions), where=directions != 0.0)
    return np.asarray(directions * np.max(widest, axis=-1, initial=0.0, keepdims=True))


def _directions(rounded: Rounded, row: int, exact: FloatArray) -> FloatArray | None:
    b0, b1, b2 = exact[:3]
    size = _TINY * np.max(np.abs(exact[:3]))
    at_dc, on_circle, at_half = (bool(abs(v) <= size) for v in (b0 + b1 + b2, b2 - b0, b0 - b1 + b2))
    if rounded.structure == "delta":
        return _difference_directions(rounded.words[row, :3], on_circle, at_half)
    if at_dc != at_half and b2 == 0.0:
        return np.array([[1.0, -1.0 if at_dc else 1.0, 0.0]])
    found = _DIRECTIONS.get((at_dc, on_circle, at_half))
    return None if found is None else np.array(found, dtype=np.float64)


def _difference_directions(words: FloatArray, on_circle: bool, at_half: bool) -> FloatArray | None:
    """The same in the difference form, whose numerator is b0, 2·b0 + b1, b0 + b1 + b2.

    A zero at d.c. is a last word of zero, zeros on the circle make the last two equal, and with a zero at half the
    rate as well all three are one number times 1, 4, 4. A first-order zero at d.c. makes the first two equal.
    """
    if words[2] == 0.0 and words[0] == words[1]:
        return np.array([[1.0, 1.0, 0.0]])
    if not on_circle or words[1] == 0.0 or words[1] != words[2]:
        return None
    if at_half and words[1] in (words[0], 4.0 * words[0]):
        return np.array([words / words[0]])
    return np.array([[1.0, 0.0, 0.0], [0.0, 1.0, 1.0]])


def _best_numerators(
    columns: FloatArray, denominator: ComplexArray, wanted: ComplexArray, basis: ComplexArray
) -> FloatArray:
    """Whole numbers of moves nearest to the best real ones for each denominator [N, F]; shape [N, M].

    Minimises Σ|(Σ m_j·columns_j)·basis/denominator - wanted|²/|wanted|² over real m.
    """
    weight = np.maximum(np.abs(wanted), FLOOR * np.max(np.abs(wanted)))
    with np.errstate(divide="ignore", invalid="ignore"):
        matrix = (columns @ basis)[np.newaxis] / (denominator * weight)[:, np.newaxis]
    target = wanted / weight
    real = np.concatenate([matrix.real, matrix.imag], axis=-1)
    goal = np.concatenate([target.real, target.imag])
    best = np.zeros(real.shape[:2])
    for index, rows in enumerate(real):
        if np.all(np.isfinite(rows)):
            size = np.maximum(np.max(np.abs(rows), axis=-1, keepdims=True), 1e-300)
            best[index] = np.linalg.lstsq((rows / size).T, goal, rcond=None)[0] / size[:, 0]
    return np.rint(best)


def _in_range(words: FloatArray, rounded: Rounded) -> BoolArray:
    if rounded.number.kind != "fixed":
        return np.asarray(np.all(words.astype(np.float32).astype(np.float64) == words, axis=-1), dtype=np.bool_)
    forward = fits(words[:, :3], rounded.number.bits, 0, symmetric=False)
    back = fits(words[:, 3:], rounded.number.bits, 0, symmetric=True)
    return np.asarray(np.all(forward, axis=-1) & np.all(back, axis=-1), dtype=np.bool_)
