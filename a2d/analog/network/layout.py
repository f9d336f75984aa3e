"""A network laid out as equations (modified nodal analysis): which value stands where in the pencil.

The unknowns are the voltages of the nodes, then the currents of the branches whose equation holds a voltage. The
layout is the same for every set of component values, so that thousands of sets share one.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import TypeAlias

import numpy as np

from a2d.analog.network.pencil import Pencil
from a2d.arrays import FloatArray
from a2d.design.network import GROUND

Quantity: TypeAlias = Callable[[FloatArray], FloatArray]


def one(values: FloatArray) -> FloatArray:
    """The quantity of entries that do not depend on any value."""
    return np.ones(values.shape[:-1])


@dataclass(eq=False)
class Layout:
    """The equations under construction; parts add themselves to it.

    Attributes
    ----------
    value_names, nominal
        The values that a set of components consists of, and the network's own.
    unknowns
        The name of each unknown: a node, or `L1#current`.
    impedance
        Ω: currents are counted in volts across it, which brings all entries to a like size. A power of two.
    """

    impedance: float = 1.0
    value_names: list[str] = field(default_factory=list)
    nominal: list[float] = field(default_factory=list)
    unknowns: list[str] = field(default_factory=list)
    quantities: list[Quantity] = field(default_factory=lambda: [one])
    rows: list[int] = field(default_factory=list)
    columns: list[int] = field(default_factory=list)
    coefficients: list[float] = field(default_factory=list)
    which: list[int] = field(default_factory=list)
    reactances: list[tuple[dict[int, float], dict[int, float], int]] = field(default_factory=list)
    e: dict[int, float] = field(default_factory=dict)
    out: dict[int, float] = field(default_factory=dict)
    _nodes: dict[str, int] = field(default_factory=lambda: {GROUND: -1})

    def value(self, name: str, nominal: float) -> int:
        """A new component value; its index in a set."""
        self.value_names.append(name)
        self.nominal.append(float(nominal))
        return len(self.nominal) - 1

    def quantity(self, function: Quantity) -> int:
        """A new function of the set of values that entries are multiples of; its index."""
        self.quantities.append(function)
        return len(self.quantities) - 1

    def node(self, name: str) -> int:
        """The index of a node's voltage, -1 for ground."""
        if name not in self._nodes:
            self._nodes[name] = self.unknown(name)
        return self._nodes[name]

    def unknown(self, name: str) -> int:
        """A new unknown and its equation; their index."""
        self.unknowns.append(name)
        return len(self.unknowns) - 1

    def add(self, row: int, column: int, coefficient: float, quantity: int = 0) -> None:
        """coefficient·quantity into G; ground has neither row nor column."""
        if row >= 0 and column >= 0:
            self.rows.append(row)
            self.columns.append(column)
            self.coefficients.append(coefficient)
            self.which.append(quantity)

    def react(self, acts_on: dict[int, float], sees: dict[int, float], quantity: int) -> None:
        """One reactance: s·quantity·sees into the equations `acts_on`."""
        self.reactances.append((acts_on, sees, quantity))

    def conductance(self, a: int, b: int, quantity: int) -> None:
        """A conductance (in 1/impedance) between two nodes."""
        for row, column, sign in ((a, a, 1.0), (b, b, 1.0), (a, b, -1.0), (b, a, -1.0)):
            self.add(row, column, sign, quantity)

    def branch(self, a: int, b: int, name: str) -> int:
        """A branch from a to b: its current is a new unknown whose equation starts as v(a) - v(b) ... = 0."""
        k = self.unknown(name)
        for node, sign in ((a, 1.0), (b, -1.0)):
            self.add(node, k, sign)
            self.add(k, node, sign)
        return k

    def resistance(self, a: int, b: int, name: str, quantity: int) -> None:
        """A resistance (in units of `impedance`) that may be zero.

        Between a node and itself, as where a wiper is tied to an end, nothing flows: an equation for it would read
        0 = R·i, which at R = 0 leaves the current open.
        """
        if a == b:
            return
        k = self.branch(a, b, name)
        self.add(k, k, -1.0, quantity)

    def pencil(self, values: FloatArray) -> Pencil:
        """The pencil for sets of values [..., V]."""
        n = len(self.unknowns)
        q = np.stack([function(values) for function in self.quantities], axis=-1)
        spread = np.zeros((len(self.quantities), n * n))
        places = np.array(self.rows, dtype=np.int64) * n + np.array(self.columns, dtype=np.int64)
        np.add.at(spread, (np.array(self.which, dtype=np.int64), places), self.coefficients)
        u, v = np.zeros((2, n, len(self.reactances)))
        for k, (acts_on, sees, _) in enumerate(self.reactances):
            _fill(u[:, k], acts_on)
            _fill(v[:, k], sees)
        e, out = np.zeros((2, n))
        _fill(e, self.e)
        _fill(out, self.out)
        entries = ([], [], []) if q.ndim > 1 else (self.rows, self.columns, self._entry_values(q))
        g = (q @ spread).reshape(*q.shape[:-1], n, n)
        return Pencil(g, u, v, q[..., [which for *_, which in self.reactances]], e, out, entries)

    def _entry_values(self, q: FloatArray) -> list[float]:
        return [float(c * q[w]) for c, w in zip(self.coefficients, self.which, strict=True)]


def _fill(column: FloatArray, entries: dict[int, float]) -> None:
    for row, value in entries.items():
        if row >= 0:
            column[row] += value
