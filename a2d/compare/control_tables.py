"""Tables of coefficients for the positions of a design's controls: made, compared, judged, and proved in between."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from a2d.analog.axis import Group, groups_of
from a2d.analog.chain import AnalogChain
from a2d.analog.sections import Sections
from a2d.arrays import BoolArray, FloatArray
from a2d.compare.between import Between, triangle_margin
from a2d.compare.control_knots import with_knots
from a2d.compare.control_twins import GroupSweep, TwinsBetween, band_at, sweep_group, twins_of
from a2d.compare.positions import GROUP_DELAY, MAGNITUDE, PHASE, Piece, PositionErrors, position_errors
from a2d.compare.verdict import Breach
from a2d.design.hardware import BankSection, CircuitSection, NetworkSection
from a2d.design.model import Design, Limits
from a2d.digital.match import match_points
from a2d.digital.methods import METHODS


@dataclass(frozen=True, eq=False)
class RateTable:
    """A group's coefficients at one sample rate.

    Attributes
    ----------
    sample_rate_hz
        Hz.
    sos
        Shape [P1, ..., PK, T, 6]: the sections that the group moves, at every position.
    errors
        Of the whole chain at every position, flattened; what other controls move stands as in the design.
    within
        Shape [N]: whether the position breaks no limit.
    breaches
        The limits broken, each at its worst position (a flat index).
    between
        The error of linear interpolation.
    margin
        The smallest distance to the stability triangle's edge, at and between positions.
    pieces
        Analog original and twin of the whole chain at every position.
    """

    sample_rate_hz: float
    sos: FloatArray
    errors: PositionErrors
    within: BoolArray
    breaches: tuple[tuple[int, Breach], ...]
    between: Between
    margin: float
    pieces: tuple[Piece, ...]


@dataclass(frozen=True, eq=False)
class ControlTable:
    """A group of controls with its tables.

    Attributes
    ----------
    group
        The controls.
    names, places
        T each: the sections in the table, and which sections of the whole chain they stand for.
    exchanged
        At how many positions the order of sections could not be kept continuous.
    rates
        One table a sample rate.
    """

    group: Group
    names: tuple[str, ...]
    places: tuple[int, ...]
    exchanged: int
    rates: tuple[RateTable, ...]

    def position(self, flat: int) -> str:
        """A position in words: `bass 0.25, treble 1`."""
        index = np.unravel_index(flat, self.group.shape)
        return ", ".join(
            describe_position(axis.name, axis.unit, float(axis.knots[i]), axis.control.stepped)
            for axis, i in zip(self.group.axes, index, strict=True)
        )


def describe_position(name: str, unit: str, scale: float, stepped: bool) -> str:
    """`presence at +4.5 dB`; `mode at position 3`."""
    if stepped:
        return f"{name} at position {round(scale) + 1}"
    return f"{name} at {scale:.6g} {unit}".rstrip()


def sweep_controls(design: Design) -> tuple[GroupSweep, ...]:
    """The analog sections at all positions of all controls; tables of the smallest size where the file asks for them.

    Raises
    ------
    ParameterError
        A position cannot be built; a table would be too large.
    """
    return tuple(sweep_group(design, with_knots(design, group)) for group in groups_of(design))


def ready_sections(sweeps: tuple[GroupSweep, ...]) -> dict[int, Sections]:
    """By entry: its sections at the design's own setting, in the sweep's order, for the chain to be built with."""
    return {entry.entry: entry.now for sweep in sweeps for entry in sweep.entries}


def tabulate(design: Design, chain: AnalogChain, sweep: GroupSweep) -> ControlTable:
    """The tables of one group at all sample rates, compared and judged.

    Raises
    ------
    ConversionError
        A section has no twin at one of the positions.
    """
    entries = sweep.group.entries
    between = TwinsBetween(design, sweep)
    places = [k for entry in entries for k, owner in enumerate(chain.owners) if owner == entry]
    return ControlTable(
        sweep.group,
        tuple(chain.names[k] for k in places),
        tuple(places),
        sum(entry.exchanged for entry in sweep.entries),
        tuple(_at_rate(design, chain, sweep, between, float(rate)) for rate in design.design.sample_rates),
    )


def _at_rate(design: Design, chain: AnalogChain, sweep: GroupSweep, between: TwinsBetween, rate: float) -> RateTable:
    band = band_at(design, rate)
    pieces, tables = [], []
    for entry in sweep.entries:
        table = twins_of(design, entry, entry.sections, rate)
        tables.append(table)
        pieces.append(_piece(sweep.group, entry.exact, table))
    fixed = _fixed_piece(design, chain, sweep.group, rate, band)
    whole = tuple(pieces) if fixed is None else (*pieces, fixed)
    errors = position_errors(whole, band, rate)
    within, breaches = _judge(errors, design.limits)
    shape = sweep.group.shape
    sos = np.concatenate([np.broadcast_to(t, (*shape, *t.shape[-2:])) for t in tables], axis=-2)
    return RateTable(
        sample_rate_hz=rate,
        sos=sos,
        errors=errors,
        within=within,
        breaches=breaches,
        between=between.error(tables, rate),
        margin=float(np.min(triangle_margin(sos))),
        pieces=whole,
    )


def _piece(group: Group, sections: Sections, table: FloatArray) -> Piece:
    """An entry's sections by position; positions along axes that do not move it share theirs."""
    rows = np.broadcast_to(np.arange(table[..., 0, 0].size).reshape(table.shape[:-2]), group.shape)
    both = np.concatenate([sections.b, sections.a], axis=-1)
    return Piece(both.reshape(-1, *both.shape[-2:]), table.reshape(-1, *table.shape[-2:]), rows.ravel())


def _fixed_piece(design: Design, chain: AnalogChain, group: Group, rate: float, band: FloatArray) -> Piece | None:
    """The sections that the group does not move."""
    rows = [k for k, owner in enumerate(chain.owners) if owner not in group.entries]
    if not rows:
        return None
    entries = [design.sections[chain.owners[k]] for k in rows]
    found = [isinstance(entry, (NetworkSection, CircuitSection, BankSection)) for entry in entries]
    stated = [entry.match for entry in entries]
    match = match_points(chain.f0_hz[rows], stated, found, (float(band[0]), float(band[1])))
    sos = [
        METHODS[e.method or design.design.method](chain.b[k : k + 1], chain.a[k : k + 1], np.asarray(rate), m, band)
        for e, k, m in zip(entries, rows, match[:, np.newaxis], strict=True)
    ]
    both = np.concatenate([chain.b[rows], chain.a[rows]], axis=-1)
    index = np.zeros(int(np.prod(group.shape)), dtype=np.int64)
    return Piece(both[np.newaxis], np.concatenate(sos)[np.newaxis], index)


def _judge(errors: PositionErrors, limits: Limits | None) -> tuple[BoolArray, tuple[tuple[int, Breach], ...]]:
    """Errors against limits. A mask or table is for the response at the design's own setting and not judged here."""
    within = np.ones(errors.worst.shape[1], dtype=np.bool_)
    if limits is None:
        return within, ()
    delay = None if limits.group_delay is None else 1e6 * limits.group_delay
    stated = (
        (MAGNITUDE, "magnitude", "dB", limits.magnitude if limits.mask is None else None),
        (PHASE, "phase", "deg", limits.phase),
        (GROUP_DELAY, "group delay", "µs", delay),
    )
    breaches = []
    for quantity, what, unit, limit in stated:
        if limit is None:
            continue
        good = np.abs(errors.worst[quantity]) <= limit
        within &= good
        if not np.all(good):
            k = errors.worst_position(quantity)
            worst, at_hz = float(errors.worst[quantity, k]), float(errors.at_hz[quantity, k])
            breaches.append((k, Breach(what, unit, float(limit), worst, at_hz)))
    return within, tuple(breaches)
