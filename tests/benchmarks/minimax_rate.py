"""Minimax fits a second against a general minimiser called a section; and ten sections at four rates.

python -m tests.benchmarks.minimax_rate
"""

from __future__ import annotations

import sys
import time

import numpy as np

from a2d.digital.minimax import minimax
from tests.benchmarks.minimax_optimum import BAND, cases
from tests.benchmarks.timing import best_of, process, report
from tests.support import prototypes
from tests.support.slow_search import Search

RATE = 48_000.0
FEW = 12  # sections that the general minimiser is timed on, each on some hundred frequencies as ours


def main() -> int:
    sections = [prototypes.section(*case) for case in cases()]
    b, a = (np.tile(np.array([s[i] for s in sections]), (8, 1)) for i in (0, 1))
    rate = np.asarray(RATE)
    minimax(b, a, rate, rate, BAND)
    ours = best_of(5, lambda: minimax(b, a, rate, rate, BAND)) / len(b)
    searches = [Search(*sections[i], RATE, count=30) for i in range(0, len(sections), len(sections) // FEW)]
    start = time.perf_counter()
    for search in searches:  # what a user would do: one run from the bilinear transform
        search.minimise(search.start())
    theirs = (time.perf_counter() - start) / len(searches)
    lines = [
        f"ours {1 / ours:,.0f} fits/s ({1e6 * ours:.0f} µs each), one run of SLSQP {1e3 * theirs:.1f} ms a section"
    ]
    status = report("minimax fits a second, vectorised / a general minimiser", theirs / ours, 200.0, more=lines)
    ten, rates = slice(0, len(sections), len(sections) // 10), np.array([44_100.0, 48_000.0, 88_200.0, 96_000.0])
    ten_b, ten_a = (np.array([s[i] for s in sections])[ten][:10] for i in (0, 1))
    chain = best_of(5, lambda: minimax(ten_b, ten_a, rates[:, np.newaxis], rate, BAND))
    loading = best_of(3, process("-c", "import scipy.signal")) - best_of(3, process("-c", "pass"))
    lines = [f"{1e3 * chain:.1f} ms; importing scipy.signal {loading:.3f} s"]
    return status | report(
        "ten sections at four rates / importing scipy.signal", chain / loading, 2.0, at_least=False, more=lines
    )


if __name__ == "__main__":
    sys.exit(main())
