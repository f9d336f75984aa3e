"""Butterworth, Bessel and Chebyshev filters of order n, split into sections.

Prototype poles in closed form (e.g. Zverev, Handbook of Filter Synthesis, 1967, chapter 3; Franco, Design with
Operational Amplifiers and Analog Integrated Circuits, 3rd ed., chapter 4); the Bessel poles are the roots of the
reverse Bessel polynomial.
"""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np

from a2d import checks
from a2d.analog.roots import sections_of_roots
from a2d.analog.sections import Sections, amplitude, normalised
from a2d.arrays import ComplexArray

HIGHEST_ORDER = 20


def butterworth_poles(order: int) -> ComplexArray:
    """H(s) = G·Π(-p)/Π(s - p), the poles p of |H|² = G²/(1 + w^2n), -3.01 dB at f0 (1 rad/s);
    high-pass by s → 1/s, band-pass by s → (s² + w1·w2)/(s·(w2 - w1)).
    """
    n = checks.whole("order", order, 1, HIGHEST_ORDER)
    return _exact_conjugates(np.exp(1j * np.pi * (2.0 * np.arange(n) + n + 1.0) / (2.0 * n)))


def chebyshev_poles(order: int, ripple_db: float, edge: str = "ripple") -> ComplexArray:
    """H(s) = G0·Π(-p)/Π(s - p), the poles p of |H|² = G²/(1 + ε²·Tn(w)²) (type I), ripple = 10·lg(1 + ε²), peak G;
    f0 (1 rad/s) ends the ripple band, or is 3.01 dB below the peak (`-3 dB`);
    high-pass by s → 1/s, band-pass by s → (s² + w1·w2)/(s·(w2 - w1)).
    """
    n = checks.whole("order", order, 1, HIGHEST_ORDER)
    epsilon = math.sqrt(math.expm1(float(checks.positive("ripple", ripple_db, "dB")) * math.log(10.0) / 10.0))
    mu = math.asinh(1.0 / epsilon) / n
    poles = -np.sinh(mu + 1j * np.pi * (2.0 * np.arange(n) + 1.0 - n) / (2.0 * n))
    if edge == "-3 dB":
        poles = poles / math.cosh(math.acosh(1.0 / epsilon) / n)
    return _exact_conjugates(poles)


def bessel_poles(order: int, normalisation: str = "magnitude") -> ComplexArray:
    """H(s) = G·θn(0)/θn(c·s), θn the reverse Bessel polynomial of order n, and c such that f0 (1 rad/s) is at -3.01 dB
    (`magnitude`), where the asymptotes meet (`phase`), or 1/(2π·delay at d.c.) (`delay`);
    high-pass by s → 1/s, band-pass by s → (s² + w1·w2)/(s·(w2 - w1)).
    """
    n = checks.whole("order", order, 1, HIGHEST_ORDER)
    delay_poles = _reverse_bessel_roots(n)
    return delay_poles / BESSEL_SCALES[normalisation](delay_poles)


def _bessel_corner(poles: ComplexArray) -> float:
    """The frequency at which Π|p|²/|jw - p|² is one half, by bisection of a falling function."""
    low, high = 0.0, 2.0 * float(np.abs(poles).max())
    while high - low > 4e-16 * high:
        middle = 0.5 * (low + high)
        if middle in (low, high):
            break
        power = float(np.prod(np.abs(poles) ** 2 / np.abs(1j * middle - poles) ** 2))
        low, high = (middle, high) if power > 0.5 else (low, middle)
    return 0.5 * (low + high)


BESSEL_SCALES: dict[str, Callable[[ComplexArray], float]] = {
    "magnitude": _bessel_corner,
    "phase": lambda poles: float(np.exp(np.mean(np.log(np.abs(poles))))),
    "delay": lambda poles: 1.0,
}


def _reverse_bessel_roots(n: int) -> ComplexArray:
    """Roots of Σ (2n-k)!/(2^(n-k)·k!·(n-k)!)·s^k: companion eigenvalues, then Newton steps in whole numbers, since
    the polynomial's own values drown in rounding at high order.
    """
    c = [math.factorial(2 * n - k) // (2 ** (n - k) * math.factorial(k) * math.factorial(n - k)) for k in range(n + 1)]
    scale = float(c[0] ** (1.0 / n))
    roots = np.roots([c[k] * scale ** (k - n) for k in range(n, -1, -1)]) * scale
    for _ in range(4):
        roots = roots - np.array([_newton_step(c, complex(root)) for root in roots])
    return _exact_conjugates(np.asarray(roots, dtype=np.complex128))


def _newton_step(ascending: list[int], root: complex, bits: int = 60) -> complex:
    """P/P' at `root`, by Horner's rule in whole numbers scaled by 2^bits a power."""
    x, y = round(root.real * 2**bits), round(root.imag * 2**bits)
    value, slope = (ascending[-1], 0), (0, 0)
    for power, c in enumerate(reversed(ascending[:-1]), start=1):
        slope = (
            slope[0] * x - slope[1] * y + (value[0] << bits),
            slope[0] * y + slope[1] * x + (value[1] << bits),
        )
        value = (value[0] * x - value[1] * y + (c << bits * power), value[0] * y + value[1] * x)
    square = slope[0] ** 2 + slope[1] ** 2
    real, imag = value[0] * slope[0] + value[1] * slope[1], value[1] * slope[0] - value[0] * slope[1]
    return complex(real / square, imag / square)


def _exact_conjugates(poles: ComplexArray) -> ComplexArray:
    """The same poles with exact conjugates and, at odd order, an exactly real one."""
    ordered = poles[np.argsort(-poles.imag)]
    half = len(poles) // 2
    real = ordered[half : len(poles) - half].real.astype(np.complex128)
    return np.concatenate([ordered[:half], np.conj(ordered[:half]), real])


def lowpass_of(poles: ComplexArray, f0: float, gain_db: float) -> Sections:
    """Low-pass, s -> s/w0, with `gain_db` at d.c."""
    w0 = 2.0 * np.pi * float(checks.positive("f0", f0, "Hz"))
    sections = sections_of_roots(np.empty(0, dtype=np.complex128), poles * w0, 1.0)
    return normalised(sections, 0.0, float(amplitude(gain_db)))


def highpass_of(poles: ComplexArray, f0: float, gain_db: float) -> Sections:
    """High-pass, s -> w0/s, with `gain_db` at infinite frequency."""
    w0 = 2.0 * np.pi * float(checks.positive("f0", f0, "Hz"))
    return sections_of_roots(np.zeros(len(poles), dtype=np.complex128), w0 / poles, float(amplitude(gain_db)))


def bandpass_of(poles: ComplexArray, band: tuple[float, float], gain_db: float) -> Sections:
    """Band-pass, s -> (s² + w1·w2)/(s·(w2 - w1)) with the band's ends w1, w2; `gain_db` at the centre sqrt(w1·w2)."""
    low, high = checks.positive("band", band, "Hz")
    centre = float(np.sqrt(low * high))
    half = poles * np.pi * (high - low)
    spread = np.sqrt(half**2 - (2.0 * np.pi * centre) ** 2)
    sections = sections_of_roots(np.zeros(len(poles), dtype=np.complex128), _conjugate_pairs(half, spread), 1.0)
    return normalised(sections, centre, float(amplitude(gain_db)))


def _conjugate_pairs(half: ComplexArray, spread: ComplexArray) -> ComplexArray:
    """half ± spread with exact conjugates: those of a pole's conjugate are taken from the pole itself."""
    upper, real = half.imag > 0.0, half.imag == 0.0
    first = np.concatenate([half[upper] + spread[upper], half[upper] - spread[upper]])
    alone = np.concatenate([half[real] + spread[real], half[real] - spread[real]])
    return np.concatenate([first, np.conj(first), alone])


def chebyshev_floor_db(order: int, ripple_db: float) -> float:
    """Gain of a Chebyshev filter at d.c. (or infinity, or the centre) re its peak: ripple's bottom at even order."""
    return -ripple_db if order % 2 == 0 else 0.0
