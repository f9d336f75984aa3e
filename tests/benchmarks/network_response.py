"""Many sets of component values at once against a loop of numpy solves a set and frequency.

    python -m tests.benchmarks.network_response

10,000 sets of a presence band (two op-amp stages with pot, coil and finite op-amps) at 200 frequencies. The loop has
its matrices ready and only adds and solves; it is timed on 50 of the sets and scaled up, and its responses are the
check of ours.
"""

import resource
import sys
import time

import numpy as np

from a2d.analog.network.parts import lay_out
from a2d.analog.network.response import network_response, nominal_values
from tests.support.networks import c, coil, network, one_pole, opamp, pot, r

SETS, FREQUENCIES, WANTED = 10_000, 200, 50.0


def band():
    return network(
        {
            "R1": r(1e4, "in", "b"),
            "R2": r(1e4, "b", "out"),
            "P1": pot(1e4, "in", "w", "out", 0.3),
            "C1": c(39e-9, "w", "x"),
            "L1": coil(13e-3, "x", "gnd", resistance=4.0),
            "R3": r(1e4, "out", "gnd"),
            "U1": opamp("gnd", "b", "out", one_pole(3e6, dc_gain=100.0)),
        }
    )


def main():
    net = band()
    rng = np.random.default_rng(1)
    nominal = nominal_values(net)
    values = nominal * rng.uniform(0.9, 1.1, (SETS, len(nominal)))
    f = np.geomspace(20.0, 20_000.0, FREQUENCIES)
    network_response(net, values[:100], f)
    start = time.perf_counter()
    ours = network_response(net, values, f)
    vectorised = time.perf_counter() - start
    layout, checked = lay_out(net), 50
    start = time.perf_counter()
    loop = np.empty((checked, FREQUENCIES), dtype=complex)
    for i in range(checked):
        pencil = layout.pencil(values[i])
        susceptance = pencil.susceptance()
        for k, frequency in enumerate(f):
            x = np.linalg.solve(pencil.g + 2j * np.pi * frequency * susceptance, pencil.e)
            loop[i, k] = pencil.out @ x
    looped = (time.perf_counter() - start) * SETS / checked
    error = np.max(np.abs(ours[:checked] - loop)) / np.max(np.abs(loop))
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
    ratio = looped / vectorised
    print(f"{vectorised:.3f} s against {looped:.1f} s: {ratio:.0f} times as fast (wanted {WANTED:g})")
    print(f"largest difference {error:.1e} of the largest response; peak memory {peak:.0f} MiB")
    return 0 if ratio >= WANTED and error < 1e-10 else 1


if __name__ == "__main__":
    sys.exit(main())
