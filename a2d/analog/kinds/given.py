"""Sections given by time constants, or by poles and zeros in Hz and Q."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from a2d import checks
from a2d.analog.roots import sections_of_roots
from a2d.analog.sections import Sections, amplitude, normalised
from a2d.arrays import ComplexArray


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
    """H(s) = k·Π(s - z)/Π(s - p), |H| = `gain` at `reference` (0 Hz when absent); p, z in rad/s.

    The polarity is that of positive k, or of positive H(0) where the reference is 0 Hz.
    """
    sections = sections_of_roots(zeros, poles, 1.0)
    if reference_hz == 0.0 and np.prod(sections.b[:, 2]) / np.prod(sections.a[:, 2]) < 0.0:
        sections = sections_of_roots(zeros, poles, -1.0)
    return normalised(sections, reference_hz, float(amplitude(gain_db)))
