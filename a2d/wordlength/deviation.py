"""How far rounding moves a response: rounded sections against the same sections before rounding."""

from __future__ import annotations

import numpy as np

from a2d.arrays import FloatArray, rising
from a2d.digital.response import chain_response

_AROUND_POLE = np.array([0.0, 0.1, 0.25, 0.5, 0.8, 1.2, 2.0, 3.5, 6.0])
_EVEN_POINTS = 200
FLOOR = 1e-3  # of the largest response: what lies 60 dB below it is masked, and a notch's bottom moves by many dB


def angular_grid(sos: FloatArray, rate_hz: float, band_hz: tuple[float, float], even: int = _EVEN_POINTS) -> FloatArray:
    """Frequencies in Hz, rising, in the band; logarithmic, and denser around poles and zeros of `sos` [S, 6]."""
    low, high = band_hz
    points = [np.geomspace(low, high, even)]
    points.extend(_around_roots(c, rate_hz) for c in (sos[:, :3], sos[:, 3:]))
    f = np.concatenate(points)
    return rising(f, low, high)


def _around_roots(c: FloatArray, rate_hz: float) -> FloatArray:
    """Frequencies around the complex root pairs of polynomials c0 + c1·z⁻¹ + c2·z⁻², `c` [S, 3]; Hz, shape [N]."""
    c0, c1, c2 = c[c[:, 1] ** 2 < 4.0 * c[:, 0] * c[:, 2]].T
    angle = np.arctan2(np.sqrt(4.0 * c0 * c2 - c1 * c1), -c1 * np.sign(c0))
    width = np.clip(np.abs(1.0 - np.sqrt(c2 / c0)), 1e-4 * angle, angle)
    around = width[:, np.newaxis] * np.concatenate([-_AROUND_POLE[:0:-1], _AROUND_POLE])
    return np.asarray(((angle[:, np.newaxis] + around) * rate_hz / (2.0 * np.pi)).ravel())


def deviation_db(exact: FloatArray, rounded: FloatArray, rate_hz: float, band_hz: tuple[float, float]) -> float:
    """The largest |level difference| in dB of two cascades [S, 6] over the band; infinite at a pole on the circle."""
    f = angular_grid(np.concatenate([exact, rounded]), rate_hz, band_hz)
    with np.errstate(divide="ignore", invalid="ignore"):
        h, r = (np.abs(chain_response(sos, f, rate_hz)) for sos in (exact, rounded))
        floor = FLOOR * np.max(h)
        level = 20.0 * np.abs(np.log10(np.maximum(r, floor) / np.maximum(h, floor)))
    return float(np.max(np.nan_to_num(level, nan=np.inf)))
