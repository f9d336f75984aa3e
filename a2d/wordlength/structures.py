"""The structures that a section can be computed in, by their textbook names, and what their values are.

Direct form I and transposed direct form II hold the coefficients of H(z) themselves (e.g. Oppenheim and Schafer,
Discrete-Time Signal Processing, 3rd ed., section 6.3). The difference form is written in d = z - 1 instead of z
(Middleton and Goodwin, IEEE Trans. Automatic Control 31(11), 1986, "Improved finite word length characteristics in
digital control using delta operators"): with z = 1 + d,

    (b0·z² + b1·z + b2)/(z² + a1·z + a2)
        = (b0·d² + (2·b0 + b1)·d + (b0 + b1 + b2))/(d² + (2 + a1)·d + (1 + a1 + a2))

so that the small quantities which set a low f0, 2 + a1 and 1 + a1 + a2, are stored with their own relative accuracy.
"""

from __future__ import annotations

import numpy as np

from a2d.arrays import FloatArray

VALUE_NAMES = ("b0", "b1", "b2", "a1", "a2")

EQUATIONS: dict[str, tuple[str, ...]] = {
    "direct_form_1": ("y[n] = b0 x[n] + b1 x[n-1] + b2 x[n-2] - a1 y[n-1] - a2 y[n-2]",),
    "transposed_direct_form_2": (
        "y[n]  = b0 x[n] + s1[n-1]",
        "s1[n] = b1 x[n] - a1 y[n] + s2[n-1]",
        "s2[n] = b2 x[n] - a2 y[n]",
        "which is y[n] = b0 x[n] + b1 x[n-1] + b2 x[n-2] - a1 y[n-1] - a2 y[n-2]",
    ),
    "delta": (
        "y[n]  = b0 x[n] + v1[n-1]",
        "v1[n] = v1[n-1] + v2[n-1] + b1 x[n] - a1 y[n]",
        "v2[n] = v2[n-1] + b2 x[n] - a2 y[n]",
        "which is (b0 d^2 + b1 d + b2) / (d^2 + a1 d + a2) with d = z - 1",
    ),
}
STRUCTURES = tuple(EQUATIONS)
TITLES = {
    "direct_form_1": "direct form I",
    "transposed_direct_form_2": "transposed direct form II",
    "delta": "difference (delta-operator) form",
}


def values_of(sos: FloatArray, structure: str) -> FloatArray:
    """What a structure stores of sections `sos` [..., 6]: b0, b1, b2, a1, a2 of its equation, shape [..., 5]."""
    b0, b1, b2, a1, a2 = (sos[..., i] for i in (0, 1, 2, 4, 5))
    if structure == "delta":
        b1, b2, a1, a2 = 2.0 * b0 + b1, b0 + b1 + b2, 2.0 + a1, 1.0 + a1 + a2
    return np.stack([b0, b1, b2, a1, a2], axis=-1)


def sos_of(values: FloatArray, structure: str) -> FloatArray:
    """The sections [..., 6] that a structure's values [..., 5] compute: the inverse of `values_of`."""
    b0, b1, b2, a1, a2 = np.moveaxis(values, -1, 0)
    if structure == "delta":
        b1, b2 = b1 - 2.0 * b0, (b2 - b1) + b0
        a1, a2 = a1 - 2.0, (a2 - a1) + 1.0
    return np.stack([b0, b1, b2, np.ones_like(b0), a1, a2], axis=-1)
