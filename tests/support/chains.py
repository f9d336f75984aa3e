"""Analog chains for tests, written out from the formulas and not through the code under test."""

from __future__ import annotations

import numpy as np

from a2d.analog.chain import AnalogChain


def peaking(f0_hz: float, q: float, gain_db: float) -> tuple[list[float], list[float]]:
    """(s² + s·A·w0/Q + w0²)/(s² + s·w0/(A·Q) + w0²), A = 10^(gain/40) (W3C Audio EQ Cookbook)."""
    w, a = 2.0 * np.pi * f0_hz, 10.0 ** (gain_db / 40.0)
    return [1.0, a * w / q, w * w], [1.0, w / (a * q), w * w]


def highpass(f0_hz: float, q: float) -> tuple[list[float], list[float]]:
    w = 2.0 * np.pi * f0_hz
    return [1.0, 0.0, 0.0], [1.0, w / q, w * w]


def lowpass(f0_hz: float, q: float) -> tuple[list[float], list[float]]:
    w = 2.0 * np.pi * f0_hz
    return [0.0, 0.0, w * w], [1.0, w / q, w * w]


def first_order_lowpass(f0_hz: float) -> tuple[list[float], list[float]]:
    w = 2.0 * np.pi * f0_hz
    return [0.0, 0.0, w], [0.0, 1.0, w]


def first_order_highpass(f0_hz: float) -> tuple[list[float], list[float]]:
    w = 2.0 * np.pi * f0_hz
    return [0.0, 1.0, 0.0], [0.0, 1.0, w]


def chain_of(*sections: tuple[list[float], list[float]]) -> AnalogChain:
    """A chain of (b, a) pairs named s1, s2, ..."""
    names = [f"s{k + 1}" for k in range(len(sections))]
    return AnalogChain.of(names, [b for b, _ in sections], [a for _, a in sections])


def equaliser() -> AnalogChain:
    """Eight sections with the awkward ones among them: slow, sharp, close to half the rate, first order, allpass."""
    w = 2.0 * np.pi * 900.0
    return chain_of(
        first_order_highpass(1.0),
        highpass(28.0, 0.8),
        peaking(110.0, 6.0, -7.0),
        ([1.0, -w / 0.9, w * w], [1.0, w / 0.9, w * w]),
        peaking(3_200.0, 1.4, 4.5),
        peaking(15_000.0, 2.0, 5.0),
        first_order_lowpass(60_000.0),
        ([0.0, 0.0, -0.8], [0.0, 0.0, 1.0]),
    )
