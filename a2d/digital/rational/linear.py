"""Linear equations, many at a time, some of which may be singular."""

from __future__ import annotations

import numpy as np

from a2d.arrays import FloatArray

SMALLEST = 1e-13
"""Singular values below this part of the largest count as zero."""


def solve(matrix: FloatArray, right: FloatArray) -> FloatArray:
    """`matrix` [..., K, K] applied inversely to `right` [..., K, R]; the least solution where one is singular.

    A stack that holds an exactly singular matrix (a section that is its own twin) is solved by pseudo-inverses.
    """
    try:
        return np.asarray(np.linalg.solve(matrix, right))
    except np.linalg.LinAlgError:
        return np.asarray(np.linalg.pinv(matrix, rcond=SMALLEST) @ right)
