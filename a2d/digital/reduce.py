"""The fewest sections that keep a limit: model reduction by fitting."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from a2d.analog.response import section_response
from a2d.arrays import BoolArray, FloatArray, IntArray
from a2d.digital.chain_fit import ChainFit, Task, add_section, fit_from, task_of
from a2d.digital.minimax import minimax
from a2d.digital.response import chain_response
from a2d.digital.shapes import shape_of
from a2d.errors import ConversionError

MOST_ADDED = 3
"""How many sections more than the chain has are tried before the limit counts as out of reach."""

WITHIN = 0.99
"""The part of a limit that a fit may take on its own grid, so that a finer one finds it kept."""


def fewest_sections(
    b: FloatArray,
    a: FloatArray,
    sample_rate_hz: float,
    band_hz: FloatArray,
    limit_db: float,
    *,
    weight_phase: float = 0.0,
    weight: FloatArray | None = None,
) -> ChainFit:
    """The fit with the fewest sections whose largest error is at most `limit_db`.

    For each number of sections two ways are tried: the analog sections that bend the magnitude most within the band,
    each started as its own minimax fit, with what is left out made up for by all of them together; and the best of
    one section less with one added where it serves best. Parameters as for `fit_chain`.

    Raises
    ------
    ConversionError
        No number of sections up to `MOST_ADDED` more than the chain has keeps the limit.
    """
    task = task_of(b, a, float(sample_rate_hz), band_hz, weight_phase, weight)
    start = minimax(b, a, np.asarray(sample_rate_hz), np.asarray(0.0), band_hz)
    allpass = shape_of(b, a).allpass
    order = by_bend(b, a, task.f_hz)
    order = order if weight_phase else order[~allpass[order]]
    best: ChainFit | None = None
    by_count = []
    for count in range(1, len(order) + MOST_ADDED + 1):
        best = _with_count(task, start, allpass, order, count, best)
        by_count.append((count, best.worst))
        if best.worst <= WITHIN * limit_db:
            return replace(best, by_count=tuple(by_count))
    raise ConversionError(
        f"no {len(order) + MOST_ADDED} sections keep the chain within {limit_db:.4g} dB at {sample_rate_hz:g} Hz "
        f"({0.0 if best is None else best.worst:.4g} dB reached)"
    )


def by_bend(b: FloatArray, a: FloatArray, f_hz: FloatArray) -> IntArray:
    """The sections `b`, `a` [S, 3] by how much their magnitude varies over `f_hz` [G], greatest first."""
    size = np.abs(section_response(b, a, f_hz))
    return np.argsort(-(np.log(size.max(axis=1)) - np.log(size.min(axis=1))), kind="stable").astype(np.int64)


def _with_count(
    task: Task, start: FloatArray, allpass: BoolArray, order: IntArray, count: int, before: ChainFit | None
) -> ChainFit:
    """The better of the two ways to `count` sections."""
    ways = []
    if count <= len(order):
        kept = np.sort(order[:count])
        ways.append(fit_from(task, _levelled(task, start[kept]), allpass[kept], 0))
    if before is not None:
        kept_before = np.sort(order[: count - 1 - before.added])
        ways.append(add_section(task, before, allpass[kept_before], before.added + 1))
    return min(ways, key=lambda fit: fit.worst)


def _levelled(task: Task, sos: FloatArray) -> FloatArray:
    """`sos` [T, 6] with the first section's gain set so that the whole is right, and of the right sign, on average."""

    ratio = task.target / chain_response(sos, task.f_hz, task.rate)
    gain = np.exp(np.log(np.abs(ratio)).mean()) * np.where(ratio.real.sum() < 0.0, -1.0, 1.0)
    levelled = sos.copy()
    levelled[0, :3] *= gain
    return levelled
