"""Poles and zeros found from a circuit to real second-order sections, close ones together.

`a2d.analog.roots` does the same for roots that a design gives; here real poles may lie nine decades apart (an op-amp's
beside a coupling capacitor's), so that not every two of them can share a section that is matched at one frequency.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field, replace

import numpy as np

from a2d.analog.network.roots import ZeroPole
from a2d.analog.response import section_response
from a2d.arrays import ComplexArray, FloatArray

_SAME = 1e-9  # of a pole's distance from the axis: a zero closer to it than this changes no response by more
_REAL = 2e-8  # of |root|: an imaginary part below this is a double root's rounding error
_APART = 100.0  # real poles further apart than this make two sections, each matched at its own frequency
_GRID_HZ = np.geomspace(0.1, 1e6, 71)
_AUDIO_HZ = np.geomspace(20.0, 20e3, 61)
_LEAST_RAD_S = 1e-3  # stands for a root at zero where distances are counted in octaves


def cancelled(roots: ZeroPole) -> tuple[ZeroPole, ComplexArray]:
    """H(s) without the pairs of a pole and a zero at one place, and those poles (rad/s)."""
    poles, zeros, gone = list(_parted(roots.poles)), [], []
    for zero in _parted(roots.zeros):
        distance = np.abs(np.array(poles) - zero)
        nearest = int(np.argmin(distance)) if poles else 0
        if poles and distance[nearest] <= _SAME * abs(poles[nearest].real):
            gone.append(poles.pop(nearest))
        else:
            zeros.append(zero)
    return replace(roots, poles=np.array(poles, dtype=complex), zeros=np.array(zeros, dtype=complex)), np.array(gone)


def cancellations(gone: ComplexArray) -> tuple[str, ...]:
    """What `cancelled` removed, in words."""
    return tuple(
        f"a pole and a zero cancel at {abs(pole) / (2.0 * np.pi):.5g} Hz{' (a pair)' if pole.imag else ''}"
        for pole in gone
        if pole.imag >= 0.0
    )


def _parted(roots: ComplexArray) -> ComplexArray:
    """The roots with every pair that is complex by rounding alone made a real double root, of the same product.

    A double root comes out as a pair some 1e-8 apart; the sum of the pair changes by the square of that.
    """
    barely = (roots.imag != 0.0) & (np.abs(roots.imag) < _REAL * np.abs(roots))
    return np.where(barely, np.sign(roots.real) * np.abs(roots), roots).astype(np.complex128)


@dataclass
class _Block:
    """A section in the making: one or two poles, and the zeros it was given."""

    poles: list[complex]
    zeros: list[complex] = field(default_factory=list)

    @property
    def room(self) -> int:
        return len(self.poles) - len(self.zeros)

    def distance(self, zero: complex) -> float:
        """In nepers (and radians) from the zero to the nearest pole."""
        there = np.array(self.poles)
        size = np.log(np.abs(there) / max(abs(zero), _LEAST_RAD_S))
        turn = np.angle(there * np.conj(zero)) if zero.imag else 0.0
        return float(np.min(np.hypot(size, turn)))


def second_order_sections(roots: ZeroPole) -> tuple[FloatArray, FloatArray]:
    """b, a [S, 3] (coefficients of s², s, 1) of sections whose product is H(s), by rising frequency.

    Conjugates share a section, and so do neighbouring real poles up to a factor of 100 apart; zeros go to the nearest
    pole that has room. Each section has a level of about 1 but for the first, which has the gain that remains.
    """
    pairs = [[p, p.conjugate()] for p in roots.poles if p.imag > 0.0]
    zero_pairs = [z for z in roots.zeros if z.imag > 0.0]
    reals = sorted((p for p in roots.poles if p.imag == 0.0), key=abs)
    blocks = [_Block(list(p)) for p in pairs] + _real_blocks(reals, len(zero_pairs) - len(pairs))
    blocks = blocks or [_Block([])]
    _hand_out(blocks, zero_pairs, 2)
    _hand_out(blocks, [z for z in roots.zeros if z.imag == 0.0], 1)
    blocks.sort(key=lambda block: float(np.prod(np.abs(block.poles))) ** (1.0 / max(len(block.poles), 1)))
    b = np.array([_polynomial(block.zeros) for block in blocks])
    a = np.array([_polynomial(block.poles) for block in blocks])
    return _levelled(b, a, roots), a


def _real_blocks(reals: Sequence[complex], doubles_needed: int) -> list[_Block]:
    """Real poles, smallest first, in ones and twos; at least `doubles_needed` twos, for pairs of zeros."""
    blocks: list[_Block] = []
    rest = list(reals)
    while rest:
        close = len(rest) > 1 and (abs(rest[1]) <= _APART * abs(rest[0]) or len(rest) < 2 * doubles_needed + 2)
        take = 2 if close else 1
        blocks.append(_Block(rest[:take]))
        rest, doubles_needed = rest[take:], doubles_needed - (take == 2)
    return blocks


def _hand_out(blocks: list[_Block], zeros: Sequence[complex], size: int) -> None:
    """Give each zero (`size` 2: with its conjugate) to the nearest block with room, the closest couple first."""
    couples = sorted((block.distance(z), i, k) for i, z in enumerate(zeros) for k, block in enumerate(blocks))
    left = set(range(len(zeros)))
    for _, i, k in couples:
        if i in left and blocks[k].room >= size:
            blocks[k].zeros += [zeros[i], zeros[i].conjugate()][:size]
            left.remove(i)


def _polynomial(roots: Sequence[complex]) -> FloatArray:
    """Π(1 - s/root), with s for a root at zero: coefficients of s², s, 1."""
    c = np.ones(1, dtype=complex)
    for root in roots:
        c = np.convolve(c, [-1.0 / root, 1.0] if root else [1.0, 0.0])
    return np.concatenate([np.zeros(3 - len(c)), c.real])


def _levelled(b: FloatArray, a: FloatArray, roots: ZeroPole) -> FloatArray:
    """The numerators scaled to a level of 1 (`_level`), the first with what the product then lacks."""
    scaled = b / _level(b, a)[:, np.newaxis]
    product = np.prod(section_response(scaled, a, _GRID_HZ), axis=0)
    largest = int(np.argmax(np.abs(product)))
    missing = roots.response(_GRID_HZ[largest : largest + 1])[0] / product[largest]
    scaled[0] *= missing.real
    return np.asarray(scaled)


def _level(b: FloatArray, a: FloatArray) -> FloatArray:
    """Of a bell or shelf, the geometric mean of the gains at 0 Hz and far above; else the peak in the audio band."""
    peak = np.abs(section_response(b, a, _AUDIO_HZ)).max(axis=-1)
    top = np.where(a[:, 0] != 0.0, 0, np.where(a[:, 1] != 0.0, 1, 2))[:, np.newaxis]
    high = np.abs(np.take_along_axis(b, top, -1) / np.take_along_axis(a, top, -1))[:, 0]
    low = np.abs(b[:, 2] / a[:, 2])
    flat = (np.minimum(low, high) > 0.01 * np.maximum(low, high)) & (low > 0.0)
    return np.asarray(np.where(flat, np.sqrt(low * high), peak))
