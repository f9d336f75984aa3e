"""The analog sections at every position of a group of controls, in one order and with one pairing."""

from __future__ import annotations

import itertools
from collections.abc import Callable, Iterable
from dataclasses import dataclass, replace
from functools import partial
from typing import Any

import numpy as np

from a2d.analog.axis import Axis, Group
from a2d.analog.bank import sum_roots
from a2d.analog.build import bank_of, build_section
from a2d.analog.hardware import network_of
from a2d.analog.network.parts import lay_out
from a2d.analog.network.roots import ZeroPole, zero_pole
from a2d.analog.pattern import Pattern, Roots, pattern_of, sections_from, settled
from a2d.analog.sections import Sections, natural_frequency_hz
from a2d.analog.tracking import between, continued, numbered, padded
from a2d.arrays import ComplexArray, FloatArray, IntArray
from a2d.design.hardware import BankSection, CircuitSection, NetworkSection
from a2d.design.model import Design
from a2d.design.section import Section
from a2d.errors import A2dError, ParameterError

_DAMPED = 1e-9  # of |pole|: less damping than this is none
_HIGHEST_MATCH_HZ = 1e6
_EXACT = 1e-8  # of the largest response, as for a network by itself
_LATTICE = {0: 1, 1: 25, 2: 13}  # lattice positions of an axis by the number of axes; 5 beyond


def _network_roots(section: NetworkSection | CircuitSection) -> ZeroPole:
    layout = lay_out(network_of(section))
    return zero_pole(layout.pencil(np.array(layout.nominal)))


# Sections whose roots come and go along a sweep: from the design's section to all poles and zeros, those that cancel
# at this position included. Every other sort has the same sections at every position.
ROOTS: dict[type[Section], Callable[[Any], ZeroPole]] = {
    NetworkSection: _network_roots,
    CircuitSection: _network_roots,
    BankSection: lambda section: sum_roots(bank_of(section)),
}


@dataclass(frozen=True, eq=False)
class Tracked:
    """Numbered roots of an entry on a coarse lattice of positions, for those in between to be numbered alike.

    Attributes
    ----------
    axes
        The controls with the lattice's positions.
    roots, pattern
        Of N lattice points and the design's own setting after them, and the sections made of them.
    f0_hz
        Shape [S]: where the sections are matched, the same along the whole sweep.
    """

    axes: tuple[Axis, ...]
    roots: Roots
    pattern: Pattern
    f0_hz: FloatArray

    def roots_at(self, built: list[Section], scales: FloatArray) -> Roots:
        """Numbered roots of `built`, which stand at `scales` [N, K]."""
        shape = tuple(len(axis.knots) for axis in self.axes)
        rows = [_roots_of(section) for section in built]
        n, reference = self.roots.poles.shape[1], self.roots.reference_rad_s
        zeros: list[ComplexArray] = []
        poles: list[ComplexArray] = []
        for row, scale in zip(rows, scales, strict=True):
            corners, weights = _corners(self.axes, shape, scale)
            for known, found, out in ((self.roots.zeros, row.zeros, zeros), (self.roots.poles, row.poles, poles)):
                out.append(numbered(between(known[corners], weights), padded(found, n), reference))
        return Roots(np.array(zeros), np.array(poles), np.array([row.gain for row in rows]), reference)

    def sections(self, roots: Roots, *, exact: bool) -> Sections:
        """Sections [N, S, 3] of numbered roots; those of the table are not `exact` where roots cross (`settled`)."""
        b, a, off = sections_from(settled(roots, self.pattern, exact=exact)[0], self.pattern, roots)
        if exact and np.any(off > _EXACT):
            raise ParameterError(
                f"the sections of a position do not agree with the circuit ({float(off.max()):.1e}, allowed "
                f"{_EXACT:g}): no arrangement in second-order sections was found; split the network"
            )
        return Sections(b, a, np.broadcast_to(self.f0_hz, b.shape[:-1]))


@dataclass(frozen=True, eq=False)
class EntrySweep:
    """One `[[section]]` entry along the axes that move it.

    Attributes
    ----------
    design, group, entry
        Whose sweep it is.
    sections
        Shape [P1, ..., PK, S, 3], with 1 in place of an axis that does not move the entry.
    exact
        The same where the table's own are an approximation (see `pattern.settled`); for comparisons.
    now
        The same at the design's own setting, [S, 3].
    tracked
        None for an entry whose sections need no following.
    exchanged
        At how many positions the order of sections could not be kept continuous.
    """

    design: Design
    group: Group
    entry: int
    sections: Sections
    exact: Sections
    now: Sections
    tracked: Tracked | None = None
    exchanged: int = 0

    def at(self, scales: FloatArray) -> Sections:
        """The exact sections with the controls at `scales` [N, K], between the positions too: [N, S, 3]."""
        built = [self.group.section_at(self.design, self.entry, row) for row in scales]
        if self.tracked is None:
            return _stacked(build_section(section) for section in built)
        return self.tracked.sections(self.tracked.roots_at(built, scales), exact=True)


def sweep_entry(design: Design, group: Group, entry: int) -> EntrySweep:
    """One entry at all positions of a group.

    Raises
    ------
    ParameterError
        A position cannot be built, and which.
    """
    moving = group.moving(entry)
    knots = [axis.knots if moves else axis.knots[:1] for axis, moves in zip(group.axes, moving, strict=True)]
    shape = tuple(len(k) for k in knots)
    scales = np.array(list(itertools.product(*knots)))
    built = [_placed(group, s, partial(group.section_at, design, entry, s)) for s in scales]
    if not _is_tracked(design.sections[entry]):
        rows = _stacked(_placed(group, s, partial(build_section, b)) for s, b in zip(scales, built, strict=True))
        now = build_section(design.sections[entry])
        if rows.b.shape[1:] != now.b.shape:
            raise ParameterError(f"{group.name}: the number of sections changes along the travel")
        return EntrySweep(design, group, entry, _shaped(rows, shape), _shaped(rows, shape), now)
    tracked = _track(design, group, entry)
    roots = tracked.roots_at(built, scales)
    own, exact = (_shaped(tracked.sections(roots, exact=e), shape) for e in (False, True))
    now = Sections(*(part[-1] for part in tracked.sections(tracked.roots, exact=True)))
    exchanged = int(settled(roots, tracked.pattern, exact=False)[1].sum())
    return EntrySweep(design, group, entry, own, exact, now, tracked, exchanged)


def _is_tracked(section: Section) -> bool:
    return any(isinstance(section, kind) for kind in ROOTS)


def _roots_of(section: Section) -> ZeroPole:
    """Poles, zeros and gain, the section's factor included; damped poles and no more zeros than poles."""
    found = next(of for kind, of in ROOTS.items() if isinstance(section, kind))(section)
    weak = found.poles[found.poles.real >= -_DAMPED * np.abs(found.poles)]
    if len(weak):
        raise ParameterError(f"a pole without damping at {abs(weak[0]) / (2.0 * np.pi):.4g} Hz")
    if len(found.zeros) > len(found.poles):
        raise ParameterError("the gain rises without end towards high frequencies (more zeros than poles)")
    return ZeroPole(found.zeros, found.poles, found.gain * float(section.factor))


def _track(design: Design, group: Group, entry: int) -> Tracked:
    """Roots on a lattice over the whole travel, each followed from its neighbour on the way from the design's own."""
    axes = _lattice(group, entry)
    shape = tuple(len(axis.knots) for axis in axes)
    scales = np.array(list(itertools.product(*(axis.knots for axis in axes))))
    found = [_placed(group, s, partial(_roots_at, design, group, entry, s)) for s in scales]
    found.append(_roots_of(design.sections[entry]))
    n = max(len(r.poles) for r in found)
    sizes = np.concatenate([np.log(np.abs(r.poles)) for r in found])
    reference = float(np.exp(sizes.mean())) if len(sizes) else 2.0 * np.pi * 1000.0
    zeros, poles = ([padded(getattr(r, name), n) for r in found] for name in ("zeros", "poles"))
    start = np.array([axis.nearest_to_now for axis in axes])
    for here, before, earlier in [*_paths(shape, start), (len(scales), _flat(start, shape), None)]:
        for rows in (zeros, poles):
            expected = rows[before] if earlier is None else continued(rows[earlier], rows[before])
            rows[here] = numbered(expected, rows[here], reference)
    roots = Roots(np.array(zeros), np.array(poles), np.array([r.gain for r in found]), reference)
    pattern = pattern_of(roots, len(scales))
    return Tracked(axes, roots, pattern, _match_points(roots, pattern))


def _roots_at(design: Design, group: Group, entry: int, scales: FloatArray) -> ZeroPole:
    return _roots_of(group.section_at(design, entry, scales))


def _lattice(group: Group, entry: int) -> tuple[Axis, ...]:
    """The axes with few positions each, evenly along the travel; all of a switch's, one where it does not matter."""
    moving = group.moving(entry)
    free = sum(m and not axis.control.stepped for axis, m in zip(group.axes, moving, strict=True))
    count = _LATTICE.get(free, 5)
    axes = []
    for axis, moves in zip(group.axes, moving, strict=True):
        if not moves:
            axes.append(replace(axis, knots=axis.knots[:1]))
        else:
            axes.append(axis if axis.control.stepped else axis.spaced(np.linspace(0.0, 1.0, count)))
    return tuple(axes)


def _corners(axes: tuple[Axis, ...], shape: tuple[int, ...], scale: FloatArray) -> tuple[IntArray, FloatArray]:
    """The lattice points around `scale` [K] as flat indices, and their weights."""
    cells = [axis.cell(float(s)) for axis, s in zip(axes, scale, strict=True)]
    corners, weights = [], []
    for sides in itertools.product((0, 1), repeat=len(axes)):
        weight = float(np.prod([part if side else 1.0 - part for side, (_, part) in zip(sides, cells, strict=True)]))
        if weight > 0.0:
            corners.append(_flat(np.array([low + side for side, (low, _) in zip(sides, cells, strict=True)]), shape))
            weights.append(weight)
    return np.array(corners), np.array(weights)


def _match_points(roots: Roots, pattern: Pattern) -> FloatArray:
    """Each section's natural frequency at the design's own setting; where that is infinite, the lowest of the sweep."""
    b, a, _ = sections_from(settled(roots, pattern, exact=True)[0], pattern, roots)
    with np.errstate(divide="ignore", invalid="ignore"):
        f0 = natural_frequency_hz(b, a)
    usable = np.where(np.isfinite(f0) & (f0 < _HIGHEST_MATCH_HZ), f0, np.inf)
    lowest = np.min(usable, axis=0)
    return np.where(np.isfinite(usable[-1]), usable[-1], np.where(np.isfinite(lowest), lowest, 1000.0))


def _paths(shape: tuple[int, ...], start: IntArray) -> list[tuple[int, int, int | None]]:
    """(position, its neighbour one step nearer to `start`, the one beyond that) as flat indices, nearest first."""
    indices = np.array(list(np.ndindex(*shape)))
    steps = np.abs(indices - start).sum(axis=-1)
    paths = []
    for flat in np.argsort(steps, kind="stable")[1:]:
        axis = int(np.flatnonzero(indices[flat] != start)[-1])
        step = np.zeros(len(shape), dtype=np.int64)
        step[axis] = np.sign(start[axis] - indices[flat][axis])
        before, earlier = indices[flat] + step, indices[flat] + 2 * step
        known = 0 <= earlier[axis] < shape[axis] and steps[flat] > 1
        paths.append((int(flat), _flat(before, shape), _flat(earlier, shape) if known else None))
    return paths


def _flat(index: IntArray, shape: tuple[int, ...]) -> int:
    return int(np.ravel_multi_index(tuple(index), shape))


def _placed(group: Group, scales: FloatArray, build: Callable[[], Any]) -> Any:
    """What `build` gives; its error with the position."""
    try:
        return build()
    except (A2dError, ValueError) as error:
        where = ", ".join(
            f"{axis.name} = {s:.6g} {axis.unit}".strip() for axis, s in zip(group.axes, scales, strict=True)
        )
        raise ParameterError(f"{error} (with {where})") from error


def _stacked(rows: Iterable[Sections]) -> Sections:
    b, a, f0 = (np.stack(parts) for parts in zip(*rows, strict=True))
    return Sections(b, a, f0)


def _shaped(rows: Sections, shape: tuple[int, ...]) -> Sections:
    return Sections(*(part.reshape(*shape, *part.shape[1:]) for part in rows))
