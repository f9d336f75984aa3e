"""Names of the array types, what the axes mean, and how a grid is put in order.

An analog section is a pair `b[..., 3]`, `a[..., 3]` (coefficients of s², s, 1; s in rad/s), a digital one a row
`sos[..., 6]` (b0, b1, b2, 1, a1, a2). Leading axes broadcast: panel position, tolerance draw, sample rate.
A chain is `[..., section, 3]` and `[..., section, 6]`.
"""

from __future__ import annotations

from typing import TypeAlias

import numpy as np
import numpy.typing as npt

FloatArray: TypeAlias = npt.NDArray[np.float64]
ComplexArray: TypeAlias = npt.NDArray[np.complex128]
IntArray: TypeAlias = npt.NDArray[np.int64]
BoolArray: TypeAlias = npt.NDArray[np.bool_]
ArrayLike: TypeAlias = npt.ArrayLike


def rising(points: FloatArray, low: float = -np.inf, high: float = np.inf) -> FloatArray:
    """The distinct values of `points` [N] from `low` to `high`, in rising order.

    What numpy.unique does; that one loads numpy's masked arrays, which costs a tenth of a conversion.
    """
    ordered = np.sort(points[(points >= low) & (points <= high)])
    return np.asarray(ordered[np.append(True, ordered[1:] > ordered[:-1])[: len(ordered)]])
