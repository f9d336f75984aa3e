"""Measuring simulated devices: response, latency, distortion and noise come out as they were put in."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import signal as scipy_signal

from a2d.digital.twin import Twin, make_twin
from a2d.errors import AudioError
from a2d.listening.judge import agreement
from a2d.listening.markers import find_signal
from a2d.listening.measure import align, aligned, measure_channel
from a2d.listening.sweep import SweepPlan
from tests.support.chains import chain_of, highpass, peaking
from tests.support.device import DELAY_S, device

CHAIN = chain_of(
    highpass(28.0, 0.8), peaking(110.0, 3.0, -7.0), peaking(3_200.0, 1.4, 4.5), peaking(15_000.0, 2.0, 5.0)
)


def twin_at(rate: float) -> Twin:
    return make_twin(CHAIN, rate)


@pytest.mark.parametrize("rate", [44_100.0, 48_000.0])
def test_the_issue_s_device(rate: float) -> None:
    """Twin, 104.77 ms, -6 dB, 1 Hz coupling, noise at -80 dBFS, 0.1 % second harmonic."""
    twin, plan = twin_at(rate), SweepPlan(rate)
    measured = measure_channel(device(plan.signal(), twin.sos, rate), plan)
    f = measured.f_hz
    assert (f[0], f[-1]) == (pytest.approx(20.0), pytest.approx(min(20_000.0, 0.4535 * rate)))
    found = agreement(measured, twin.response(f) / (1.0 + 1.0 / (1j * f)))
    # 0.05 dB is the issue's limit. The noise in the response is 75 to 88 dB down, four sigma of which is 0.006 dB.
    assert abs(found.worst_db) < 0.01
    assert np.nanmax(np.abs(found.error_deg)) < 0.06
    assert found.alignment.gain_db == pytest.approx(20 * np.log10(0.5), abs=0.002)
    assert measured.latency_s + found.alignment.delay_s == pytest.approx(DELAY_S, abs=1e-8)
    assert not found.alignment.inverted
    assert abs(measured.drift_ppm) < 0.1
    assert not measured.clipped
    # The device bends the input, so that its twin weighs the harmonic at 2f and the fundamental at f.
    want = 1e-3 * np.abs(twin.response(2 * f) / twin.response(f))
    known = np.isfinite(measured.harmonics[0])
    error_db = 20 * np.log10(measured.harmonics[0][known] / want[known])
    assert np.max(np.abs(error_db[f[known] < 9_900.0])) < 1.0
    assert np.all(np.isnan(measured.harmonics[0][2 * f > 0.485 * rate]))


def test_stated_noise_is_the_noise_there_is() -> None:
    # Errors of 480 points, of which neighbours share noise, against the stated sigma: within 15 %.
    rate = 48_000.0
    twin, plan = twin_at(rate), SweepPlan(rate, 4.0)
    measured = measure_channel(device(plan.signal(), twin.sos, rate, noise_dbfs=-60.0), plan)
    reference = twin.response(measured.f_hz) / (1.0 + 1.0 / (1j * measured.f_hz))
    found = agreement(measured, reference)
    left = aligned(measured.response, measured.f_hz, found.alignment) - reference
    assert np.sqrt(np.mean(np.abs(left / (2.0 * measured.sigma)) ** 2)) == pytest.approx(1.0, abs=0.15)


def test_loopback_takes_converters_and_their_delay_out() -> None:
    rate, delay = 48_000.0, 0.0213
    twin, plan = twin_at(rate), SweepPlan(rate, 4.0)
    converter = scipy_signal.butter(2, 18_000.0, fs=rate, output="sos")
    played = scipy_signal.sosfilt(converter, plan.signal())
    flat = np.array([[1.0, 0.0, 0.0, 1.0, 0.0, 0.0]])
    loopback = device(played, flat, rate, delay_s=0.05, second_harmonic=0.0, gain=0.9, corner_hz=3.0)
    through = device(played, twin.sos, rate, delay_s=0.05 + delay, second_harmonic=0.0, gain=0.9, corner_hz=3.0, seed=1)
    n = min(loopback.size, through.size)
    measured = measure_channel(through[:n], plan, loopback[:n])
    found = agreement(measured, twin.response(measured.f_hz))
    assert abs(found.worst_db) < 0.03
    assert found.alignment.gain_db == pytest.approx(0.0, abs=0.005)
    assert measured.latency_s + found.alignment.delay_s == pytest.approx(delay, abs=1e-7)


def test_third_harmonic_alone() -> None:
    # x + k·x³ makes k·a²/4 of third harmonic (sin³ = (3 sin - sin 3)/4) and no second.
    rate = 48_000.0
    plan = SweepPlan(rate, 6.0)
    played = np.concatenate([plan.signal(), np.zeros(int(0.5 * rate))])
    recorded = played + 4.0 * 1e-2 / 0.1**2 * played**3 + 1e-6 * np.random.default_rng(0).standard_normal(played.size)
    measured = measure_channel(recorded, plan)
    band = (measured.f_hz > 30.0) & (measured.f_hz < 7_000.0)
    # The fundamental grows by 3·k·a²/4 = 3 %.
    np.testing.assert_allclose(20 * np.log10(measured.harmonics[1][band] * 1.03 / 1e-2), 0.0, atol=0.1)
    assert np.nanmax(measured.harmonics[0][band]) < 1e-4


def test_faults_of_a_recording() -> None:
    rate = 48_000.0
    plan = SweepPlan(rate, 2.0)
    played = np.concatenate([plan.signal(), np.zeros(20_000)])
    with pytest.raises(AudioError, match="channel is silent"):
        measure_channel(0.0 * played, plan)
    with pytest.raises(AudioError, match="sync markers are not in the recording"):
        measure_channel(np.random.default_rng(0).standard_normal(played.size), plan)
    with pytest.raises(AudioError, match="sync markers are not in the recording"):
        measure_channel(played[: plan.start + 5_000], plan)
    with pytest.raises(AudioError, match="played for 44100 Hz and recorded as 48000 Hz"):
        measure_channel(SweepPlan(44_100.0, 2.0).signal(), plan)


@pytest.mark.parametrize("ppm", [-40.0, 0.0, 25.0])
def test_clock_drift_is_stated(ppm: float) -> None:
    rate = 48_000.0
    plan = SweepPlan(rate, 5.0)
    played = np.concatenate([plan.signal(), np.zeros(4_800)])
    n = np.arange(played.size)
    recorded = np.interp(n / (1 + ppm * 1e-6), n, played)
    assert find_signal(recorded, plan).drift_ppm == pytest.approx(ppm, abs=0.5)


@pytest.mark.parametrize(("delay", "gain"), [(1.3e-4, -0.7), (-2.6e-3, 3.0)])
def test_alignment(delay: float, gain: float) -> None:
    f = np.geomspace(20.0, 20_000.0, 300)
    reference = CHAIN.response(f)
    found = align(gain * reference * np.exp(-2j * np.pi * f * delay), reference, f, np.ones(f.size))
    assert found.delay_s == pytest.approx(delay, abs=1e-9)
    assert found.gain_db == pytest.approx(20 * np.log10(abs(gain)), abs=1e-9)
    assert found.inverted == (gain < 0)
