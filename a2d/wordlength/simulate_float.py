"""Simulation in floating point, operation by operation in the order of the C kernels, many channels at once."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, TypeAlias

import numpy as np
import numpy.typing as npt

from a2d.arrays import ArrayLike
from a2d.wordlength.rounding import Rounded

Floats: TypeAlias = npt.NDArray[Any]
Section: TypeAlias = Callable[[list[Any], Floats], Floats]


def simulate_float(rounded: Rounded, samples: ArrayLike) -> Floats:
    """Run samples through a cascade from silence.

    Parameters
    ----------
    rounded
        A cascade in float32 or float64.
    samples
        Shape [N] or [N, channels]; rounded to the format.

    Returns
    -------
    Of the same shape, in the format. Every product and sum is rounded on its own, as a compiler does that does not
    contract a·b + c into one operation.
    """
    kind = np.float32 if rounded.number.kind == "float32" else np.float64
    signal = np.asarray(samples, dtype=kind)
    for row in rounded.words.astype(kind):
        signal = SECTIONS[rounded.structure](_items(row), signal)
    return signal


def _items(values: Floats) -> list[Any]:
    """The first axis as a list: of Python's own doubles where it can be, for they are the fastest."""
    return values.tolist() if values.ndim == 1 and values.dtype == np.float64 else list(values)


def direct_form_1(row: list[Any], samples: Floats) -> Floats:
    """y = b0·x + b1·x1 + b2·x2 - a1·y1 - a2·y2."""
    b0, b1, b2, a1, a2 = row
    past = np.concatenate([np.zeros_like(samples[:2]), samples])
    forward = b0 * past[2:] + b1 * past[1:-1] + b2 * past[:-2]
    output = []
    y1 = y2 = _items(past[:1])[0]
    for x in _items(forward):
        y = x - a1 * y1 - a2 * y2
        y2, y1 = y1, y
        output.append(y)
    return np.array(output, dtype=samples.dtype)


def transposed_direct_form_2(row: list[Any], samples: Floats) -> Floats:
    """y = b0·x + s1; s1 = b1·x - a1·y + s2; s2 = b2·x - a2·y."""
    b0, b1, b2, a1, a2 = row
    output = []
    s1 = s2 = _items(np.zeros_like(samples[:1]))[0]
    for p0, p1, p2 in zip(_items(b0 * samples), _items(b1 * samples), _items(b2 * samples), strict=True):
        y = p0 + s1
        s1 = p1 - a1 * y + s2
        s2 = p2 - a2 * y
        output.append(y)
    return np.array(output, dtype=samples.dtype)


def delta(row: list[Any], samples: Floats) -> Floats:
    """y = b0·x + v1; v1 += v2 + (b1·x - a1·y); v2 += b2·x - a2·y."""
    b0, b1, b2, a1, a2 = row
    output = []
    v1 = v2 = _items(np.zeros_like(samples[:1]))[0]
    for p0, p1, p2 in zip(_items(b0 * samples), _items(b1 * samples), _items(b2 * samples), strict=True):
        y = p0 + v1
        v1 = v1 + (v2 + (p1 - a1 * y))
        v2 = v2 + (p2 - a2 * y)
        output.append(y)
    return np.array(output, dtype=samples.dtype)


SECTIONS: dict[str, Section] = {
    "direct_form_1": direct_form_1,
    "transposed_direct_form_2": transposed_direct_form_2,
    "delta": delta,
}
