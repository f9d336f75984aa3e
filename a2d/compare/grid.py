"""Where errors are looked for: a grid that misses no narrow section, and the search between its points."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from a2d.arrays import FloatArray, rising
from a2d.digital.warped import from_z

POINTS = 400  # over the band, logarithmic: 1.7 % apart over three decades
_CLUSTER = np.array([0.0, 0.06, 0.15, 0.3, 0.5, 0.75, 1.0, 1.5, 2.2, 3.2, 4.5])
_NARROW = 0.04  # a bandwidth over f0 below which a section gets points of its own
_NARROW_CLUSTER = np.concatenate([-np.geomspace(4.5, 0.05, 10), [0.0], np.geomspace(0.05, 4.5, 10)])  # half bandwidths
_PEAKS = 4  # local maxima that are refined: the grid may rank close ones wrongly
_ZOOM_POINTS = 17
_ZOOMS = 5  # each narrows the bracket eightfold: 3e-5 of a grid step, an error of 1e-9 at a smooth maximum


def frequency_grid(
    b: FloatArray, a: FloatArray, band_hz: FloatArray, sos: FloatArray | None = None, rate_hz: float | None = None
) -> FloatArray:
    """Frequencies in Hz, rising, over `band_hz` [2], denser around the poles and zeros of sections `b`, `a` [S, 3].

    A pole or zero pair of natural frequency f0 and quality Q bends the response within some f0/Q; the points stand at
    f0·(1 ± t/(2·Q)). A twin's own narrow pairs, `sos` [..., 6] at `rate_hz`, need not lie where the analog ones do: a
    match frequency elsewhere, rounding, or another origin moves them.
    """
    low, high = float(band_hz[0]), float(band_hz[1])
    even = np.geomspace(low, high, POINTS)
    clusters = []
    for c in (a, b):
        pair = (c[..., 0] != 0.0) & (c[..., 2] / np.where(c[..., 0] == 0.0, 1.0, c[..., 0]) > 0.0)
        c2, c1, c0 = (np.abs(c[pair][..., i]) for i in range(3))
        f0 = np.sqrt(c0 / c2) / (2.0 * np.pi)
        width = np.clip(c1 / np.sqrt(c0 * c2), 1e-6, 0.5) * 0.5  # 1/(2Q)
        offsets = width[:, np.newaxis] * np.concatenate([-_CLUSTER[:0:-1], _CLUSTER])
        clusters.append((f0[:, np.newaxis] * (1.0 + offsets)).ravel())
    if sos is not None:
        clusters += [around_narrow(sos[..., k : k + 3], rate_hz) for k in (0, 3)]
    points = np.concatenate([even, *clusters])
    return rising(points, low, high)


def around_narrow(c: FloatArray, rate_hz: float | None) -> FloatArray:
    """Frequencies in Hz around the roots of polynomials `c` [..., 3] that are narrower than the grid resolves."""
    if rate_hz is not None:
        c = from_z(c, np.zeros(c.shape[:-1], dtype=np.bool_))
    c2, c1, c0 = (np.abs(c[..., k]) for k in range(3))
    narrow = (c2 > 0.0) & (c1 * c1 < _NARROW**2 * c0 * c2)
    w0 = np.sqrt(c0[narrow] / c2[narrow])
    f0 = w0 / (2.0 * np.pi) if rate_hz is None else np.arctan(w0) * (rate_hz / np.pi)
    half_width = np.maximum(c1[narrow] / np.sqrt(c0[narrow] * c2[narrow]), 1e-6) * 0.5
    return np.asarray((f0[:, np.newaxis] * (1.0 + half_width[:, np.newaxis] * _NARROW_CLUSTER)).ravel())


def largest_between(
    curves: Callable[[FloatArray], FloatArray], f_hz: FloatArray, values: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """The extreme value of each curve (largest modulus, sign kept) and its frequency, between grid points too.

    Parameters
    ----------
    curves
        From frequencies [..., F] to values [..., F].
    f_hz, values
        The grid [F] and the curves' values on it, [..., F].

    Returns
    -------
    Two arrays [...]: value and frequency in Hz.

    Notes
    -----
    The brackets around the highest local maxima of the modulus are sampled again and again, each time around the best.
    """
    modulus = np.abs(values)
    inner = np.pad(modulus, [(0, 0)] * (modulus.ndim - 1) + [(1, 1)], constant_values=-1.0)
    is_peak = (modulus >= inner[..., :-2]) & (modulus >= inner[..., 2:])
    ranked = np.argsort(np.where(is_peak, modulus, -1.0), axis=-1)[..., -_PEAKS:]
    low, high = f_hz[np.maximum(ranked - 1, 0)], f_hz[np.minimum(ranked + 1, len(f_hz) - 1)]
    steps = np.linspace(0.0, 1.0, _ZOOM_POINTS)
    for _ in range(_ZOOMS):
        f = low[..., np.newaxis] + (high - low)[..., np.newaxis] * steps
        found = curves(f.reshape(*f.shape[:-2], -1)).reshape(f.shape)
        best = np.argmax(np.abs(found), axis=-1)[..., np.newaxis]
        value, at = (np.take_along_axis(x, best, -1)[..., 0] for x in (found, f))
        step = (high - low) / (_ZOOM_POINTS - 1)
        low, high = np.maximum(low, at - step), np.minimum(high, at + step)
    winner = np.argmax(np.abs(value), axis=-1)[..., np.newaxis]
    return np.take_along_axis(value, winner, -1)[..., 0], np.take_along_axis(at, winner, -1)[..., 0]
