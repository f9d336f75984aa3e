"""IEC 61260-1:2014: octave-band and fractional-octave-band filters, Table 1 and clause 5.10."""

from __future__ import annotations

import numpy as np

from a2d.arrays import FloatArray

G = 10.0**0.3

# Exponent p of the normalised frequency G^±p, then the least and greatest relative attenuation in dB of class 1 and
# class 2 (Table 1). The row 1/2 stands twice: just inside the band edge and just outside.
TABLE = np.array(
    [
        [0.0, -0.4, 0.4, -0.6, 0.6],
        [0.125, -0.4, 0.5, -0.6, 0.7],
        [0.25, -0.4, 0.7, -0.6, 0.9],
        [0.375, -0.4, 1.4, -0.6, 1.7],
        [0.5, -0.4, 5.3, -0.6, 5.8],
        [0.5, 1.2, np.inf, 0.8, np.inf],
        [1.0, 16.6, np.inf, 15.6, np.inf],
        [2.0, 40.5, np.inf, 39.5, np.inf],
        [3.0, 60.0, np.inf, 54.0, np.inf],
        [4.0, 70.0, np.inf, 60.0, np.inf],
    ]
)
INNER = 5  # rows inside the band edges


def attenuation_limits(
    f_hz: FloatArray, midband_hz: float, bandwidth: int, performance_class: int
) -> tuple[FloatArray, FloatArray]:
    """Least and greatest relative attenuation in dB at `f_hz` for a 1/`bandwidth`-octave filter.

    Breakpoints move with the bandwidth by Ω(1/b) = 1 + (G^(1/2b) - 1)/(G^(1/2) - 1)·(Ω(1) - 1), mirrored below
    mid-band; between them the limits run straight over lg Ω.
    """
    column = 2 * performance_class - 1
    omega = np.maximum(f_hz / midband_hz, midband_hz / f_hz)
    narrow = (G ** (0.5 / bandwidth) - 1.0) / (G**0.5 - 1.0)
    breaks = np.log10(1.0 + narrow * (G ** TABLE[:, 0] - 1.0))
    x = np.log10(omega)
    inside = x <= breaks[INNER - 1]
    inner, outer = slice(0, INNER), slice(INNER, len(TABLE))
    least = np.where(
        inside,
        np.interp(x, breaks[inner], TABLE[inner, column]),
        np.interp(x, breaks[outer], TABLE[outer, column]),
    )
    greatest = np.where(inside, np.interp(x, breaks[inner], TABLE[inner, column + 1]), np.inf)
    return least, greatest
