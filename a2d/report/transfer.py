"""H(s) of a section in writing: the fraction, poles and zeros as frequencies and Q."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from a2d.analog.chain import AnalogChain
from a2d.arrays import FloatArray
from a2d.report.roots import quadratic_roots
from a2d.report.text import hertz_with_unit

_SUPERSCRIPTS = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")
ON_AXIS = 1e-9  # |Re s|/|s| below which a pair is taken to lie on the axis


@dataclass(frozen=True)
class Transfer:
    """One section in writing: both polynomials (s in rad/s, highest power of the denominator 1), poles and zeros."""

    name: str
    numerator: str
    denominator: str
    poles: tuple[str, ...]
    zeros: tuple[str, ...]


def transfers(chain: AnalogChain) -> tuple[Transfer, ...]:
    """Each section of a chain in writing."""
    rows = []
    for name, b, a in zip(chain.names, chain.b, chain.a, strict=True):
        lead = a[np.argmax(a != 0.0)]
        poles, zeros = root_texts(quadratic_roots(a)), root_texts(quadratic_roots(b))
        rows.append(Transfer(name, polynomial_text(b / lead), polynomial_text(a / lead), poles, zeros))
    return tuple(rows)


def polynomial_text(c: FloatArray) -> str:
    """`c` [3] as c2·s² + c1·s + c0, without what is zero.

    >>> polynomial_text(np.array([1.0, -1250.0, 3e9]))
    's² − 1250 s + 3×10⁹'
    """
    terms = []
    for value, power in zip(c, (" s²", " s", ""), strict=True):
        if value != 0.0:
            size = number_text(abs(float(value)))
            sign = "−" if value < 0.0 else "+"
            terms.append((sign, power.strip() if size == "1" and power else size + power))
    if not terms:
        return "0"
    first = ("−" if terms[0][0] == "−" else "") + terms[0][1]
    return first + "".join(f" {sign} {term}" for sign, term in terms[1:])


def number_text(value: float) -> str:
    """Six digits, with a power of ten where it is long.

    >>> number_text(0.25), number_text(4.0442e8)
    ('0.25', '4.0442×10⁸')
    """
    if 1e-3 <= abs(value) < 1e5:
        return f"{value:.6g}"
    mantissa, _, exponent = f"{value:.5e}".partition("e")
    return f"{mantissa.rstrip('0').rstrip('.')}×10{str(int(exponent)).translate(_SUPERSCRIPTS)}"


def root_texts(roots: list[complex]) -> tuple[str, ...]:
    """A conjugate pair as one text, each real root as one.

    >>> root_texts([complex(-628.3185307, 0.0)])
    ('100 Hz, real',)
    """
    return tuple(_root_text(root) for root in roots if root.imag >= 0.0)


def _root_text(root: complex) -> str:
    size = abs(root)
    if size == 0.0:
        return "0 Hz"
    place = ", right half plane" if root.real > ON_AXIS * size else ""
    frequency = hertz_with_unit(size / (2.0 * np.pi))
    if root.imag == 0.0:
        return f"{frequency}, real{place}"
    if abs(root.real) <= ON_AXIS * size:
        return f"{frequency}, pair on the axis"
    return f"{frequency}, Q {size / (2.0 * abs(root.real)):.4g}{place}"
