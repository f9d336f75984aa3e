"""The simulations against a general library's filter and against each other."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import signal

from a2d.wordlength.arithmetic import Arithmetic
from a2d.wordlength.formats import Number
from a2d.wordlength.rounding import round_nearest
from a2d.wordlength.simulate_fixed import simulate_fixed
from a2d.wordlength.simulate_float import simulate_float
from a2d.wordlength.structures import STRUCTURES
from tests.support.firmware_cases import STRUCTURE_CASES, twin

NOISE = np.random.default_rng(11).standard_normal(5_000) * 0.1


@pytest.mark.parametrize("structure", STRUCTURES)
def test_float64_is_scipys_filter(structure: str) -> None:
    sos = twin().sos
    got = simulate_float(round_nearest(sos, Number("float64"), structure), NOISE)
    # rounding 1e-16 times the noise gain of a 400 Hz section (some 1e3 in amplitude)
    np.testing.assert_allclose(got, signal.sosfilt(sos, NOISE), rtol=0, atol=1e-12)


@pytest.mark.parametrize("structure", STRUCTURES)
def test_float32_is_scipys_filter_to_rounding(structure: str) -> None:
    rounded = round_nearest(twin().sos, Number("float32"), structure)
    got = simulate_float(rounded, NOISE.astype(np.float32))
    assert got.dtype == np.float32
    np.testing.assert_allclose(got, signal.sosfilt(rounded.sos, NOISE.astype(np.float32)), rtol=0, atol=2e-5)


@pytest.mark.parametrize("structure", STRUCTURES)
def test_channels_run_side_by_side(structure: str) -> None:
    rounded = round_nearest(twin().sos, Number("float32"), structure)
    pair = np.stack([NOISE, NOISE[::-1]], axis=-1)[:500]
    both = simulate_float(rounded, pair)
    for channel in range(2):
        np.testing.assert_array_equal(both[:, channel], simulate_float(rounded, pair[:, channel]))


@pytest.mark.parametrize("case", list(STRUCTURE_CASES))
@pytest.mark.parametrize("shift", [0, 2])
def test_fixed_point_is_scipys_filter_to_its_noise(case: str, shift: int) -> None:
    """With words of 32 bits; a cascade 2^shift louder has an output shift where its numerators would not fit."""
    structure, error_feedback = STRUCTURE_CASES[case]
    sos = twin().sos.copy()
    sos[:, :3] *= 2.0**shift
    rounded = round_nearest(sos, Number("fixed", 32, 30), structure)
    words = np.rint(NOISE * 2.0**20)
    arithmetic = Arithmetic(error_feedback=error_feedback)
    run = simulate_fixed(rounded, arithmetic, [int(w) for w in words])
    error = np.array(run.output) - signal.sosfilt(rounded.sos, words)
    assert sum(run.overflows) == 0
    # half a step times Σ|h| of 1/A at 400 Hz (1/(1 + a1 + a2) = 370), through the shifts; shaped noise far less
    assert np.max(np.abs(error)) < (400 if error_feedback == 0 and structure != "delta" else 12) * 2.0 ** (2 * shift)


@given(
    st.lists(st.integers(-(2**15), 2**15 - 1), min_size=1, max_size=60),
    st.tuples(*[st.integers(-(2**15), 2**15 - 1)] * 3, st.integers(-30_000, 30_000), st.integers(-16_000, 16_000)),
    st.sampled_from(["saturate", "wrap"]),
    st.sampled_from(["nearest", "truncate"]),
)
def test_direct_and_transposed_forms_agree_to_the_bit(samples: list, row: tuple, overflow: str, rounding: str) -> None:
    """Both round one exact sum, and both feed back the limited sample: whatever the words, even unstable ones."""
    from a2d.wordlength.simulate_fixed import direct_form_1, transposed_direct_form_2

    arithmetic = Arithmetic(16, 15, overflow, rounding)
    words = (list(row), [14] * 5)
    assert direct_form_1(words, arithmetic, samples) == transposed_direct_form_2(words, arithmetic, samples)


@given(st.integers(-(2**40), 2**40), st.integers(4, 32))
def test_limiters(value: int, bits: int) -> None:
    highest = 2 ** (bits - 1) - 1
    assert Arithmetic(bits).limiter()(value) == int(np.clip(value, -highest - 1, highest))
    wrapped = Arithmetic(bits, overflow="wrap").limiter()(value)
    assert -highest - 1 <= wrapped <= highest
    assert (wrapped - value) % 2**bits == 0
