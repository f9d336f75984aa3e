"""minimax against the best that a slow, independent search finds; needs some minutes.

python -m tests.benchmarks.minimax_optimum [quick]
"""

from __future__ import annotations

import sys

import numpy as np

from a2d.digital.minimax import minimax
from tests.support import prototypes
from tests.support.slow_search import Search

F0 = (100.0, 1000.0, 4000.0, 8000.0, 12_000.0, 16_000.0)
NOISE_DB = 1e-6  # errors below are rounding of the coefficients
BAND = np.array([20.0, 20_000.0])


def cases() -> list[tuple[str, float, float, float]]:
    peaking = [("peaking", f0, q, g) for f0 in F0 for q in (0.5, 1.4, 4.0) for g in (12.0, -12.0)]
    shelves = [(k, f0, 0.7071, g) for k in ("lowshelf", "highshelf") for f0 in F0 for g in (12.0, -12.0)]
    passes = [(k, f0, q, 0.0) for k in ("lowpass", "highpass", "bandpass", "notch") for f0 in F0 for q in (0.7071, 2.0)]
    return peaking + shelves + passes


def ours_db(b: np.ndarray, a: np.ndarray, rate: float) -> float:
    sos = minimax(b, a, np.asarray(rate), np.asarray(0.0), BAND)
    f = Search(b, a, rate).f
    dense = np.unique(np.concatenate([f, *(f[:-1] + np.diff(f) * part for part in (0.25, 0.5, 0.75))]))
    wanted = np.abs(prototypes.analog(b, a, dense))
    dense = dense[wanted > 1e-4 * wanted.max()]  # the bottom of a notch is a quotient of two zeros
    return float(np.abs(prototypes.digital_db(sos, dense, rate) - prototypes.analog_db(b, a, dense)).max())


def mirror_db(rate: float) -> float:
    """The largest |boost + cut| in dB over all peaking sections and shelves."""
    f = np.geomspace(*BAND, 2000)
    worst = 0.0
    for kind, f0, q, gain in cases():
        if gain > 0.0:
            pair = [
                minimax(*prototypes.section(kind, f0, q, g), np.asarray(rate), np.asarray(0.0), BAND)
                for g in (gain, -gain)
            ]
            worst = max(worst, np.abs(sum(prototypes.digital_db(sos, f, rate) for sos in pair)).max())
    return worst


def main() -> int:
    chosen = cases()[:: 7 if "quick" in sys.argv[1:] else 1]
    worst_ratio, most = 0.0, {"peaking": 0.0, "shelf": 0.0}
    for rate in (44_100.0, 48_000.0):
        for case in chosen:
            b, a = prototypes.section(*case)
            ours, theirs = ours_db(b, a, rate), Search(b, a, rate).best()
            ratio = ours / theirs if max(ours, theirs) > NOISE_DB else 1.0
            worst_ratio = max(worst_ratio, ratio)
            sort = "shelf" if "shelf" in case[0] else case[0]
            if rate == 48_000.0 and sort in most:
                most[sort] = max(most[sort], ours)
            print(f"{rate:7.0f} {case!s:45} ours {ours:.3e} search {theirs:.3e} dB ratio {ratio:.4f}", flush=True)
    print(f"largest ratio ours/search: {worst_ratio:.4f} (promised at most 1.02)")
    mirrored = max(mirror_db(rate) for rate in (44_100.0, 48_000.0))
    print(f"cuts against boosts: {mirrored:.2e} dB (promised at most 1e-6)")
    print(f"at 48 kHz: peaking {most['peaking']:.4f} dB (0.08), shelves {most['shelf']:.4f} dB (0.02)")
    kept = worst_ratio <= 1.02 and mirrored <= 1e-6 and most["peaking"] <= 0.08 and most["shelf"] <= 0.02
    print("kept" if kept else "MISSED")
    return 0 if kept else 1


if __name__ == "__main__":
    sys.exit(main())
