"""The bilinear transform, prewarped so that one frequency is exact."""

from __future__ import annotations

import numpy as np

from a2d.arrays import FloatArray, IntArray


def bilinear(
    b: FloatArray, a: FloatArray, sample_rate_hz: FloatArray, match_hz: FloatArray, band_hz: FloatArray
) -> FloatArray:
    """Second-order sections whose response at `match_hz` is that of the analog sections.

    s is replaced by k·(1 - z⁻¹)/(1 + z⁻¹) with k = w/tan(w/(2·fs)), w = 2π·match (e.g. Oppenheim and Schafer,
    Discrete-Time Signal Processing, 3rd ed., section 7.2.2). First-order sections stay first order, a gain stays a
    gain: the common factor 1 + z⁻¹ is never written.

    Parameters
    ----------
    b, a
        Shape [..., 3], coefficients of s², s, 1; s in rad/s.
    sample_rate_hz, match_hz
        Shape [...] or broadcastable to it, Hz; match below half the sample rate (checked by the caller).
    band_hz
        Not used by this method.

    Returns
    -------
    Shape [..., 6]: b0, b1, b2, 1, a1, a2.
    """
    del band_hz
    half_angle = np.pi * match_hz / sample_rate_hz
    k = 2.0 * np.pi * match_hz / np.tan(half_angle)
    order = np.where(
        (b[..., 0] != 0.0) | (a[..., 0] != 0.0), 2, np.where((b[..., 1] != 0.0) | (a[..., 1] != 0.0), 1, 0)
    )
    sos = np.empty((*np.broadcast_shapes(k.shape, order.shape), 6))
    _substitute(b, k, order, sos[..., :3])
    _substitute(a, k, order, sos[..., 3:])
    sos *= (1.0 / sos[..., 3])[..., np.newaxis]
    sos[..., 3] = 1.0
    return sos


def _substitute(c: FloatArray, k: FloatArray, order: IntArray, out: FloatArray) -> None:
    """Write the polynomial in z⁻¹ that c2·s² + c1·s + c0 becomes into `out` [..., 3].

    Times (1 + z⁻¹)^order it is c2·k²·(1 - z⁻¹)² + c1·k·(1 - z⁻¹)(1 + z⁻¹) + c0·(1 + z⁻¹)², and one or two powers
    less for sections of lower order.
    """
    square, linear, constant = c[..., 0] * (k * k), c[..., 1] * k, c[..., 2]
    ends = square + constant
    out[..., 0] = ends + linear
    out[..., 1] = np.where(order == 2, 2.0 * (constant - square), np.where(order == 1, constant - linear, 0.0))
    out[..., 2] = np.where(order == 2, ends - linear, 0.0)
