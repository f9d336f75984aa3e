"""Polynomials in s to sections."""

from __future__ import annotations

import numpy as np

from a2d import checks
from a2d.analog.response import chain_response
from a2d.analog.roots import sections_of_roots
from a2d.analog.sections import Sections, natural_frequency_hz
from a2d.arrays import ArrayLike, FloatArray
from a2d.errors import ParameterError


def polynomial_sections(b: ArrayLike, a: ArrayLike) -> Sections:
    """H(s) = Σ b·s^k/Σ a·s^k, coefficients of falling powers of s in rad/s.

    Up to second order the coefficients are taken as they are. Beyond, the polynomials are factored (frequency scaled
    first) and the sections are held against them.

    Raises
    ------
    ParameterError
        The numerator is of higher order, or a polynomial is too ill-conditioned to be factored to 1e-9.
    """
    num = np.trim_zeros(np.atleast_1d(checks.finite("b", b)), "f")
    den = np.trim_zeros(np.atleast_1d(checks.finite("a", a)), "f")
    if len(num) == 0 or len(den) == 0 or len(num) > len(den):
        raise ParameterError("b must be of no higher order than a, and neither all zero")
    if len(den) <= 3:
        return as_given(np.pad(num, (3 - len(num), 0)), np.pad(den, (3 - len(den), 0)))
    return _factored(num, den)


def as_given(b: ArrayLike, a: ArrayLike) -> Sections:
    """One section from its coefficients [3]."""
    rows_b, rows_a = np.atleast_2d(np.asarray(b, dtype=np.float64)), np.atleast_2d(np.asarray(a, dtype=np.float64))
    return Sections(rows_b, rows_a, natural_frequency_hz(rows_b, rows_a))


def _factored(num: FloatArray, den: FloatArray) -> Sections:
    """Sections of a polynomial of order three and more, checked where its poles and zeros lie."""
    nonzero = np.flatnonzero(den)
    span = nonzero[-1] - nonzero[0]
    scale = float(np.abs(den[nonzero[-1]] / den[nonzero[0]]) ** (1.0 / span)) if span else 1.0
    powers = scale ** np.arange(len(den) - 1, -1, -1.0)
    scaled_num, scaled_den = num * powers[len(den) - len(num) :], den * powers
    zeros, poles = (np.asarray(np.roots(c) * scale, dtype=np.complex128) for c in (scaled_num, scaled_den))
    sections = sections_of_roots(zeros, poles, float(num[0] / den[0]))
    w = np.multiply.outer([0.5, 1.0, 2.0], np.abs(np.concatenate([poles, zeros[zeros != 0.0]]))).ravel()
    given = np.polyval(scaled_num, 1j * w / scale) / np.polyval(scaled_den, 1j * w / scale)
    worst = float(np.max(np.abs(chain_response(sections.b, sections.a, w / (2.0 * np.pi)) / given - 1.0)))
    if not worst < 1e-9:
        raise ParameterError(
            f"the polynomial is too ill-conditioned to be factored (error {worst:.1e}, allowed 1e-9); "
            "give it as sections or as poles and zeros"
        )
    return sections
