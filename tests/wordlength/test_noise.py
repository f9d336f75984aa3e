"""Noise formulas against published closed forms and against measured noise; levels against scipy's filters."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import signal

from a2d.digital.twin import make_twin
from a2d.wordlength.arithmetic import LIMITERS, Arithmetic
from a2d.wordlength.behaviour import measured_noise, zero_input
from a2d.wordlength.formats import Number
from a2d.wordlength.noise import (
    boundary_peaks,
    boundary_sums,
    noise_dbfs,
    noise_gains,
    noise_gains_by_frequency,
    power_gain,
)
from a2d.wordlength.rounding import Rounded, round_nearest
from a2d.wordlength.simulate_fixed import simulate_fixed
from tests.support.chains import chain_of, peaking
from tests.support.firmware_cases import STRUCTURE_CASES, twin

# r, theta, Σh², Σ|h|, max|H| of 1/(1 - 2·r·cos(theta)·z⁻¹ + r²·z⁻²): Σh² = (1 + r²)/((1 - r²)(1 + r⁴ - 2·r²·cos 2θ)),
# max|H| = 1/((1 - r²)·sin θ) (Jackson, Digital Filters and Signal Processing, 3rd ed., chapter 11)
RESONATORS = [
    (0.9, np.pi / 4, 5.75225879444, 8.964211126, 7.443229276),
    (0.99, 0.1, 2520.99728113, 639.7202104, 503.3510619),
    (0.999, 0.01, 2479023.21245, 63581.92437, 50025.84627),
    (0.5, np.pi / 2, 1.06666666667, 1.333333333, 1.333333333),
]


def resonator(r: float, theta: float) -> np.ndarray:
    return np.array([[1.0, 0.0, 0.0, 1.0, -2.0 * r * np.cos(theta), r * r]])


@pytest.mark.parametrize(("r", "theta", "power", "total", "peak"), RESONATORS)
def test_norms_of_resonators(r: float, theta: float, power: float, total: float, peak: float) -> None:
    sos = resonator(r, theta)
    # the published figures have ten to twelve digits; the peak is read off a grid 2 % of the resonance's width apart,
    # which misses a parabola's top by (0.01)²/2
    assert power_gain(sos) == pytest.approx(power, rel=1e-9)
    assert boundary_sums(sos)[0] == pytest.approx(total, rel=1e-8)
    assert boundary_peaks(sos)[0] == pytest.approx(peak, rel=2e-4)


def test_k_weighting_noise_gains() -> None:
    """Rec. ITU-R BS.1770-5, Annex 1: Σh² of 1/A is 45.2365 and 2031180 (the closed form above), of stage 1 2.39482."""
    stage1 = [1.53512485958697, -2.69169618940638, 1.19839281085285, 1, -1.69065929318241, 0.73248077421585]
    stage2 = [1.0, -2.0, 1.0, 1, -1.99004745483398, 0.99007225036621]
    sos = np.array([stage1, stage2])
    assert power_gain(sos[:1]) == pytest.approx(2.3948204804190, rel=1e-12)
    assert noise_gains(sos[:1])[0] == pytest.approx(45.236536545174, rel=1e-12)
    # 14 printed digits of a2 leave (1 + a1 + a2) = 2.5e-5 good to 4e-10
    assert noise_gains(sos[1:])[0] == pytest.approx(2031180.2, rel=1e-7)


def test_power_gain_of_cascades_against_the_impulse_response() -> None:
    sos = signal.ellip(6, 0.5, 60, [0.1, 0.3], "bandpass", output="sos")
    x = np.zeros(40_000)
    x[0] = 1.0
    h = signal.sosfilt(sos, x)
    assert power_gain(sos) == pytest.approx(np.sum(h * h), rel=1e-9)
    batch = np.stack([sos, sos[::-1]])
    np.testing.assert_allclose(power_gain(batch), np.sum(h * h), rtol=1e-9)
    assert boundary_sums(sos)[-1] == pytest.approx(np.sum(np.abs(h)), rel=1e-9)


def white(count: int, seed: int) -> np.ndarray:
    """Noise at -12 dB re full scale, whole words of 23 fraction bits."""
    return np.rint(np.random.default_rng(seed).standard_normal(count) * 2.0**21)


@pytest.mark.parametrize("structure", list(STRUCTURE_CASES))
def test_jacksons_formula_against_measured_noise(structure: str) -> None:
    """Within 1 dB, as the issue asks: 18000 samples estimate a power to 0.1 dB where the noise is white."""
    form, error_feedback = STRUCTURE_CASES[structure]
    rounded = round_nearest(twin().sos, Number("fixed", 32, 30), form)
    arithmetic = Arithmetic(error_feedback=error_feedback)
    predicted = noise_dbfs(noise_gains(rounded.sections, form, error_feedback), arithmetic.fraction)
    measured = measured_noise(rounded, arithmetic, white(20_000, 5))
    assert measured.dbfs == pytest.approx(predicted, abs=1.0)


def test_error_feedback_quietens_a_low_section() -> None:
    """At 400 Hz the noise gain falls by tens of dB with each order; rounding to nearest leaves no bias."""
    rounded = round_nearest(twin().sos[:1], Number("fixed", 32, 30), "direct_form_1")
    found = [measured_noise(rounded, Arithmetic(error_feedback=k), white(12_000, 6)) for k in range(3)]
    assert found[0].dbfs - found[1].dbfs > 15.0
    assert found[1].dbfs - found[2].dbfs > 3.0
    assert abs(found[2].bias) < 0.05


def test_truncation_has_the_bias_that_the_equation_says() -> None:
    """Truncation takes half a step on average at each rounding; 1/A carries it out at d.c.: -0.5/(1 + a1 + a2)."""
    rounded = round_nearest(twin().sos[1:], Number("fixed", 32, 30), "direct_form_1")
    a1, a2 = rounded.sections[0, 4:]
    bias = measured_noise(rounded, Arithmetic(rounding="truncate"), white(30_000, 7)).bias
    assert bias == pytest.approx(-0.5 / (1.0 + a1 + a2), rel=0.05)


def words(a1: int, a2: int) -> Rounded:
    """1/A in 16-bit words of 14 fraction bits."""
    row = np.array([[16384.0, 0.0, 0.0, float(a1), float(a2)]])
    return Rounded(Number("fixed", 16, 14), "direct_form_1", row, np.full((1, 5), 14), np.zeros(1, dtype=np.int64))


@pytest.mark.parametrize(
    ("r", "theta", "bound"),
    [(0.95, np.pi / 3, 5), (0.9, np.pi / 4, 2), (0.98, np.pi / 2, 12), (0.8, 1.0, 1)],
)
def test_limit_cycles_stay_within_jacksons_bound(r: float, theta: float, bound: int) -> None:
    """|y| <= int(0.5/(1 - |a2|)) (Jackson 1969, "An analysis of limit cycles due to multiplication rounding in
    recursive digital (sub)filters", 7th Allerton Conf.; the formula from memory). It is a rule for the effective
    a2 of each rounded product; one rounding of the sum stays below it or at it."""
    resonance = words(round(-2.0 * r * np.cos(theta) * 16384), round(r * r * 16384))
    left = zero_input(resonance, Arithmetic(16, 12), silence=4_000)
    assert left.amplitude <= bound
    # with what rounding dropped fed back, or in the difference form, nothing keeps ringing for long
    assert left.overflows[0] > 0


def test_what_rests_what_falls_and_what_rings() -> None:
    ringing, falling = words(round(-1.9 * 16384), round(0.96 * 16384)), words(-32736, 16353)
    assert zero_input(ringing, Arithmetic(16, 12), silence=4_000).in_words.startswith("rings on at ")
    assert zero_input(falling, Arithmetic(28, 12), silence=2_000).in_words.startswith("is still decaying, at ")
    resting = words(0, 0)
    assert zero_input(resting, Arithmetic(16, 12), silence=400).in_words == "comes to rest"


def test_a_cascade_without_feedback_overflow_recovers() -> None:
    """Saturation: a burst at full scale into a 6 dB boost; the section saturates, then falls to rest or a few steps."""
    rounded = round_nearest(twin().sos, Number("fixed", 24, 22), "direct_form_1")
    loud = zero_input(rounded, Arithmetic(24, 23))
    assert loud.overflows[0] > 0
    assert loud.amplitude < 256


def test_wrapping_may_ring_for_ever_where_saturation_does_not() -> None:
    """Overflow oscillation (Ebert, Mazo and Taylor 1969, Bell System Technical Journal 48, 2999-3020): with wrap-around
    a stable second-order section with |a1| + |a2| > 1 can oscillate at full scale without input."""
    resonance = words(round(1.6 * 16384), round(0.95 * 16384))
    # y = Y for ever, as Y·(1 + a1 + a2) is one whole turn of the word: 2^16/3.55
    level = round(65536 / 3.55)
    start = [level, LIMITERS["wrap"](32767)(round(level * 2.6))]
    wrapped = simulate_fixed(resonance, Arithmetic(16, 15, overflow="wrap"), [*start, *[0] * 4000]).output
    saturated = simulate_fixed(resonance, Arithmetic(16, 15), [*start, *[0] * 4000]).output
    assert min(wrapped[-100:]) > 10_000
    assert max(map(abs, saturated[-100:])) < 20


@pytest.mark.parametrize(("structure", "error_feedback"), [("direct_form_1", 0), ("direct_form_1", 1), ("delta", 0)])
@pytest.mark.parametrize("rate", [48_000.0, 192_000.0])
def test_the_integral_over_frequency_agrees_with_the_exact_sum(
    structure: str, error_feedback: int, rate: float
) -> None:
    """Within 0.5 %: the grid's points around a resonance are up to a quarter of their distance from it apart."""
    bells = [peaking(20.0 * 2.5**k, 0.4 + k, (-1.0) ** k * 6.0) for k in range(8)]
    sos = make_twin(chain_of(*bells), rate).sos
    exact = noise_gains(sos, structure, error_feedback)
    np.testing.assert_allclose(noise_gains_by_frequency(sos, structure, error_feedback), exact, rtol=5e-3)
