"""How many finite poles and zeros a pencil has, and how many of them at zero, counted without rounding.

Whether a determinant's highest coefficient vanishes cannot be told from floating-point numbers. A double is a
fraction with a power of two below, so the determinant is computed exactly modulo the prime 2⁶¹ - 1, where those
fractions have values too: a coefficient that is zero there is zero (but for one chance in 2⁶¹), and the reverse.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

from a2d.analog.network.pencil import Pencil

PRIME = 2**61 - 1
_SHIFT = 1_234_567_890_123_457  # any number: what is asked for does not depend on it


@dataclass(frozen=True)
class Degree:
    """Of a polynomial in s: its degree, and how often s itself divides it."""

    total: int
    at_zero: int

    @property
    def elsewhere(self) -> int:
        """The number of finite roots other than zero."""
        return self.total - self.at_zero


def pole_degree(pencil: Pencil) -> Degree | None:
    """Of det(G + s·C); None when that is zero for every s."""
    return _degree(pencil, _rows(pencil))


def zero_degree(pencil: Pencil) -> Degree | None:
    """Of the numerator, the determinant of the pencil bordered with source and output."""
    rows = _rows(pencil)
    border = len(rows)
    for i, value in enumerate(pencil.e):
        if value:
            rows[i][border] = _residue(-float(value))
    rows.append({i: _residue(float(value)) for i, value in enumerate(pencil.out) if value})
    return _degree(pencil, rows)


@cache
def _residue(value: float) -> int:
    over, under = value.as_integer_ratio()
    return over * pow(under, -1, PRIME) % PRIME


def _rows(pencil: Pencil) -> list[dict[int, int]]:
    """G + σ·C modulo the prime, one dict a row."""
    rows: list[dict[int, int]] = [{} for _ in pencil.e]
    for i, j, value in zip(*pencil.entries, strict=True):
        rows[i][j] = (rows[i].get(j, 0) + _residue(value)) % PRIME
    for k, c in enumerate(pencil.c):
        scale = _SHIFT * _residue(float(c)) % PRIME
        for i, u in _column(pencil.u[:, k]):
            for j, v in _column(pencil.v[:, k]):
                rows[i][j] = (rows[i].get(j, 0) + scale * u * v) % PRIME
    return rows


def _column(column: object) -> list[tuple[int, int]]:
    return [(i, _residue(float(x))) for i, x in enumerate(column) if x]  # type: ignore[arg-type, var-annotated]


def _degree(pencil: Pencil, rows: list[dict[int, int]]) -> Degree | None:
    n, m = len(rows), len(pencil.c)
    for k in range(m):
        for i, u in _column(pencil.u[:, k]):
            rows[i][n + k] = u
    if not _eliminate(rows, n):
        return None
    solution = [[row.get(n + k, 0) for k in range(m)] for row in rows]
    reduced = []
    for k in range(m):
        c = _residue(float(pencil.c[k]))
        sees = _column(pencil.v[:, k])
        reduced.append([c * sum(v * solution[i][j] for i, v in sees) % PRIME for j in range(m)])
    polynomial = _characteristic(reduced)
    return Degree(m - _multiplicity(polynomial, 0), _multiplicity(polynomial, pow(_SHIFT, -1, PRIME)))


def _eliminate(rows: list[dict[int, int]], n: int) -> bool:
    """Gauss-Jordan in place on the first n columns; rows come out in the order of the unknowns."""
    for column in range(n):
        candidates = [r for r in range(column, n) if rows[r].get(column)]
        if not candidates:
            return False
        pivot = min(candidates, key=lambda r: len(rows[r]))
        rows[column], rows[pivot] = rows[pivot], rows[column]
        inverse = pow(rows[column][column], -1, PRIME)
        row = {j: x * inverse % PRIME for j, x in rows[column].items() if x}
        rows[column] = row
        for r in range(n):
            factor = 0 if r == column else rows[r].pop(column, 0)
            if factor:
                for j, x in row.items():
                    if j != column:
                        rows[r][j] = (rows[r].get(j, 0) - factor * x) % PRIME
    return True


def _characteristic(matrix: list[list[int]]) -> list[int]:
    """det(λ·I - matrix) modulo the prime, constant first, by Hessenberg's form and its recurrence.

    H. Cohen, A Course in Computational Algebraic Number Theory, Springer 1993, algorithm 2.2.9.
    """
    h = _hessenberg(matrix)
    minors = [[1]]
    for k in range(len(h)):
        following = [0, *minors[k]]
        _subtract(following, h[k][k], minors[k])
        product = 1
        for i in range(k - 1, -1, -1):
            product = product * h[i + 1][i] % PRIME
            _subtract(following, product * h[i][k] % PRIME, minors[i])
        minors.append(following)
    return minors[-1]


def _subtract(target: list[int], factor: int, polynomial: list[int]) -> None:
    for i, x in enumerate(polynomial):
        target[i] = (target[i] - factor * x) % PRIME


def _hessenberg(matrix: list[list[int]]) -> list[list[int]]:
    h = [list(row) for row in matrix]
    n = len(h)
    for m in range(1, n - 1):
        pivot = next((i for i in range(m, n) if h[i][m - 1]), None)
        if pivot is None:
            continue
        h[m], h[pivot] = h[pivot], h[m]
        for row in h:
            row[m], row[pivot] = row[pivot], row[m]
        inverse = pow(h[m][m - 1], -1, PRIME)
        for i in range(m + 1, n):
            factor = h[i][m - 1] * inverse % PRIME
            if factor:
                h[i] = [(x - factor * y) % PRIME for x, y in zip(h[i], h[m], strict=True)]
                for row in h:
                    row[m] = (row[m] + factor * row[i]) % PRIME
    return h


def _multiplicity(polynomial: list[int], root: int) -> int:
    """How often λ - root divides the polynomial (constant first)."""
    count, rest = 0, list(polynomial)
    while len(rest) > 1:
        quotient, carry = [], 0
        for coefficient in reversed(rest):
            carry = (carry * root + coefficient) % PRIME
            quotient.append(carry)
        if quotient.pop():
            break
        rest, count = quotient[::-1], count + 1
    return count
