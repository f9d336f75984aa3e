"""Sections a second of the vectorised bilinear transform against a loop over scipy.signal.bilinear."""

from __future__ import annotations

import sys

import numpy as np
import scipy.signal as ss

from a2d.analog.kinds.equalisers import peaking
from a2d.digital.bilinear import bilinear
from tests.benchmarks.timing import best_of, report

MANY, FEW, RATE = 200_000, 300, 48_000.0


def main() -> int:
    rng = np.random.default_rng(1)
    f0, q, gain = rng.uniform(50.0, 20_000.0, MANY), rng.uniform(0.3, 8.0, MANY), rng.uniform(-15.0, 15.0, MANY)
    sections = peaking(f0, q, gain)
    b, a = sections.b[:, 0].copy(), sections.a[:, 0].copy()
    band = np.array([20.0, 20_000.0])

    def ours() -> np.ndarray:
        return bilinear(b, a, np.asarray(RATE), f0, band)

    def theirs() -> list[object]:
        # what a user would do: prewarp by hand, call a section at a time
        return [ss.bilinear(b[i], a[i], fs=np.pi * f0[i] / np.tan(np.pi * f0[i] / RATE)) for i in range(FEW)]

    found = ours()
    for i, (num, den) in enumerate(theirs()):
        np.testing.assert_allclose(found[i], [*num, *den], rtol=1e-8, atol=1e-11)
    ours_s, theirs_s = best_of(7, ours) / MANY, best_of(5, theirs) / FEW
    lines = [f"ours {1 / ours_s:,.0f} sections/s, scipy's loop {1 / theirs_s:,.0f} sections/s"]
    return report("sections a second, vectorised / a loop over scipy", theirs_s / ours_s, 3000.0, more=lines)


if __name__ == "__main__":
    sys.exit(main())
