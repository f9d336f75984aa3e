"""A grid of two controls against the time that importing scipy.signal takes.

    python -m tests.benchmarks.controls_speed

21 x 21 positions of ten bells at four sample rates by the bilinear transform: sections, twins, comparison of magnitude,
phase and group delay at every position, verdict, and the error of interpolation proved. Each control moves the gains of
five bells; below, for information, the same with both controls moving all ten (one the gains, one the Qs).
"""

import resource
import sys

import numpy as np

from a2d.conversion import convert
from a2d.design.read import parse_design
from tests.benchmarks.timing import best_of, process, report

WANTED = 5.0


def design(first, second, low, high):
    text = '[design]\nname = "grid"\nsample_rates = ["44.1 kHz", "48 kHz", "96 kHz", "192 kHz"]\n'
    text += '[limits]\nmagnitude = "0.5 dB"\n'
    for k, f in enumerate(np.geomspace(31.5, 16e3, 10)):
        text += f'[[section]]\nname = "s{k}"\nkind = "peaking"\nf0 = {f:.6g}\nq = 1.4\ngain = 0\n'
    for name, moves, ends in (("x", first, (-12, 12)), ("y", second, (low, high))):
        text += f'[[control]]\nname = "{name}"\nmoves = {moves}\nfrom = {ends[0]}\nto = {ends[1]}\n'
        text += 'positions = 21\ngrid = "g"\n'
    return parse_design(text)


def main():
    shared = design([f"s{k}.gain" for k in range(5)], [f"s{k}.gain" for k in range(5, 10)], -12, 12)
    crossed = design([f"s{k}.gain" for k in range(10)], [f"s{k}.q" for k in range(10)], 0.5, 3)
    signal = best_of(3, process("-c", "import scipy.signal")) - best_of(3, process("-c", "import numpy"))
    took = best_of(3, lambda: convert(shared))
    more = best_of(1, lambda: convert(crossed))
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
    lines = [
        f"grid {took:.2f} s, import scipy.signal {signal:.2f} s (beyond numpy)",
        f"every bell moved by both controls: {more:.2f} s, {more / signal:.1f} times",
        f"peak memory {peak:.0f} MiB (promised below 500)",
    ]
    status = report("21 x 21 grid over import scipy.signal", took / signal, WANTED, at_least=False, more=lines)
    return status or int(peak >= 500)


if __name__ == "__main__":
    sys.exit(main())
