"""The shapes that a fit tries: sections whose parameters are known to an engineer, and free poles and zeros.

A shape's parameters are a vector: frequencies and Q as logarithms, gains in dB. Poles lie in the left half-plane
whatever the vector holds.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from a2d.analog.kinds import equalisers, filters
from a2d.analog.sections import Sections
from a2d.arrays import FloatArray

SHELF_Q = (0.25, 2.0)  # a shelf that overshoots more is a peak and a shelf
GAIN_RANGE = (-36.0, 36.0)
BEYOND, FAR_BEYOND = 1.5, 10.0  # how far outside the data a bell or shelf, and a mere pole, can be told


@dataclass(frozen=True)
class Shape:
    """A family of sections.

    Parameters
    ----------
    kind, order
        As the design file has them.
    parameters
        Names of the vector's entries: f0, q, gain, and zero_f0, zero_q.
    build
        Vector [..., P] -> one section.
    needs_phase
        Whether level alone cannot tell it from nothing.
    q_range
        Of q and zero_q.
    """

    kind: str
    order: int
    parameters: tuple[str, ...]
    build: Callable[[FloatArray], Sections]
    needs_phase: bool = False
    q_range: tuple[float, float] = (0.1, 60.0)


def _two(of: Callable[..., Sections]) -> Callable[[FloatArray], Sections]:
    return lambda v: of(np.exp(v[..., 0]), np.exp(v[..., 1]))


def _one(of: Callable[..., Sections]) -> Callable[[FloatArray], Sections]:
    return lambda v: of(np.exp(v[..., 0]))


def _peaking(v: FloatArray) -> Sections:
    return equalisers.peaking(np.exp(v[..., 0]), np.exp(v[..., 1]), v[..., 2])


def _low_shelf(v: FloatArray) -> Sections:
    return equalisers.low_shelf(np.exp(v[..., 0]), v[..., 2], np.exp(v[..., 1]))


def _high_shelf(v: FloatArray) -> Sections:
    return equalisers.high_shelf(np.exp(v[..., 0]), v[..., 2], np.exp(v[..., 1]))


def _high_shelf_1(v: FloatArray) -> Sections:
    return equalisers.high_shelf(np.exp(v[..., 0]), v[..., 1])


def _low_shelf_1(v: FloatArray) -> Sections:
    return equalisers.low_shelf(np.exp(v[..., 0]), v[..., 1])


def _pole_zero(v: FloatArray) -> Sections:
    """((s/wz)² + s/(wz·Qz) + 1)/((s/wp)² + s/(wp·Qp) + 1): 1 at zero frequency."""
    wp, qp, wz, qz = (np.exp(v[..., i]) for i in range(4))
    wp, wz = 2.0 * np.pi * wp, 2.0 * np.pi * wz
    one = np.ones_like(wp)
    b = np.stack([1.0 / wz**2, 1.0 / (wz * qz), one], axis=-1)
    a = np.stack([1.0 / wp**2, 1.0 / (wp * qp), one], axis=-1)
    return Sections(b[..., np.newaxis, :], a[..., np.newaxis, :], (wp / (2.0 * np.pi))[..., np.newaxis])


SHAPES: dict[str, Shape] = {
    "peaking": Shape("peaking", 2, ("f0", "q", "gain"), _peaking),
    "low_shelf_1": Shape("low_shelf", 1, ("f0", "gain"), _low_shelf_1),
    "low_shelf": Shape("low_shelf", 2, ("f0", "q", "gain"), _low_shelf, q_range=SHELF_Q),
    "high_shelf_1": Shape("high_shelf", 1, ("f0", "gain"), _high_shelf_1),
    "high_shelf": Shape("high_shelf", 2, ("f0", "q", "gain"), _high_shelf, q_range=SHELF_Q),
    "lowpass_1": Shape("lowpass", 1, ("f0",), _one(filters.lowpass)),
    "lowpass": Shape("lowpass", 2, ("f0", "q"), _two(filters.lowpass)),
    "highpass_1": Shape("highpass", 1, ("f0",), _one(filters.highpass)),
    "highpass": Shape("highpass", 2, ("f0", "q"), _two(filters.highpass)),
    "bandpass": Shape("bandpass", 2, ("f0", "q"), _two(filters.bandpass)),
    "notch": Shape("notch", 2, ("f0", "q"), _two(filters.notch)),
    "allpass_1": Shape("allpass", 1, ("f0",), _one(filters.allpass), needs_phase=True),
    "allpass": Shape("allpass", 2, ("f0", "q"), _two(filters.allpass), needs_phase=True),
    "pole_zero": Shape("pole_zero", 2, ("f0", "q", "zero_f0", "zero_q"), _pole_zero),
}  # fmt: skip
FREE = "pole_zero"  # the shape that no engineer would name: the last resort
# A high shelf is a low shelf of the opposite gain times a plain gain, which the fit has anyway: one is searched.
TWINS = {"low_shelf_1": "high_shelf_1", "low_shelf": "high_shelf"}
SEARCHED = tuple(name for name in SHAPES if name not in TWINS.values())


def limits(shape: Shape, f_hz: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Lowest and highest vector of a shape for data at `f_hz`."""
    beyond = BEYOND if "gain" in shape.parameters else FAR_BEYOND
    frequency = (np.log(f_hz[0] / beyond), np.log(f_hz[-1] * beyond))
    q = (np.log(shape.q_range[0]), np.log(shape.q_range[1]))
    ranges = {"f0": frequency, "zero_f0": frequency, "q": q, "zero_q": q, "gain": GAIN_RANGE}
    low, high = np.array([ranges[p] for p in shape.parameters]).T
    return low, high


def atoms(shape: Shape, f_hz: FloatArray) -> FloatArray:
    """Starting vectors [A, P] over the data's band: a coarse net in frequency, Q and gain."""
    f0 = np.log(np.geomspace(f_hz[0], f_hz[-1], 28))
    q = np.log([q for q in (0.5, 1.0, 2.0, 5.0, 12.0) if q <= shape.q_range[1]])
    axes = {
        "f0": f0,
        "zero_f0": f0[::3],
        "q": q,
        "zero_q": q[:3],
        "gain": np.array([-12.0, -6.0, -2.5, 2.5, 6.0, 12.0]),
    }
    if "zero_f0" in shape.parameters:
        axes |= {"f0": f0[::3], "q": q[:3]}
    grids = np.meshgrid(*(axes[p] for p in shape.parameters), indexing="ij")
    return np.stack([g.ravel() for g in grids], axis=-1)
