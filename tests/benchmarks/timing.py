"""Timing for benchmarks: the best of several runs, and a ratio that is held against what was promised."""

from __future__ import annotations

import subprocess
import sys
import time
from collections.abc import Callable, Sequence


def best_of(runs: int, work: Callable[[], object]) -> float:
    """Seconds of the fastest run."""
    times = []
    for _ in range(runs):
        start = time.perf_counter()
        work()
        times.append(time.perf_counter() - start)
    return min(times)


def process(*arguments: str) -> Callable[[], object]:
    """A whole Python process."""
    return lambda: subprocess.run([sys.executable, *arguments], check=True, capture_output=True)


def report(what: str, ratio: float, wanted: float, *, at_least: bool = True, more: Sequence[str] = ()) -> int:
    """Print a measured ratio and the promised one; 0 when it is kept."""
    kept = ratio >= wanted if at_least else ratio <= wanted
    promise = f"promised {'at least' if at_least else 'at most'} {wanted:g}"
    print(f"{what}: {ratio:.4g} ({promise}): {'kept' if kept else 'MISSED'}")
    for line in more:
        print(f"  {line}")
    return 0 if kept else 1
