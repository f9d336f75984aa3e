"""Which poles and zeros share a section, chosen once for a whole sweep, and the sections of each position."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace

import numpy as np

from a2d.analog.network.roots import ZeroPole
from a2d.analog.response import section_response
from a2d.analog.tracking import distances, exchanged
from a2d.arrays import BoolArray, ComplexArray, FloatArray, IntArray
from a2d.errors import ParameterError

_SAME = 1e-9  # relative distance below which a pole and a zero cancel, as for a single network
_LEVEL_HZ = np.geomspace(2.0, 200e3, 41)  # where sections are levelled and the gain is taken
_NARROW = np.sin(0.15)  # of |root|: 0.1 dB, see `settled`
_NEVER = 1e6  # the cost of what must not be, far above any squared distance


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

    Conjugates share a section wherever they are complex; real poles that never pair stand in twos in the order of
    their size at position `first`; zeros go to the nearest poles, by the sum over all positions, and never to a
    section that has fewer poles at some position.

    Raises
    ------
    ParameterError
        No arrangement has as many poles as zeros in each section at every position.
    """
    kept = _kept(roots)
    groups = _pole_groups(roots, kept[0], first)
    zeros = _zero_groups(roots, groups, kept[1])
    return Pattern(groups, zeros)


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


def _pole_groups(roots: Roots, kept: Iterable[int], first: int) -> tuple[tuple[int, ...], ...]:
    partner = _partners(roots.poles)
    pairs = [(k, partner[k]) for k in kept if k in partner and k < partner[k]]
    size = np.where(np.isfinite(roots.poles[first]), np.abs(roots.poles[first]), np.inf)
    alone = sorted((k for k in kept if k not in partner), key=lambda k: float(size[k]))
    groups = pairs + [tuple(alone[i : i + 2]) for i in range(0, len(alone), 2)]
    return tuple(sorted(groups, key=lambda g: float(np.min(size[list(g)])))) or ((),)


def _zero_groups(roots: Roots, groups: tuple[tuple[int, ...], ...], kept: list[int]) -> tuple[tuple[int, ...], ...]:
    """One place a pole; zeros that pair are kept on places of one section, by exchanging until nothing is gained."""
    owner = [g for g, group in enumerate(groups) for _ in group]
    n = len(owner)
    cost = _place_costs(roots, groups, kept)[:, owner]
    partner = _partners(roots.zeros)
    couples = [(kept.index(k), kept.index(j)) for k, j in partner.items() if k < j and k in kept and j in kept]
    taken = exchanged(cost) if n else np.zeros(0, dtype=np.int64)
    taken = _with_couples(cost, taken, couples, np.array(owner, dtype=np.int64))
    if n and float(cost[np.arange(n), taken].max()) >= _NEVER:
        raise ParameterError(
            "no order of sections has as many poles as zeros in each at every position (split the control into two)"
        )
    own: list[list[int]] = [[] for _ in groups]
    for row, place in enumerate(taken):
        own[owner[int(place)]].append(kept[row])
    return tuple(tuple(z) for z in own)


def _place_costs(roots: Roots, groups: tuple[tuple[int, ...], ...], kept: list[int]) -> FloatArray:
    """[zeros, groups]: squared distance to the nearest pole of the group, averaged over the positions."""
    cost = np.zeros((len(kept), len(groups)))
    for g, group in enumerate(groups):
        for zeros, poles in zip(roots.zeros[:, kept], roots.poles[:, list(group)], strict=True):
            if len(group) and len(kept):
                cost[:, g] += np.min(distances(zeros, poles, roots.reference_rad_s), axis=1) ** 2
        finite_poles = np.isfinite(roots.poles[:, list(group)]).sum(axis=1)
        never = np.isfinite(roots.zeros[:, kept]) & (finite_poles == 0)[:, np.newaxis]
        cost[:, g] = cost[:, g] / len(roots.gain) + np.where(never.any(axis=0), 2.0 * _NEVER, 0.0)
    return cost


def _with_couples(cost: FloatArray, taken: IntArray, couples: list[tuple[int, int]], owner: IntArray) -> IntArray:
    """Exchange places until each couple of zeros stands in one section."""
    rows = np.arange(len(taken))

    def total(places: IntArray) -> float:
        apart = sum(owner[places[i]] != owner[places[j]] for i, j in couples)
        return float(cost[rows, places].sum() + 1e3 * apart)

    best = total(taken)
    for _ in range(len(taken) ** 2 if couples else 0):
        trials = [_swapped(taken, i, j) for i in range(len(taken)) for j in range(i)]
        found = min(trials, key=total)
        if total(found) >= best - 1e-9:
            break
        taken, best = found, total(found)
    return taken


def _swapped(places: IntArray, i: int, j: int) -> IntArray:
    changed = places.copy()
    changed[i], changed[j] = places[j], places[i]
    return changed


def settled(roots: Roots, pattern: Pattern, *, exact: bool) -> tuple[Roots, BoolArray]:
    """The same with no conjugate couple in two sections, and where numbers had to be exchanged for that, [N].

    Roots that are the partners of one another at some positions and of others elsewhere have no order that is
    continuous everywhere. Two real roots that hardly notice each other become a couple where they cross, with a small
    angle φ between them and the real axis; without `exact` such a couple is replaced by two equal real roots of the
    same modulus, which changes |H| by 20·lg(cos φ) dB at most and keeps the order continuous. Couples of a larger
    angle, and all with `exact`, exchange numbers with others, which breaks the order at the edge of that region.
    """
    poles, moved_poles = _settled(roots.poles, pattern.poles, roots.reference_rad_s, exact)
    zeros, moved_zeros = _settled(roots.zeros, pattern.zeros, roots.reference_rad_s, exact)
    return replace(roots, poles=poles, zeros=zeros), moved_poles | moved_zeros


def _settled(
    rows: ComplexArray, groups: tuple[tuple[int, ...], ...], reference_rad_s: float, exact: bool
) -> tuple[ComplexArray, BoolArray]:
    kept = np.array([k for group in groups for k in group], dtype=np.int64)
    owner = np.array([g for g, group in enumerate(groups) for _ in group], dtype=np.int64)
    out, moved = rows.copy(), np.zeros(len(rows), dtype=np.bool_)
    for n, row in enumerate(rows[:, kept]):
        astride = [(i, j) for i, j in _couples(row) if owner[i] != owner[j]]
        narrow = [] if exact else [c for c in astride if abs(row[c[0]].imag) <= _NARROW * abs(row[c[0]])]
        if len(narrow) < len(astride):
            cost = distances(row, row, reference_rad_s)
            out[n, kept[_with_couples(cost, np.arange(len(kept)), _couples(row), owner)]] = row
            moved[n] = True
        else:
            for i, j in narrow:
                out[n, kept[[i, j]]] = np.copysign(abs(row[i]), row[i].real)
    return out, moved


def _couples(row: ComplexArray) -> list[tuple[int, int]]:
    """The places of each conjugate couple."""
    upper = np.flatnonzero(np.isfinite(row) & (row.imag > 0.0))
    return [(int(i), int(np.argmin(np.abs(row - np.conj(row[i]))))) for i in upper]


def sections_from(roots: Roots, pattern: Pattern, exact: Roots) -> tuple[FloatArray, FloatArray]:
    """b, a [N, S, 3] (coefficients of s², s, 1) of each position; they are continuous where the roots are.

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
    return b, a


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
