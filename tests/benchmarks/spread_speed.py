"""10,000 units of a 15-part circuit at 500 frequencies against the time that importing scipy.signal takes.

python -m tests.benchmarks.spread_speed
"""

import resource
import sys

import numpy as np

from a2d.analog.spread import spread_model
from a2d.analog.spread_draws import run_spread
from a2d.design.read import parse_design
from tests.benchmarks.timing import best_of, process, report
from tests.support.controls import HEAD, TONE

WANTED = 5.0
MORE = """
R5 = { resistor = "47k", nodes = ["out", "x"] }
C5 = { capacitor = "47n", nodes = ["x", "y"] }
R6 = { resistor = "2k2", nodes = ["y", "z"] }
C6 = { capacitor = "1n", nodes = ["z", "gnd"] }
R7 = { resistor = "100k", nodes = ["z", "gnd"] }
"""


def main():
    spread = '[spread]\nresistors = "1 %"\ncapacitors = "5 %"\npotentiometers = "20 %"\n'
    circuit = TONE.replace('output = "out"', 'output = "z"') + MORE
    model = spread_model(parse_design(HEAD + circuit + spread), np.geomspace(20.0, 20e3, 500))
    assert len(model.parts) == 15
    signal = best_of(3, process("-c", "import scipy.signal")) - best_of(3, process("-c", "import numpy"))
    took = best_of(3, lambda: run_spread(model, 10_000, 1))
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
    lines = [
        f"10,000 units {took:.2f} s, import scipy.signal {signal:.2f} s (beyond numpy)",
        f"peak memory {peak:.0f} MiB (promised below 500)",
    ]
    status = report("10,000 x 500 units over import scipy.signal", took / signal, WANTED, at_least=False, more=lines)
    return status or int(peak >= 500)


if __name__ == "__main__":
    sys.exit(main())
