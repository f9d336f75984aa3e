"""K-weighting of Rec. ITU-R BS.1770-5 (11/2023), Annex 1, Tables 1 and 2: analog to its coefficients."""

from __future__ import annotations

import numpy as np

from a2d.analog.kinds import filters
from a2d.analog.sections import single
from a2d.arrays import FloatArray
from a2d.digital.bilinear import bilinear
from a2d.digital.response import chain_response

# Tables 1 and 2, fs = 48 kHz: b0, b1, b2, a0, a1, a2
STAGE_1 = np.array([1.53512485958697, -2.69169618940638, 1.19839281085285, 1.0, -1.69065929318241, 0.73248077421585])
STAGE_2 = np.array([1.0, -2.0, 1.0, 1.0, -1.99004745483398, 0.99007225036621])

# Analog parameters that give them (B. De Man, "Evaluation of implementations of the EBU R128 loudness measurement",
# AES 145th Convention, 2018; the title is quoted from memory).
F1, Q1, GAIN_DB, VB_EXPONENT = 1681.974450955533, 0.7071752369554196, 3.999843853973347, 0.4996667741545416
F2, Q2 = 38.13547087602444, 0.5003270373238773


def twin(sections: tuple[FloatArray, FloatArray, FloatArray], f0: float, rate: float) -> FloatArray:
    b, a, _ = sections
    return bilinear(b, a, np.asarray(rate), np.asarray(f0), np.array([20.0, 20e3]))


def stage_1(rate: float) -> FloatArray:
    vh = 10.0 ** (GAIN_DB / 20.0)
    shelf = single((vh, vh**VB_EXPONENT / Q1, 1.0), (1.0, 1.0 / Q1, 1.0), np.asarray(F1))
    return twin(shelf, F1, rate)


def stage_2(rate: float) -> FloatArray:
    # The standard's numerator is 1, -2, 1: its pass band lies 1/0.99503 above unity, which is a gain on our high-pass.
    sos = twin(filters.highpass(F2, Q2), F2, rate)
    return sos * np.array([1 / sos[0, 0], 1 / sos[0, 0], 1 / sos[0, 0], 1.0, 1.0, 1.0])


def test_published_coefficients_of_stage_1() -> None:
    # The 14 printed decimals allow 5e-15; the stage's parameters carry 16 digits.
    np.testing.assert_allclose(stage_1(48_000.0)[0], STAGE_1, atol=2e-14)


def test_published_coefficients_of_stage_2() -> None:
    np.testing.assert_allclose(stage_2(48_000.0)[0], STAGE_2, atol=2e-14)


def test_gain_at_997_hz_is_the_loudness_formula_s_constant() -> None:
    """BS.1770: L = -0.691 + 10·lg(...), so that a full-scale 997 Hz sine reads -3.01 LKFS."""
    sos = np.concatenate([stage_1(48_000.0), stage_2(48_000.0)])
    gain = 20.0 * np.log10(abs(chain_response(sos, np.array([997.0]), 48_000.0)[0]))
    assert round(float(gain), 3) == 0.691
