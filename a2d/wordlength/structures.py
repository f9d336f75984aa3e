"""The structures that a section can be computed in, by their textbook names."""

from __future__ import annotations

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
