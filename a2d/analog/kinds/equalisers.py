"""Peaking and shelving sections, and what Q and bandwidth of a peaking section mean.

The W3C Note "Audio EQ Cookbook" (8 June 2021) gives H(s) of peaking and second-order shelves; A = 10^(gain/40).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from a2d import checks
from a2d.analog.kinds.filters import frequency, pole_q
from a2d.analog.sections import Sections, amplitude, single
from a2d.arrays import ArrayLike, FloatArray

_HALF_LN2 = 0.5 * np.log(2.0)


def peaking(f0: ArrayLike, q: ArrayLike, gain_db: ArrayLike, *, q_meaning: str = "w3c") -> Sections:
    """H(s) = (s² + s·A/Q + 1)/(s² + s/(A·Q) + 1): boost or cut G = A² at f0; a cut mirrors its boost.

    `q_meaning` says which Q is given: `w3c` the one in the equation; `pole` (and `constant_unmirrored`, the same H(s))
    the pole Q, H(s) = (s² + s·G/Q + 1)/(s² + s/Q + 1), whose cut does not mirror its boost; `constant_mirrored` the
    pole Q of the boost and the zero Q of the cut.
    """
    own = W3C_Q[q_meaning](pole_q(q), amplitude(gain_db))
    a = np.sqrt(amplitude(gain_db))
    return single((1.0, a / own, 1.0), (1.0, 1.0 / (a * own), 1.0), frequency(f0))


def w3c_q_of_bandwidth(octaves: ArrayLike, gain_db: ArrayLike, at: str = "half_gain") -> FloatArray:
    """The W3C Q of a peaking section from its bandwidth in octaves.

    At half gain (in dB), 1/Q = 2·sinh(ln2/2·N) (W3C note). At -3 dB from the peak (of a boost; +3 dB from the bottom
    of a cut), with x = 2·sinh(ln2/2·N): pole damping x·sqrt(1 - 2/G²) of the boost.
    """
    x = 2.0 * np.sinh(_HALF_LN2 * checks.positive("bandwidth", octaves))
    if at == "half_gain":
        return np.asarray(1.0 / x)
    boost = amplitude(np.abs(checks.finite("gain", gain_db)))
    if np.any(boost**2 <= 2.0):
        checks.between("gain of a section whose bandwidth is at -3 dB", np.abs(gain_db), 3.0103, 200.0, "dB")
    return np.asarray(1.0 / (np.sqrt(boost) * x * np.sqrt(1.0 - 2.0 / boost**2)))


# From the given Q and the gain as a factor to the W3C note's Q.
W3C_Q: dict[str, Callable[[FloatArray, FloatArray], FloatArray]] = {
    "w3c": lambda q, g: q,
    "pole": lambda q, g: np.asarray(q / np.sqrt(g)),
    "constant_unmirrored": lambda q, g: np.asarray(q / np.sqrt(g)),
    "constant_mirrored": lambda q, g: np.asarray(q / np.sqrt(np.maximum(g, 1.0 / g))),
}


@dataclass(frozen=True)
class PeakingQ:
    """One peaking section's Q by every meaning; a bandwidth that does not exist at this gain is None.

    Attributes
    ----------
    w3c, pole, constant_mirrored
        The Q that gives this section under that meaning.
    octaves_at_half_gain, octaves_at_3_db
        Bandwidths in octaves.
    """

    w3c: float
    pole: float
    constant_mirrored: float
    octaves_at_half_gain: float
    octaves_at_3_db: float | None


def equivalent_q(w3c_q: float, gain_db: float) -> PeakingQ:
    """All the equivalents of a peaking section's Q."""
    g = float(amplitude(gain_db))
    boost = max(g, 1.0 / g)
    octaves = float(np.arcsinh(0.5 / w3c_q) / _HALF_LN2)
    at_3_db = None
    if boost**2 > 2.0:
        x = 1.0 / (w3c_q * np.sqrt(boost) * np.sqrt(1.0 - 2.0 / boost**2))
        at_3_db = float(np.arcsinh(0.5 * x) / _HALF_LN2)
    return PeakingQ(w3c_q, float(w3c_q * np.sqrt(g)), float(w3c_q * np.sqrt(boost)), octaves, at_3_db)


def shelf_q_of_slope(slope: ArrayLike, gain_db: ArrayLike) -> FloatArray:
    """1/Q = sqrt((A + 1/A)(1/S - 1) + 2) (W3C note)."""
    a = np.sqrt(amplitude(gain_db))
    inside = (a + 1.0 / a) * (1.0 / checks.positive("slope", slope) - 1.0) + 2.0
    return np.asarray(1.0 / np.sqrt(checks.positive("1/Q² of a shelf of this slope", inside)))


def low_shelf(f0: ArrayLike, gain_db: ArrayLike, q: ArrayLike | None = None) -> Sections:
    """H(s) = A·(s² + s·√A/Q + A)/(A·s² + s·√A/Q + 1); first order, without q: H(s) = (s + A)/(s + 1/A)."""
    a, f = np.sqrt(amplitude(gain_db)), frequency(f0)
    if q is None:
        return single((0.0, 1.0, a), (0.0, 1.0, 1.0 / a), f)
    middle = np.sqrt(a) / pole_q(q)
    return single((a, a * middle, a * a), (a, middle, 1.0), f)


def high_shelf(f0: ArrayLike, gain_db: ArrayLike, q: ArrayLike | None = None) -> Sections:
    """H(s) = A·(A·s² + s·√A/Q + 1)/(s² + s·√A/Q + A); first order, without q: H(s) = (A·s + 1)/(s/A + 1)."""
    a, f = np.sqrt(amplitude(gain_db)), frequency(f0)
    if q is None:
        return single((0.0, a, 1.0), (0.0, 1.0 / a, 1.0), f)
    middle = np.sqrt(a) / pole_q(q)
    return single((a * a, a * middle, a), (1.0, middle, a), f)
