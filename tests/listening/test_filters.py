"""Rendering through twin and analog model: whole, in blocks, and against other routes."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import signal

from a2d.digital.twin import make_twin
from a2d.errors import AudioError
from a2d.listening.filters import AnalogFilter, BlockFilter, TwinFilter, analog_whole, twin_whole
from tests.support.chains import chain_of, equaliser, first_order_lowpass, peaking

RATE = 48_000.0
BLOCKS = (1, 700, 5_000, 1, 40_000, 17)


def in_blocks(process: BlockFilter, samples: np.ndarray) -> np.ndarray:
    cuts = np.cumsum(BLOCKS)
    pieces = [process.push(block) for block in np.split(samples, cuts[cuts < samples.shape[-1]], axis=-1)]
    return np.concatenate([*pieces, process.finish()], axis=-1)


def band_limited_noise(n: int, top_hz: float, rate: float) -> np.ndarray:
    """Two channels of noise below `top_hz` with smooth ends."""
    noise = np.random.default_rng(5).standard_normal((2, n))
    spectrum = np.fft.rfft(noise * signal.windows.tukey(n, 0.2), axis=-1)
    spectrum[:, np.fft.rfftfreq(n, 1 / rate) > top_hz] = 0.0
    return np.fft.irfft(spectrum, n, axis=-1) * signal.windows.tukey(n, 0.2)


def test_twin_in_blocks_is_the_twin() -> None:
    twin = make_twin(equaliser(), RATE, match_hz=900.0)
    x = np.random.default_rng(1).standard_normal((2, 60_000))
    np.testing.assert_array_equal(in_blocks(TwinFilter(twin.sos, 2), x), twin_whole(twin, x))


@pytest.mark.parametrize("rate", [44_100.0, 48_000.0, 192_000.0])
def test_analog_in_blocks_is_the_whole_spectrum(rate: float) -> None:
    # The short filter differs from H only within about 100 Hz of half the rate; the noise ends 2 kHz below it.
    # What is left is rounding: the 1 Hz section's state has a gain of some 1e4 at double precision.
    x = band_limited_noise(150_000, rate / 2 - 2_000.0, rate)
    got = in_blocks(AnalogFilter(equaliser(), rate, 2), x)
    want = analog_whole(equaliser(), rate, x)
    assert got.shape == want.shape
    assert np.max(np.abs(got - want)) < 1e-9 * np.max(np.abs(want))


def test_analog_sine_has_the_level_and_phase_of_h() -> None:
    # One second of a faded sine; the middle is steady to e^(-2π·28·0.4) and the fit is exact for whole periods.
    n = np.arange(48_000)
    f = 1_000.0
    tone = np.sin(2 * np.pi * f * n / RATE) * signal.windows.tukey(n.size, 0.1)
    part = slice(24_000, 28_800)
    carrier = np.exp(-2j * np.pi * f * n[part] / RATE)
    chain = chain_of(peaking(900.0, 2.0, 9.0), first_order_lowpass(3_000.0))
    measured = np.mean(analog_whole(chain, RATE, tone)[part] * carrier) / np.mean(tone[part] * carrier)
    assert measured == pytest.approx(chain.response(f)[0], rel=1e-9)


def test_analog_step_of_an_rc_against_its_time_domain_formula() -> None:
    # A smooth band-limited pulse through 1/(1 + sRC) against scipy's simulation of the differential equation, which
    # takes the input as straight lines between samples: for a 20 ms pulse at 192 kHz that is wrong by about 1e-7.
    rate, n = 192_000.0, 8_000
    t = np.arange(n) / rate
    x = np.exp(-(((t - 0.02) / 0.003) ** 2))
    rc = 1.0 / (2 * np.pi * 300.0)
    _, want, _ = signal.lsim(([1.0], [rc, 1.0]), x, t)
    got = analog_whole(chain_of(first_order_lowpass(300.0)), rate, x)
    np.testing.assert_allclose(got, want, atol=2e-6)


def test_poles_right_of_the_axis_are_refused() -> None:
    chain = chain_of(([0.0, 0.0, 1.0], [0.0, 1.0, -5.0]))
    with pytest.raises(AudioError, match=r'section "s1" has a pole at 5 rad/s'):
        AnalogFilter(chain, RATE, 1)
    with pytest.raises(AudioError, match="left of the axis"):
        analog_whole(chain, RATE, np.zeros(10))


def test_short_and_empty_blocks() -> None:
    x = np.random.default_rng(2).standard_normal((1, 30))
    analog = AnalogFilter(equaliser(), RATE, 1)
    pieces = [analog.push(x[:, :0]), analog.push(x[:, :7]), analog.push(x[:, 7:]), analog.finish()]
    assert np.concatenate(pieces, axis=-1).shape == (1, 30)
