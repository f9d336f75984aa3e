"""Third-octave bands of IEC 61260-1:2014, base ten."""

from __future__ import annotations

import numpy as np

from a2d.arrays import FloatArray


def third_octaves(low_hz: float, high_hz: float) -> tuple[FloatArray, FloatArray]:
    """Exact mid-band frequencies 1000·10^(k/10) whose bands lie within `low_hz` to `high_hz`, and their edges.

    Returns
    -------
    Centres [B] and edges [B, 2] in Hz; the edges are the centre times 10^(±1/20).
    """
    k = np.arange(
        np.ceil(10 * np.log10(low_hz / 1e3) + 0.5 - 1e-9), np.floor(10 * np.log10(high_hz / 1e3) - 0.5 + 1e-9) + 1
    )
    centres = 1e3 * 10.0 ** (k / 10.0)
    return centres, centres[:, np.newaxis] * 10.0 ** np.array([-0.05, 0.05])


def band_sums(f_hz: FloatArray, power: FloatArray, edges_hz: FloatArray) -> FloatArray:
    """The sum of `power` [..., F] on an even grid `f_hz` [F] within each band [B, 2]; bins count by their overlap."""
    step = f_hz[1] - f_hz[0]
    whole = np.concatenate([np.zeros((*power.shape[:-1], 1)), np.cumsum(power, axis=-1)], axis=-1)
    borders = np.concatenate([f_hz - step / 2, f_hz[-1:] + step / 2])
    flat = whole.reshape(-1, whole.shape[-1])
    upper, lower = (np.stack([np.interp(edges_hz[:, i], borders, row) for row in flat]) for i in (1, 0))
    return np.asarray((upper - lower).reshape(*power.shape[:-1], len(edges_hz)))
