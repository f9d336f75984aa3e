"""Null test: known differences come out as they were put in."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import signal

from a2d.errors import AudioError
from a2d.listening.bands import band_sums, third_octaves
from a2d.listening.null_test import NullMeter, null_test

RATE = 48_000.0


def noise(n: int = 300_000, channels: int = 2) -> np.ndarray:
    x = np.random.default_rng(4).standard_normal((channels, n))
    return signal.sosfilt(signal.butter(4, 18_000.0, fs=RATE, output="sos"), x, axis=-1)


def delayed(x: np.ndarray, samples: float) -> np.ndarray:
    f = np.fft.rfftfreq(x.shape[-1])
    return np.fft.irfft(np.fft.rfft(x, axis=-1) * np.exp(-2j * np.pi * f * samples), x.shape[-1], axis=-1)


def test_a_gain_alone() -> None:
    x = noise()
    outcome = null_test(x, 0.5 * x, RATE)
    np.testing.assert_allclose(outcome.raw.bands_db, 20 * np.log10(0.5), atol=1e-9)
    assert outcome.raw.overall_db == pytest.approx(20 * np.log10(0.5), abs=1e-9)
    assert outcome.gain_db == pytest.approx(20 * np.log10(0.5), abs=1e-6)
    assert outcome.aligned.overall_db < -140.0  # rounding of the spectra's products
    assert not outcome.inverted


@pytest.mark.parametrize(("shift", "gain"), [(0.37, 0.9), (-13.25, -0.5), (104.0, 2.0)])
def test_delay_and_gain_are_found(shift: float, gain: float) -> None:
    x = noise()
    outcome = null_test(x, gain * delayed(x, shift), RATE)
    assert outcome.delay_samples == pytest.approx(shift, abs=2e-4 * max(1, abs(shift)))
    assert outcome.gain_db == pytest.approx(20 * np.log10(abs(gain)), abs=0.002 * max(1, abs(shift)))
    assert outcome.inverted == (gain < 0)
    limit = -20 * np.log10(32_768 / (4 * abs(shift)))  # the window does not move with the sound
    assert outcome.aligned.overall_db < limit
    assert outcome.raw.overall_db > -10.0


def test_a_difference_in_one_band_is_seen_there() -> None:
    # A tone 40 dB below the reference's own band at 1 kHz.
    x = noise(channels=1)
    f, density = signal.welch(x[0], RATE, nperseg=8192)
    band = (f > 891.25) & (f < 1122.0)
    power = density[band].sum() * (f[1] - f[0])
    tone = np.sqrt(2 * power * 1e-4) * np.sin(2 * np.pi * 1_000.0 / RATE * np.arange(x.shape[-1]))
    outcome = null_test(x, x + tone, RATE)
    at = int(np.argmin(np.abs(outcome.centres_hz - 1_000.0)))
    # The noise's own power in that band is known to 1/sqrt(230 Hz · 6 s), 0.12 dB.
    assert outcome.raw.bands_db[at] == pytest.approx(-40.0, abs=0.3)
    assert np.delete(outcome.raw.bands_db, at).max() < -80.0


def test_blocks_do_not_matter() -> None:
    x = noise()
    y = signal.lfilter([1.0, 0.1], [1.0], x, axis=-1)
    meter = NullMeter(RATE, 2)
    for a, b in zip(np.array_split(x, 17, axis=-1), np.array_split(y, 17, axis=-1), strict=True):
        meter.push(a, b)
    np.testing.assert_array_equal(meter.result().raw.bands_db, null_test(x, y, RATE).raw.bands_db)


def test_equal_recordings_and_short_ones() -> None:
    x = noise(1_000)
    outcome = null_test(x, x, RATE)
    assert outcome.raw.overall_db == -300.0
    with pytest.raises(AudioError, match="reference is silent"):
        null_test(0 * x, x, RATE)
    with pytest.raises(AudioError, match="equal shape"):
        null_test(x, x[:, :10], RATE)


def test_third_octave_frequencies() -> None:
    # IEC 61260-1:2014, base ten: 25.12 Hz, 1 kHz, 15.849 kHz; the edges of 1 kHz are 891.25 and 1122.02 Hz.
    centres, edges = third_octaves(20.0, 20_000.0)
    assert centres[0] == pytest.approx(25.1189, abs=1e-4)
    assert centres[-1] == pytest.approx(15_848.93, abs=0.01)
    assert edges[np.argmin(abs(centres - 1e3))] == pytest.approx([891.251, 1122.018], abs=1e-3)
    f = np.arange(0.0, 24_001.0)
    np.testing.assert_allclose(band_sums(f, np.ones(f.size), edges), np.diff(edges)[:, 0], rtol=1e-9)
