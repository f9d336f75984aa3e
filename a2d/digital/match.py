"""Where each section's twin is exact when the design does not say."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from a2d.arrays import FloatArray


def match_points(
    f0_hz: FloatArray, stated_hz: Sequence[float | None], found: Sequence[bool], band_hz: tuple[float, float]
) -> FloatArray:
    """The match frequency of each section, Hz, shape [S].

    Parameters
    ----------
    f0_hz
        Shape [S]: the sections' own frequencies.
    stated_hz
        What the design states for each, None where it does not.
    found
        Whether a section's f0 was found by solving a circuit, and not given by the design.
    band_hz
        The band that matters.

    Notes
    -----
    Circuits have poles far above the band, from a small capacitor across a resistor or from an op-amp, and no section
    can be exact at or above half the sample rate. One found above the band is matched at the band's upper end. An f0
    that the design gives is never moved: where it cannot be matched the design has to say what else.
    """
    top = band_hz[1]
    own = np.where(np.asarray(found, dtype=bool) & (f0_hz > top), top, f0_hz)
    return np.array([f0 if match is None else match for match, f0 in zip(stated_hz, own, strict=True)])
