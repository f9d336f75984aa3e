"""Test signals: levels, spectra, phases, and the sweep's published relations."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import signal as scipy_signal

from a2d.errors import ParameterError
from a2d.listening.signals import SIGNALS, SignalSettings, pink, sine_spans, sines
from a2d.listening.sweep import SweepPlan


@pytest.mark.parametrize("name", SIGNALS)
def test_safe_level_and_faded_ends(name: str) -> None:
    x = SIGNALS[name](SignalSettings(48_000.0, seconds=2.0))
    peak = np.max(np.abs(x))
    # Gaussian noise peaks some 13 dB above its RMS value, which is 3 dB below a sine's peak of the same level.
    assert peak <= 0.1 * (1 + 1e-12) if name != "pink" else 0.15 < peak < 0.45
    assert abs(x[0]) < 2e-4
    assert abs(x[-1]) < 2e-4


def test_sines_stand_where_they_say() -> None:
    settings = SignalSettings(44_100.0, -26.0, 1.0, (50.0, 997.0, 19_000.0))
    x = sines(settings)
    for (start, stop), f in zip(sine_spans(settings), settings.frequencies_hz, strict=True):
        n = np.arange(stop - start)
        steady = slice(11_025, 33_075)
        want = 10 ** (-26.0 / 20) * np.sin(2 * np.pi * f * n / 44_100.0)
        np.testing.assert_allclose(x[start:stop][steady], want[steady], atol=1e-12)


def test_pink_noise_has_equal_power_an_octave() -> None:
    x = pink(SignalSettings(48_000.0, seconds=60.0))
    assert 20 * np.log10(np.sqrt(2 * np.mean(x**2))) == pytest.approx(-20.0, abs=0.02)  # 0.02: the faded ends
    f, density = scipy_signal.welch(x, 48_000.0, nperseg=16_384)
    bands = [10 * np.log10(density[(f >= low) & (f < 2 * low)].sum()) for low in 125 * 2.0 ** np.arange(7)]
    # 60 s give 7,500 independent values in the lowest octave: 0.07 dB rms.
    assert np.ptp(bands) < 0.4


def test_pink_noise_follows_its_seed() -> None:
    settings = SignalSettings(48_000.0, seconds=0.5, seed=7)
    np.testing.assert_array_equal(pink(settings), pink(settings))
    assert not np.array_equal(pink(settings), pink(SignalSettings(48_000.0, seconds=0.5, seed=8)))


def test_harmonics_lead_as_published() -> None:
    # T·ln(N)/R for 20 Hz to 20 kHz in 5 s (Farina 2000): 0.5017 s for the 2nd, 0.7952 s for the 3rd.
    plan = SweepPlan(48_000.0, 5.0)
    scale = np.log(1_000.0) / plan.log_span
    assert plan.lead_of_harmonic(2) / scale == pytest.approx(0.501717, abs=1e-6)
    assert plan.lead_of_harmonic(3) / scale == pytest.approx(0.795202, abs=1e-6)


def test_sweep_frequency_and_slope() -> None:
    plan = SweepPlan(48_000.0, 5.0)
    x = plan.sweep()
    # Cycles until t by counting zero crossings upwards: f1·T/R·(e^{tR/T} - 1), here summed from `frequency_at`.
    t = np.arange(x.size) / 48_000.0
    cycles = np.cumsum(plan.frequency_at(t + 0.5 / 48_000.0)) / 48_000.0  # until t + 1/fs
    crossings = np.cumsum((x[:-1] < 0) & (x[1:] >= 0))
    np.testing.assert_allclose(crossings, cycles[:-1], atol=1.02)  # whole cycles: at most one fewer
    # An exponential sweep's spectrum falls by 3.01 dB an octave.
    spectrum = np.abs(np.fft.rfft(x))
    f = np.fft.rfftfreq(x.size, 1 / 48_000)
    level = [
        10 * np.log10(np.mean(spectrum[(f > c * 0.9) & (f < c * 1.1)] ** 2)) for c in (250.0, 500.0, 1e3, 2e3, 4e3, 8e3)
    ]
    np.testing.assert_allclose(np.diff(level), -3.0103, atol=0.1)


def test_signal_is_where_the_plan_says() -> None:
    plan = SweepPlan(44_100.0, 3.0)
    x = plan.signal()
    assert x.size == plan.total
    np.testing.assert_array_equal(x[plan.start : plan.stop], plan.sweep())
    for at in (plan.first_marker, plan.second_marker):
        np.testing.assert_array_equal(x[at : at + plan.marker().size], plan.marker())
    assert not x[: plan.first_marker].any()


def test_ranges() -> None:
    with pytest.raises(ParameterError, match="level must lie from -140 to 0 dBFS"):
        SignalSettings(48_000.0, level_dbfs=1.0)
    with pytest.raises(ParameterError, match="a sine's frequency must lie below half the sample rate"):
        sines(SignalSettings(48_000.0, frequencies_hz=(24_000.0,)))
    with pytest.raises(ParameterError, match="at least one frequency"):
        sines(SignalSettings(48_000.0, frequencies_hz=()))
    with pytest.raises(ParameterError, match="sweep length must lie from 1 to 120 s"):
        SweepPlan(48_000.0, 0.5)
