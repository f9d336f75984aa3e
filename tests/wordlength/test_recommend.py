"""The advice: figures against measured noise, and the right structure for low, ordinary and hopeless cases."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from a2d.digital.twin import make_twin
from a2d.wordlength.formats import Number
from a2d.wordlength.recommend import candidates, recommended
from a2d.wordlength.rounding import round_nearest
from a2d.wordlength.simulate_float import simulate_float
from tests.support.chains import chain_of, peaking

AUDIO = (20.0, 20_000.0)
FLOAT32, Q16, Q32 = Number("float32"), Number("fixed", 16, 14), Number("fixed", 32, 30)


def choices(f0: float, q: float, rate: float, number: Number):
    return candidates(make_twin(chain_of(peaking(f0, q, 6.0)), rate), number, 23, AUDIO)


def test_low_sections_at_high_rates_are_for_the_difference_form() -> None:
    for number in (FLOAT32, Q16):
        best = recommended(choices(25.0, 4.0, 192_000.0, number))
        assert best.structure == "delta"
        assert best.error_db < 0.002
        assert best.noise_dbfs < -115.0


def test_ordinary_sections_take_the_least_work() -> None:
    assert recommended(choices(5_000.0, 0.7, 48_000.0, FLOAT32)).structure == "transposed_direct_form_2"
    best = recommended(choices(3_000.0, 0.7, 48_000.0, Q32))
    assert (best.structure, best.error_feedback) == ("direct_form_1", 0)
    fed = recommended(choices(200.0, 0.7, 48_000.0, Q32))
    assert (fed.structure, fed.error_feedback) == ("direct_form_1", 1)


def test_what_is_unstable_says_so() -> None:
    direct = choices(20.0, 4.0, 48_000.0, Q16)[0]
    assert direct.error_db == np.inf
    assert direct.figures == "direct form I: unstable"


@pytest.mark.parametrize("f0", [120.0, 400.0])
def test_float32_noise_is_estimated_within_4_db_or_on_the_safe_side(f0: float) -> None:
    """Direct forms within 4 dB: how many of an operation's results have the output's size depends on the signal."""
    twin = make_twin(chain_of(peaking(f0, 1.0, 6.0)), 96_000.0)
    tone = np.sin(np.arange(24_000) * 2.0 * np.pi * 997.0 / 96_000.0)
    for candidate in candidates(twin, FLOAT32, 23, AUDIO):
        rounded = round_nearest(twin.sos, FLOAT32, candidate.structure)
        exact = simulate_float(replace(rounded, number=Number("float64")), tone.astype(np.float32))
        error = (simulate_float(rounded, tone) - exact)[8_000:]
        measured = 10.0 * np.log10(np.mean(error**2))
        assert measured < candidate.noise_dbfs + 4.0
        if candidate.structure != "delta":
            assert measured > candidate.noise_dbfs - 4.0
