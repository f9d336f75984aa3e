"""A tone through sections while their control moves from end to end and back, as firmware would do it."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from a2d.arrays import FloatArray
from a2d.compare.between import interpolate
from a2d.listening.moving import Change, render_moving


def travel_scales(knots: Sequence[FloatArray], blocks: int) -> FloatArray:
    """Where the controls stand at each block, [B, K]: all of them from first to last position and back, evenly."""
    there = np.linspace(0.0, 1.0, blocks - blocks // 2)
    back = np.linspace(1.0, 0.0, blocks // 2 + 1)[1:]
    way = np.concatenate([there, back])
    return np.stack([np.interp(way * (len(k) - 1), np.arange(len(k)), k) for k in knots], axis=-1)


def moving_take(
    table: FloatArray, knots: Sequence[FloatArray], tone: FloatArray, structure: str, change: Change
) -> FloatArray:
    """A tone [N] through a table's sections [P1, ..., PK, S, 6] while every control moves there and back, once.

    At the start of each block the control is looked at and the table interpolated; the coefficients follow by the
    change's policy.
    """
    blocks = max(2, -(-len(tone) // change.block))
    return render_moving(interpolate(table, knots, travel_scales(knots, blocks)), tone, structure, change)
