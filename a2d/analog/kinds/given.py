"""Sections given by time constants, by poles and zeros in Hz and Q, or by polynomials in s."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from a2d import checks
from a2d.analog.chain import natural_frequency_hz
from a2d.analog.response import chain_response
from a2d.analog.roots import sections_of_roots
from a2d.analog.sections import Sections, amplitude, normalised
from a2d.arrays import ArrayLike, ComplexArray, FloatArray
from a2d.errors import ParameterError


def time_constants(
    poles: Sequence[float] = (),
    zeros: Sequence[float] = (),
    highpass: Sequence[float] = (),
    gain_db: float = 0.0,
    reference_hz: float | None = None,
) -> Sections:
    """H(s) = G·Π(1 + s·zero)/Π(1 + s·pole)·Π(s·t/(1 + s·t)) with time constants in seconds, t those of `highpass`.

    `gain_db` is the factor G, or, with `reference_hz`, |H| there.
    """
    tau_p, tau_z, tau_h = (
        checks.positive(n, v, "s") for n, v in (("poles", poles), ("zeros", zeros), ("highpass", highpass))
    )
    all_poles = -1.0 / np.concatenate([tau_p, tau_h])
    all_zeros = np.concatenate([-1.0 / tau_z, np.zeros(len(tau_h))])
    gain = np.prod(tau_z) / np.prod(tau_p) * amplitude(gain_db)
    sections = sections_of_roots(all_zeros.astype(np.complex128), all_poles.astype(np.complex128), float(gain))
    return sections if reference_hz is None else normalised(sections, reference_hz, float(amplitude(gain_db)))


def root_pair(f0: float, q: float | None = None, *, axis: bool = False, right: bool = False) -> ComplexArray:
    """Roots in rad/s: real at -2π·f0; a pair of natural frequency f0 with `q`; ±j2π·f0 on the `axis`."""
    w0 = 2.0 * np.pi * f0
    if axis:
        return np.array([1j * w0, -1j * w0])
    if q is None:
        return np.array([-w0 if not right else w0], dtype=np.complex128)
    real = -w0 / (2.0 * q) * (-1.0 if right else 1.0)
    imag = w0 * np.sqrt(max(1.0 - 1.0 / (4.0 * q * q), 0.0))
    return np.array([real + 1j * imag, real - 1j * imag])


def pole_zero(poles: ComplexArray, zeros: ComplexArray, gain_db: float = 0.0, reference_hz: float = 0.0) -> Sections:
    """H(s) = k·Π(s - z)/Π(s - p), with |H| = `gain_db` at `reference_hz`; roots in rad/s (`root_pair`).

    The polarity is that of positive k, or of positive H(0) where the reference is 0 Hz.
    """
    sections = sections_of_roots(zeros, poles, 1.0)
    if reference_hz == 0.0 and np.prod(sections.b[:, 2]) / np.prod(sections.a[:, 2]) < 0.0:
        sections = sections_of_roots(zeros, poles, -1.0)
    return normalised(sections, reference_hz, float(amplitude(gain_db)))


def polynomial(b: ArrayLike, a: ArrayLike) -> Sections:
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
