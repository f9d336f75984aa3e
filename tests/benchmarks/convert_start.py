"""Whole-process wall time of `a2d convert` on the demo design against importing scipy.signal alone."""

from __future__ import annotations

import sys
import tempfile

from tests.benchmarks.timing import best_of, process, report
from tests.support.paths import EXAMPLES


def main() -> int:
    with tempfile.TemporaryDirectory() as folder:
        convert = process("-m", "a2d", "convert", str(EXAMPLES / "harbour_eq.toml"), "--out", folder)
        scipy = process("-c", "import scipy.signal")
        convert(), scipy()  # warm the file cache for both
        ours, theirs = best_of(7, convert), best_of(7, scipy)
    lines = [f"convert {ours:.3f} s, import scipy.signal {theirs:.3f} s"]
    return report("time of a2d convert / of importing scipy.signal", ours / theirs, 1.0, at_least=False, more=lines)


if __name__ == "__main__":
    sys.exit(main())
