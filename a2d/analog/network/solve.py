"""From a network to sections of H(s), checked against the network itself."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from a2d.analog.network.faults import faults
from a2d.analog.network.parts import lay_out
from a2d.analog.network.pencil import Pencil, direct_response
from a2d.analog.network.roots import ZeroPole, zero_pole
from a2d.analog.network.sections import cancellations, cancelled, second_order_sections
from a2d.analog.network.stability import check_stability
from a2d.analog.response import chain_response
from a2d.arrays import ComplexArray, FloatArray
from a2d.design.network import Network
from a2d.errors import NetworkError

CHECK_HZ = np.geomspace(0.1, 1e6, 71)
CHECK_RELATIVE = 1e-8
CHECK_FLOOR = 1e-14  # of the largest response: what double precision knows of a smaller one when it solves directly
_DAMPED = 1e-9  # of |pole|: less damping than this is none


@dataclass(frozen=True, eq=False)
class Solution:
    """H(s) of a network.

    Parameters
    ----------
    b, a
        Shape [S, 3]: second-order sections, coefficients of s², s, 1.
    roots
        Poles, zeros and gain after cancellation, rad/s.
    notes
        What the reader should know: pairs that cancelled.
    """

    b: FloatArray
    a: FloatArray
    roots: ZeroPole
    notes: tuple[str, ...]


def solve_network(network: Network) -> Solution:
    """H(s) of a network as second-order sections.

    Raises
    ------
    NetworkError
        A fault of the drawing (all of them, by name), an unstable or improper network, or sections that do not agree
        with a direct solution of the network from 0.1 Hz to 1 MHz to 1e-8.

    Examples
    --------
    >>> from a2d.design.network import Capacitor, Network, Resistor
    >>> from a2d.design.quantities import Farad, Ohm
    >>> r = Resistor(resistor=Ohm(1e3), nodes=("in", "out"))
    >>> c = Capacitor(capacitor=Farad(1e-6), nodes=("out", "gnd"))
    >>> solution = solve_network(Network(input="in", output="out", parts={"R1": r, "C1": c}))
    >>> [round(float(x), 6) for x in solution.a[0]]
    [0.0, 0.001, 1.0]
    """
    found = faults(network)
    if found:
        raise NetworkError("; ".join(found))
    check_stability(network)
    layout = lay_out(network)
    return solve_pencil(layout.pencil(np.array(layout.nominal)))


def solve_pencil(pencil: Pencil) -> Solution:
    """H(s) of one pencil as second-order sections, checked against the pencil (see `solve_network`)."""
    roots, gone = cancelled(zero_pole(pencil))
    _check_proper(roots)
    solution = Solution(*second_order_sections(roots), roots, cancellations(gone))
    _check_agreement(solution, direct_response(pencil, CHECK_HZ))
    return solution


def _check_proper(roots: ZeroPole) -> None:
    if len(roots.zeros) > len(roots.poles):
        raise NetworkError(
            "the gain rises without end towards high frequencies, which no stable section has "
            "(add the resistance or the op-amp's gain-bandwidth that ends the rise)"
        )
    undamped = roots.poles[roots.poles.real >= -_DAMPED * np.abs(roots.poles)]
    if len(undamped):
        raise NetworkError(
            f"a pole without damping at {abs(undamped[0]) / (2 * np.pi):.4g} Hz: the network rings for ever "
            "(add the resistance that damps it)"
        )


def _check_agreement(solution: Solution, direct: ComplexArray) -> None:
    error = np.abs(chain_response(solution.b, solution.a, CHECK_HZ) - direct)
    allowed = CHECK_RELATIVE * np.abs(direct) + CHECK_FLOOR * np.abs(direct).max()
    worst = int(np.argmax(error / allowed))
    if not np.all(error <= allowed):
        raise NetworkError(
            f"the sections do not agree with the network at {CHECK_HZ[worst]:.4g} Hz "
            f"({error[worst] / abs(direct[worst]):.1e} relative, allowed {CHECK_RELATIVE:g}; values far out of range?)"
        )
