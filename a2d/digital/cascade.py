"""A cascade whose sections are fitted together: its error, and the numbers that move it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from a2d.analog.response import polynomial
from a2d.arrays import BoolArray, ComplexArray, FloatArray
from a2d.digital import warped
from a2d.digital.rational.lawson import State
from a2d.digital.rational.steps import NYQUIST_MARGIN

LONGEST_STEP = 1.0
"""The most that the logarithm of a coefficient moves in one step."""
B2, B1, B0, A2, A1, A0 = range(6)


@dataclass(frozen=True, eq=False)
class Cascade:
    """M tries at one cascade of S sections, as `lawson` and `polish` take them.

    A state's `b`, `a` [M, S, 3] are coefficients in v with the signs that they keep: every step multiplies them, so
    poles stay inside the circle and zeros on their side of it.

    Parameters
    ----------
    omega
        Shape [G], tan(w/2).
    target
        Shape [G], the analog response, complex.
    groups
        Shape [P, S, 6]: 1 where a number moves a coefficient (b2, b1, b0, a2, a1, a0 of each section), all of a group
        by one factor.
    weight
        Shape [G]: the factor on the error.
    weight_phase
        The factor on the phase error: 0 fits magnitude alone, 1 the modulus of the complex ln(twin/analog).
    """

    omega: FloatArray
    target: ComplexArray
    groups: FloatArray
    weight: FloatArray
    weight_phase: float = 0.0

    def error(self, state: State) -> FloatArray:
        """ln |twin/analog| and, when the phase counts, its angle times `weight_phase`; [M, parts, G]."""
        ratio = self.response(state) / self.target
        parts = [np.log(np.abs(ratio))]
        if self.weight_phase:
            parts.append(self.weight_phase * np.unwrap(np.angle(ratio), axis=-1))
        return np.stack(parts, axis=1) * self.weight

    def response(self, state: State) -> ComplexArray:
        """The cascade's response, [M, G]."""
        return np.asarray(np.prod(polynomial(state.b, self.omega) / polynomial(state.a, self.omega), axis=1))

    def slopes(self, state: State) -> tuple[FloatArray, object]:
        """d error over the logarithm of each group, [M, parts, G, P]: the terms' shares c·v^k/P(v)."""
        v = 1j * self.omega
        powers = np.stack([v * v, v, np.ones_like(v)])
        shares = [
            sign * c[..., np.newaxis] * powers / polynomial(c, self.omega)[..., np.newaxis, :]
            for c, sign in ((state.b, 1.0), (state.a, -1.0))
        ]
        parts = [self._by_group(np.concatenate([share.real for share in shares], axis=2))]
        if self.weight_phase:
            parts.append(self.weight_phase * self._by_group(np.concatenate([share.imag for share in shares], axis=2)))
        return np.stack(parts, axis=1) * self.weight[:, np.newaxis], None

    def _by_group(self, every: FloatArray) -> FloatArray:
        """The sum over each group's coefficients of `every` [M, S, 6, G]; shape [M, G, P]."""
        flat = every.reshape(len(every), -1, every.shape[-1])
        columns = [np.flatnonzero(group) for group in self.groups.reshape(len(self.groups), -1)]
        sums = flat[:, [c[0] for c in columns]]
        for row, c in enumerate(columns):
            for other in c[1:]:
                sums[:, row] += flat[:, other]
        return sums.transpose(0, 2, 1)

    def move(self, state: State, ways: object, step: FloatArray) -> State:
        """Every coefficient times the factor of its group; a denominator's v² term stays off z = -1."""
        del ways
        bounded = np.clip(step, -LONGEST_STEP, LONGEST_STEP)
        factors = np.exp(np.tensordot(bounded, self.groups, axes=1))
        b, a = state.b * factors[..., :3], state.a * factors[..., 3:]
        least = np.where(a[..., 0] > 0.0, NYQUIST_MARGIN * a[..., 1], 0.0)
        raised = np.where(
            a[..., 0] > 0.0, np.maximum(a[..., 0], least) / np.where(a[..., 0] > 0.0, a[..., 0], 1.0), 1.0
        )
        a = np.concatenate([a[..., :1] * raised[..., np.newaxis], a[..., 1:]], axis=-1)
        tied = self.groups[..., B2] * self.groups[..., A2]
        both = np.where(tied.any(axis=0), raised, 1.0)
        return State(np.concatenate([b[..., :1] * both[..., np.newaxis], b[..., 1:]], axis=-1), a)


def groups_of(allpass: BoolArray, b: FloatArray, a: FloatArray, weight_phase: float) -> FloatArray:
    """What may move in sections with numerator `b` and denominator `a` [S, 3] in v: shape [P, S, 6].

    Every coefficient that is not zero but the denominator's v term, which fixes the factor; a pair of zeros on the
    axis by one factor; an all-pass section's mirrored coefficients together, and only where the phase counts.
    """
    sections = len(b)
    found = []
    for s in range(sections):
        movable = _groups(bool(allpass[s]), b[s], a[s])
        for columns in movable[-1:] if allpass[s] and not weight_phase else movable:
            group = np.zeros((sections, 6))
            group[s, columns] = 1.0
            found.append(group)
    return np.array(found)


def _groups(allpass: bool, b: FloatArray, a: FloatArray) -> list[list[int]]:
    """The columns that move together in one section."""
    if allpass:
        ends = [[B2, A2], [B0, A0]] if a[0] != 0.0 else [[B0, A0]]
        return [*ends, [B2, B1, B0] if b[0] != 0.0 else [B1, B0]]
    poles = [[column] for column, value in zip((A2, A0), a[[0, 2]], strict=True) if value != 0.0 and a[1] != 0.0]
    if b[1] == 0.0 and b[0] != 0.0 and b[2] != 0.0:
        return [[B2, B0], *poles]
    return [[column] for column, value in zip((B2, B1, B0), b, strict=True) if value != 0.0] + poles


def in_v(sos: FloatArray) -> tuple[FloatArray, FloatArray, BoolArray]:
    """`sos` [S, 6] as numerators and denominators in v, the denominator's v term 1, and which are of first order."""
    first_order = (sos[:, 2] == 0.0) & (sos[:, 5] == 0.0)
    flat = first_order & (sos[:, 1] == 0.0) & (sos[:, 4] == 0.0)
    b, a = warped.from_z(sos[:, :3], first_order), warped.from_z(sos[:, 3:], first_order)
    b[flat], a[flat] = np.array([0.0, 0.0, 1.0]) * sos[flat, :1], np.array([0.0, 0.0, 1.0])
    size = np.where(a[:, 1] != 0.0, a[:, 1], 1.0)[:, np.newaxis]
    return _without_dust(b / size), _without_dust(a / size), first_order


def _without_dust(c: FloatArray) -> FloatArray:
    """Coefficients that z's rounding left where there was none set to zero."""
    return np.where(np.abs(c) < 1e-13 * np.abs(c).max(axis=-1, keepdims=True), 0.0, c)


def back_to_sos(state: State, row: int, first_order: BoolArray) -> FloatArray:
    """The `sos` [S, 6] of try `row` of a state."""
    return warped.to_sos(state.b[row], state.a[row], first_order)
