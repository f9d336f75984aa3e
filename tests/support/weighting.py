"""A and C frequency weighting of IEC 61672-1:2013: Table 3 and the poles of Annex E."""

from __future__ import annotations

import numpy as np

from a2d.analog.chain import AnalogChain
from a2d.analog.kinds.given import pole_zero, root_pair

INF = np.inf

# A weighting, C weighting, then the acceptance limits: class 1 upper, lower, class 2 upper, lower; dB
TABLE_3 = np.array(
    [
        (-70.4, -14.3, 3.0, -INF, 5.0, -INF),
        (-63.4, -11.2, 2.5, -INF, 5.0, -INF),
        (-56.7, -8.5, 2.0, -4.0, 5.0, -INF),
        (-50.5, -6.2, 2.0, -2.0, 3.0, -3.0),
        (-44.7, -4.4, 2.0, -1.5, 3.0, -3.0),
        (-39.4, -3.0, 1.5, -1.5, 3.0, -3.0),
        (-34.6, -2.0, 1.0, -1.0, 2.0, -2.0),
        (-30.2, -1.3, 1.0, -1.0, 2.0, -2.0),
        (-26.2, -0.8, 1.0, -1.0, 2.0, -2.0),
        (-22.5, -0.5, 1.0, -1.0, 2.0, -2.0),
        (-19.1, -0.3, 1.0, -1.0, 1.5, -1.5),
        (-16.1, -0.2, 1.0, -1.0, 1.5, -1.5),
        (-13.4, -0.1, 1.0, -1.0, 1.5, -1.5),
        (-10.9, 0.0, 1.0, -1.0, 1.5, -1.5),
        (-8.6, 0.0, 1.0, -1.0, 1.5, -1.5),
        (-6.6, 0.0, 1.0, -1.0, 1.5, -1.5),
        (-4.8, 0.0, 1.0, -1.0, 1.5, -1.5),
        (-3.2, 0.0, 1.0, -1.0, 1.5, -1.5),
        (-1.9, 0.0, 1.0, -1.0, 1.5, -1.5),
        (-0.8, 0.0, 1.0, -1.0, 1.5, -1.5),
        (0.0, 0.0, 0.7, -0.7, 1.0, -1.0),
        (0.6, 0.0, 1.0, -1.0, 1.5, -1.5),
        (1.0, -0.1, 1.0, -1.0, 2.0, -2.0),
        (1.2, -0.2, 1.0, -1.0, 2.0, -2.0),
        (1.3, -0.3, 1.0, -1.0, 2.5, -2.5),
        (1.2, -0.5, 1.0, -1.0, 2.5, -2.5),
        (1.0, -0.8, 1.0, -1.0, 3.0, -3.0),
        (0.5, -1.3, 1.5, -1.5, 3.5, -3.5),
        (-0.1, -2.0, 1.5, -2.0, 4.5, -4.5),
        (-1.1, -3.0, 1.5, -2.5, 5.0, -5.0),
        (-2.5, -4.4, 2.0, -3.0, 5.0, -INF),
        (-4.3, -6.2, 2.0, -5.0, 5.0, -INF),
        (-6.6, -8.5, 2.5, -16.0, 5.0, -INF),
        (-9.3, -11.2, 3.0, -INF, 5.0, -INF),
    ]
)
A_TABLE, C_TABLE = TABLE_3[:, 0], TABLE_3[:, 1]
CLASS_1, CLASS_2 = TABLE_3[:, 2:4], TABLE_3[:, 4:6]
EXACT_HZ = 1000.0 * 10.0 ** (0.1 * np.arange(-20, 14))


def annex_e_poles_hz() -> tuple[float, float, float, float]:
    """f1 to f4 by the closed form of Annex E: fr = 1000, fL = 10^1.5, fH = 10^3.9, fA = 10^2.45."""
    fr, fl, fh, fa, d = 1000.0, 10.0**1.5, 10.0**3.9, 10.0**2.45, 0.5**0.5
    b = (fr**2 + fl**2 * fh**2 / fr**2 - d * (fl**2 + fh**2)) / (1.0 - d)
    c = fl**2 * fh**2
    root = np.sqrt(b * b - 4.0 * c)
    f1, f4 = np.sqrt((-b - root) / 2.0), np.sqrt((-b + root) / 2.0)
    return float(f1), (3 - 5**0.5) / 2 * fa, (3 + 5**0.5) / 2 * fa, float(f4)


def weighting_chain(letter: str) -> AnalogChain:
    """A or C weighting, 0 dB at 1 kHz."""
    f1, f2, f3, f4 = annex_e_poles_hz()
    poles = [f1, f1, f4, f4] + ([f2, f3] if letter == "A" else [])
    zeros = np.zeros(4 if letter == "A" else 2, dtype=complex)
    sections = pole_zero(np.concatenate([root_pair(p) for p in poles]), zeros, 0.0, 1000.0)
    return AnalogChain.of([f"{letter}{i}" for i in range(len(sections.f0_hz))], *sections)
