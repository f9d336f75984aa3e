"""Poles and zeros of the sections, in s and in z."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from a2d.analog.chain import AnalogChain
from a2d.arrays import BoolArray, ComplexArray, FloatArray, IntArray
from a2d.digital.twin import Twin


@dataclass(frozen=True, eq=False)
class Roots:
    """N roots: complex `values`, `is_pole`, and the index of the `section` that each belongs to, all [N]."""

    values: ComplexArray
    is_pole: BoolArray
    section: IntArray

    def where(self, chosen: BoolArray) -> Roots:
        """Only the roots for which `chosen` [N] is true."""
        return Roots(self.values[chosen], self.is_pole[chosen], self.section[chosen])


def s_roots(chain: AnalogChain) -> Roots:
    """The finite poles and zeros of H(s), in rad/s."""
    return _collect(list(chain.b), list(chain.a))


def z_roots(twin: Twin) -> Roots:
    """Poles and zeros of H(z). What a first-order row has at z = 0, above and below, cancels and is left out."""
    rows = [(row[:3], row[3:]) for row in twin.sos]
    pairs = [(b[:2], a[:2]) if b[2] == 0.0 and a[2] == 0.0 else (b, a) for b, a in rows]
    pairs = [(b[:1], a[:1]) if b[-1] == 0.0 and a[-1] == 0.0 and len(b) == 2 else (b, a) for b, a in pairs]
    return _collect([b for b, _ in pairs], [a for _, a in pairs])


def s_of_z(roots: Roots, sample_rate_hz: float) -> Roots:
    """Where roots in z lie in the s plane: fs·ln z, the place that rings and decays alike; z = 0 has none."""
    there = roots.where(roots.values != 0.0)
    return Roots(np.asarray(sample_rate_hz * np.log(there.values), dtype=np.complex128), there.is_pole, there.section)


def _collect(numerators: list[FloatArray], denominators: list[FloatArray]) -> Roots:
    values: list[complex] = []
    is_pole: list[bool] = []
    section: list[int] = []
    for polynomials, pole in ((denominators, True), (numerators, False)):
        for index, polynomial in enumerate(polynomials):
            found = quadratic_roots(polynomial)
            values += found
            is_pole += [pole] * len(found)
            section += [index] * len(found)
    return Roots(
        np.array(values, dtype=np.complex128), np.array(is_pole, dtype=bool), np.array(section, dtype=np.int64)
    )


def quadratic_roots(c: FloatArray) -> list[complex]:
    """The roots of c[0]·x² + c[1]·x + c[2] or a shorter polynomial, without cancellation between close terms.

    q = -(c1 + sgn(c1)·sqrt(c1² - 4·c0·c2))/2, roots q/c0 and c2/q (W. H. Press et al., Numerical Recipes, 3rd ed.,
    section 5.6).
    """
    trimmed = np.trim_zeros(np.asarray(c, dtype=np.float64), "f")
    if trimmed.size < 2:
        return []
    if trimmed.size == 2:
        return [complex(-trimmed[1] / trimmed[0])]
    c0, c1, c2 = (float(v) for v in trimmed)
    discriminant = c1 * c1 - 4.0 * c0 * c2
    if discriminant < 0.0:
        real, imaginary = -c1 / (2.0 * c0), abs(np.sqrt(-discriminant) / (2.0 * c0))
        return [complex(real, imaginary), complex(real, -imaginary)]
    q = -0.5 * (c1 + np.copysign(np.sqrt(discriminant), c1))
    return [complex(q / c0), complex(c2 / q if q != 0.0 else 0.0)]
