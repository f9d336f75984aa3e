"""Which poles and zeros share a section, chosen once for a whole sweep, and the sections of each position."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace

import numpy as np

from a2d.analog.network.roots import ZeroPole
from a2d.analog.placing import Placing, pairings
from a2d.analog.response import section_response
from a2d.analog.tracking import distances
from a2d.arrays import BoolArray, ComplexArray, FloatArray, IntArray

_SAME = 1e-9  # relative distance below which a pole and a zero cancel, as for a single network
_LEVEL_HZ = np.geomspace(2.0, 200e3, 41)  # where sections are levelled and the gain is taken
_NARROW = np.sin(0.25)  # of |root|: 0.27 dB, see `settled`
_MOST_ALONE = 6  # real poles that are paired in every way there is
_WIDTH = 0.05  # what the distance between a section's poles counts beside that of its zeros


@dataclass(frozen=True, eq=False)
class Roots:
    """Numbered roots of N positions: number k is the continuation of number k at the neighbouring positions.

    Attributes
    ----------
    zeros, poles
        Shape [N, n], rad/s, of equal length; infinite where a position has fewer.
    gain
        Shape [N]: of the finite products.
    reference_rad_s
        The middle of the poles, where roots are counted from.
    """

    zeros: ComplexArray
    poles: ComplexArray
    gain: FloatArray
    reference_rad_s: float

    def response(self, f_hz: FloatArray) -> ComplexArray:
        """H(j2πf) at [F] Hz, [N, F]."""
        rows = zip(self.zeros, self.poles, self.gain, strict=True)
        return np.array([ZeroPole(z[np.isfinite(z)], p[np.isfinite(p)], float(g)).response(f_hz) for z, p, g in rows])


@dataclass(frozen=True)
class Pattern:
    """The numbers of the poles and of the zeros of each section, one or two each."""

    poles: tuple[tuple[int, ...], ...]
    zeros: tuple[tuple[int, ...], ...]


def pattern_of(roots: Roots, first: int) -> Pattern:
    """The sections that serve all positions.

    Conjugates share a section wherever they are complex; real poles that never pair stand in twos, and zeros go to the
    nearest poles, by the sum over all positions, so that no section has more zeros than poles anywhere if that can be
    had. Sections run in the order of their poles at position `first`.
    """
    poles, zeros = _kept(roots)
    trials = [(groups, *_zero_groups(roots, groups, zeros)) for groups in _pole_groups(roots, poles, first)]
    costs = [cost + _WIDTH * _widths(roots, groups) for groups, _, cost in trials]
    groups, own, _ = trials[int(np.argmin(costs))]
    return Pattern(groups, own)


def _kept(roots: Roots) -> tuple[list[int], list[int]]:
    """The numbers of poles and zeros but for couples that cancel at every position."""
    poles, zeros = list(range(roots.poles.shape[1])), list(range(roots.zeros.shape[1]))
    for z in list(zeros):
        for p in list(poles):
            with np.errstate(invalid="ignore"):
                apart = np.abs(roots.zeros[:, z] - roots.poles[:, p]) > _SAME * np.abs(roots.poles[:, p])
            both = np.isfinite(roots.zeros[:, z]) & np.isfinite(roots.poles[:, p])
            if np.all(both & ~apart):
                poles.remove(p)
                zeros.remove(z)
                break
    return poles, zeros


def _partners(rows: ComplexArray) -> dict[int, int]:
    """Each number's conjugate partner; of two along the sweep, the one that it goes further off the axis with."""
    angles: dict[tuple[int, int], float] = {}
    for row in rows:
        for i, j in _couples(row):
            key = (min(i, j), max(i, j))
            angles[key] = max(angles.get(key, 0.0), abs(row[i].imag) / abs(row[i]))
    partner: dict[int, int] = {}
    for i, j in sorted(angles, key=lambda couple: -angles[couple]):
        if i not in partner and j not in partner:
            partner |= {i: j, j: i}
    return partner


def _pole_groups(roots: Roots, kept: Iterable[int], first: int) -> list[tuple[tuple[int, ...], ...]]:
    """The ways to share out the poles: couples as they are, the others in any twos while they are few."""
    partner = _partners(roots.poles)
    pairs = [(k, partner[k]) for k in kept if k in partner and k < partner[k]]
    size = np.where(np.isfinite(roots.poles[first]), np.abs(roots.poles[first]), np.inf)
    alone = sorted((k for k in kept if k not in partner), key=lambda k: float(size[k]))
    by_size = tuple(tuple(alone[i : i + 2]) for i in range(0, len(alone), 2))
    ways = pairings(alone) if len(alone) <= _MOST_ALONE else [by_size]
    return [tuple(sorted((*pairs, *w), key=lambda g: float(np.min(size[list(g)])))) or ((),) for w in ways]


def _widths(roots: Roots, groups: tuple[tuple[int, ...], ...]) -> float:
    """How far apart the poles of each section are, squared, averaged over the positions."""
    total = 0.0
    for group in groups:
        for row in roots.poles[:, list(group)] if len(group) == 2 else ():
            total += float(distances(row[:1], row[1:], roots.reference_rad_s)[0, 0]) ** 2
    return total / len(roots.gain)


def _zero_groups(
    roots: Roots, groups: tuple[tuple[int, ...], ...], kept: list[int]
) -> tuple[tuple[tuple[int, ...], ...], float]:
    """One place a pole; the zeros of each section, and what that costs."""
    owner = np.array([g for g, group in enumerate(groups) for _ in group], dtype=np.int64)
    partner = _partners(roots.zeros)
    couples = [(kept.index(k), kept.index(j)) for k, j in partner.items() if k < j and k in kept and j in kept]
    cost = _place_costs(roots, groups, kept)[:, owner]
    finite = np.isfinite(roots.zeros[:, kept])
    taken, total = Placing(cost, owner, couples, finite, _capacity(roots.poles, groups)).best()
    own: list[list[int]] = [[] for _ in groups]
    for row, place in enumerate(taken):
        own[int(owner[int(place)])].append(kept[row])
    return tuple(tuple(z) for z in own), total


def _capacity(poles: ComplexArray, groups: tuple[tuple[int, ...], ...]) -> IntArray:
    """How many finite poles each section has at each position, [N, sections]."""
    return np.stack([np.isfinite(poles[:, list(group)]).sum(axis=-1) for group in groups], axis=-1)


def _place_costs(roots: Roots, groups: tuple[tuple[int, ...], ...], kept: list[int]) -> FloatArray:
    """[zeros, groups]: squared distance to the nearest pole of the group, averaged over the positions."""
    cost = np.zeros((len(kept), len(groups)))
    for g, group in enumerate(groups):
        for zeros, poles in zip(roots.zeros[:, kept], roots.poles[:, list(group)], strict=True):
            if len(group) and len(kept):
                cost[:, g] += np.min(distances(zeros, poles, roots.reference_rad_s), axis=1) ** 2
    return cost / len(roots.gain)


def settled(roots: Roots, pattern: Pattern, *, exact: bool) -> tuple[Roots, BoolArray]:
    """The same with no conjugate couple in two sections, and where numbers had to be exchanged for that, [N].

    Roots that are the partners of one another at some positions and of others elsewhere have no order that is
    continuous everywhere. Two real roots that hardly notice each other become a couple where they cross, with a small
    angle φ between them and the real axis; without `exact` such a couple is replaced by two equal real roots of the
    same modulus, which changes |H| by 20·lg(cos φ) dB at most and keeps the order continuous. Couples of a larger
    angle, and all with `exact`, exchange numbers with others, which breaks the order at the edge of that region.
    """
    sides = [(roots.poles, pattern.poles), (roots.zeros, pattern.zeros)]
    (poles, zeros), reference = (rows.copy() for rows, _ in sides), roots.reference_rad_s
    moved = np.zeros(len(roots.gain), dtype=np.bool_)
    capacity = _capacity(poles, pattern.poles)
    for n in range(len(roots.gain)):
        both = [_Astride.of(rows[n], groups) for rows, groups in sides]
        held = np.bincount(both[1].owner[np.isfinite(zeros[n, both[1].kept])], minlength=len(pattern.poles))
        wide = any(exact or not side.narrow for side in both if side.couples)
        if wide or np.any(held > capacity[n]):
            poles[n, both[0].kept], zeros[n, both[1].kept] = _rearranged(both[0], both[1], reference)
            moved[n] = True
        else:
            poles[n], zeros[n] = (side.straightened(rows[n]) for side, (rows, _) in zip(both, sides, strict=True))
    return replace(roots, poles=poles, zeros=zeros), moved


@dataclass(frozen=True, eq=False)
class _Astride:
    """One position's poles or zeros, and the couples that stand in two sections.

    Attributes
    ----------
    kept, owner
        Shape [n]: the numbers in the sections' order, and the section of each.
    row
        Shape [n]: the roots in that order.
    couples
        Places of the couples astride.
    """

    kept: IntArray
    owner: IntArray
    row: ComplexArray
    couples: list[tuple[int, int]]

    @classmethod
    def of(cls, row: ComplexArray, groups: tuple[tuple[int, ...], ...]) -> _Astride:
        kept = np.array([k for group in groups for k in group], dtype=np.int64)
        owner = np.array([g for g, group in enumerate(groups) for _ in group], dtype=np.int64)
        return cls(kept, owner, row[kept], [(i, j) for i, j in _couples(row[kept]) if owner[i] != owner[j]])

    @property
    def narrow(self) -> bool:
        """Whether all of them lie so near to the axis that two real roots may stand for them."""
        return all(abs(self.row[i].imag) <= _NARROW * abs(self.row[i]) for i, _ in self.couples)

    def straightened(self, row: ComplexArray) -> ComplexArray:
        """The whole position's roots with such couples replaced by two real ones of the same modulus."""
        out = row.copy()
        for i, j in self.couples:
            out[self.kept[[i, j]]] = np.copysign(abs(self.row[i]), self.row[i].real)
        return out


def _rearranged(poles: _Astride, zeros: _Astride, reference_rad_s: float) -> tuple[ComplexArray, ComplexArray]:
    """Poles and zeros of one position on the places that cost least: no couple apart, no section improper."""
    count = int(poles.owner.max(initial=0)) + 1
    pole_cost, zero_cost = (distances(side.row, side.row, reference_rad_s) for side in (poles, zeros))
    finite_poles, finite_zeros = (np.isfinite(side.row) for side in (poles, zeros))
    everywhere = np.full((1, count), len(poles.row))
    ways = Placing(pole_cost, poles.owner, _couples(poles.row), finite_poles[np.newaxis], everywhere).distinct()
    best: tuple[float, ComplexArray, ComplexArray] | None = None
    for places, cost in ways:
        capacity = np.bincount(poles.owner[places[finite_poles]], minlength=count)[np.newaxis]
        placing = Placing(zero_cost, zeros.owner, _couples(zeros.row), finite_zeros[np.newaxis], capacity)
        own, total = placing.best(np.arange(len(zeros.row)))
        if best is None or cost + total < best[0]:
            new_poles, new_zeros = poles.row.copy(), zeros.row.copy()
            new_poles[places], new_zeros[own] = poles.row, zeros.row
            best = (cost + total, new_poles, new_zeros)
    assert best is not None  # the order as it stands is one of the ways
    return best[1], best[2]


def _couples(row: ComplexArray) -> list[tuple[int, int]]:
    """The places of each conjugate couple."""
    upper = np.flatnonzero(np.isfinite(row) & (row.imag > 0.0))
    return [(int(i), int(np.argmin(np.abs(row - np.conj(row[i]))))) for i in upper]


def sections_from(roots: Roots, pattern: Pattern, exact: Roots) -> tuple[FloatArray, FloatArray, FloatArray]:
    """b, a [N, S, 3] (coefficients of s², s, 1) of each position, continuous where the roots are, and their error.

    The error is the largest difference from `exact` over its largest response, [N].

    Each root's factor is (|r| - e^{-jφ}·s)/sqrt(|r|² + w²), which stays finite at zero and infinity. Sections after the
    first have a mean square response of 1, and the first has the gain that the whole needs to be
    `exact`.
    """
    a = np.stack([_product(roots.poles[:, list(g)], roots.reference_rad_s) for g in pattern.poles], axis=1)
    b = np.stack([_product(roots.zeros[:, list(g)], roots.reference_rad_s) for g in pattern.zeros], axis=1)
    h = section_response(b, a, _LEVEL_HZ)
    level = np.sqrt(np.mean(np.abs(h) ** 2, axis=-1))
    b /= level[..., np.newaxis]
    product = np.prod(h / level[..., np.newaxis], axis=1)
    wanted = exact.response(_LEVEL_HZ)
    gain = np.sum((np.conj(product) * wanted).real, axis=-1) / np.sum(np.abs(product) ** 2, axis=-1)
    b[:, 0] *= gain[:, np.newaxis]
    off = np.abs(product * gain[:, np.newaxis] - wanted).max(axis=-1) / np.abs(wanted).max(axis=-1)
    return b, a, off


def _product(roots: ComplexArray, reference_rad_s: float) -> FloatArray:
    """The factors' product, [N, 3]; `roots` [N, 0 to 2]."""
    finite = np.isfinite(roots)
    safe = np.where(finite, roots, 1.0)
    size = np.abs(safe)
    norm = np.hypot(size, reference_rad_s)
    constant = np.where(finite, size / norm, 1.0).astype(np.complex128)
    slope = np.where(finite, np.exp(-1j * np.where(size == 0.0, np.pi, np.angle(safe))) / norm, 0.0)
    out = np.zeros((len(roots), 3), dtype=np.complex128)
    out[:, 2] = 1.0
    for k in range(roots.shape[1]):
        shifted = np.concatenate([out[:, 1:], np.zeros((len(roots), 1))], axis=1)
        out = out * constant[:, k, np.newaxis] - shifted * slope[:, k, np.newaxis]
    return np.asarray(out.real)
