"""Analog prototypes and plain response formulas of the tests' own, so that checks do not lean on what they check."""

import numpy as np

KINDS = ("peaking", "lowshelf", "highshelf", "lowpass", "highpass", "bandpass", "notch", "allpass")


def section(kind, f0_hz, q, gain_db=0.0):
    """b, a [3] in rad/s of the prototypes of the Audio EQ Cookbook (W3C Note, 8 June 2021)."""
    w, g = 2.0 * np.pi * f0_hz, 10.0 ** (gain_db / 40.0)
    poles = [1.0, w / q, w * w]
    root = np.sqrt(g) * w / q
    table = {
        "lowpass": ([0.0, 0.0, w * w], poles),
        "highpass": ([1.0, 0.0, 0.0], poles),
        "bandpass": ([0.0, w / q, 0.0], poles),
        "notch": ([1.0, 0.0, w * w], poles),
        "allpass": ([1.0, -w / q, w * w], poles),
        "peaking": ([1.0, g * w / q, w * w], [1.0, w / (g * q), w * w]),
        "lowshelf": ([g, g * root, g * g * w * w], [g, root, w * w]),
        "highshelf": ([g * g, g * root, g * w * w], [1.0, root, g * w * w]),
    }
    b, a = table[kind]
    return np.array(b), np.array(a)


def first_order(kind, f0_hz, gain_db=0.0):
    """b, a [3] of one-pole sections; a shelf's gain at f0 is half its decibels."""
    w, g = 2.0 * np.pi * f0_hz, 10.0 ** (gain_db / 40.0)
    table = {
        "lowpass": ([0.0, 0.0, w], [0.0, 1.0, w]),
        "highpass": ([0.0, 1.0, 0.0], [0.0, 1.0, w]),
        "allpass": ([0.0, -1.0, w], [0.0, 1.0, w]),
        "lowshelf": ([0.0, 1.0, g * w], [0.0, 1.0, w / g]),
        "highshelf": ([0.0, g, w], [0.0, 1.0 / g, w]),
    }
    b, a = table[kind]
    return np.array(b), np.array(a)


def analog(b, a, f_hz):
    """H(j2πf), complex."""
    s = 2j * np.pi * np.asarray(f_hz)
    return np.polyval(b, s) / np.polyval(a, s)


def digital(sos, f_hz, rate_hz):
    """H(e^{jw}) of one section [6], complex."""
    z = np.exp(2j * np.pi * np.asarray(f_hz) / rate_hz)
    return np.polyval(sos[:3], z) / np.polyval(sos[3:], z)


def analog_db(b, a, f_hz):
    """|H(j2πf)| in dB."""
    return 20.0 * np.log10(np.abs(analog(b, a, f_hz)))


def digital_db(sos, f_hz, rate_hz):
    """|H(e^{jw})| in dB."""
    return 20.0 * np.log10(np.abs(digital(sos, f_hz, rate_hz)))
