"""Each named fault of a device is recognised, and a faultless one is not accused."""

from __future__ import annotations

import numpy as np
import pytest

from a2d.digital.twin import make_twin
from a2d.listening import suspects
from a2d.listening.distortion import looks_clipped
from a2d.listening.judge import Verdict, judge_measured
from a2d.listening.measure import measure_channel
from a2d.listening.sweep import SweepPlan
from tests.support.chains import chain_of, highpass, peaking
from tests.support.device import DELAY_S, device

RATE = 48_000.0
PLAN = SweepPlan(RATE, 2.5)
PLAYED = PLAN.signal()
CHAIN = chain_of(highpass(28.0, 0.8), peaking(110.0, 3.0, -7.0), peaking(3_200.0, 1.4, 4.5))
OTHER = chain_of(highpass(60.0, 0.8), peaking(900.0, 1.0, 6.0))
TWINS = {rate: make_twin(CHAIN, rate) for rate in (44_100.0, RATE, 96_000.0)}
FLAT = np.array([[1.0, 0.0, 0.0, 1.0, 0.0, 0.0]])


def verdict(recorded: np.ndarray, loopback: np.ndarray | None = None) -> Verdict:
    measured = measure_channel(recorded, PLAN, loopback)
    f = measured.f_hz
    own = TWINS[RATE].response(f)
    others = suspects.wrong_rates(TWINS, RATE, f) | suspects.bypassed(f)
    others[suspects.SWAPPED] = make_twin(OTHER, RATE).response(f) if loopback is None else 1.0 / own
    return judge_measured(measured, own, others, 0.5)


def test_the_right_filter() -> None:
    found = verdict(device(PLAYED, TWINS[RATE].sos, RATE))
    assert (found.words, found.right) == (("right filter",), True)


@pytest.mark.parametrize("rate", [44_100.0, 96_000.0])
def test_coefficients_of_another_rate(rate: float) -> None:
    found = verdict(device(PLAYED, TWINS[rate].sos, RATE))
    assert found.words == (f"wrong rate: coefficients made for {rate:g} Hz",)
    assert not found.right


def test_polarity() -> None:
    assert verdict(device(PLAYED, TWINS[RATE].sos, RATE, gain=-0.5)).words == ("wrong polarity",)


def test_swapped_with_another_channel() -> None:
    assert verdict(device(PLAYED, make_twin(OTHER, RATE).sos, RATE)).words == ("swapped channels",)


def test_swapped_with_the_loopback() -> None:
    through = device(PLAYED, TWINS[RATE].sos, RATE)
    loopback = device(PLAYED, FLAT, RATE, delay_s=DELAY_S, second_harmonic=0.0)
    assert verdict(through, loopback).words == ("right filter",)
    assert verdict(loopback, through).words == ("swapped channels",)


def test_bypassed() -> None:
    assert verdict(device(PLAYED, FLAT, RATE)).words == ("bypassed: no filter at all",)


def test_another_filter() -> None:
    wrong = make_twin(chain_of(highpass(28.0, 0.8), peaking(110.0, 3.0, -7.0), peaking(3_600.0, 1.4, 4.5)), RATE)
    (words,) = verdict(device(PLAYED, wrong.sos, RATE)).words
    assert words.startswith("another filter (")


def test_too_noisy() -> None:
    found = verdict(device(PLAYED, TWINS[RATE].sos, RATE, noise_dbfs=-25.0))
    assert "too noisy" in found.words
    assert not found.right


@pytest.mark.parametrize("share", [0.5, 0.7, 0.9])
def test_clipped_in_the_device(share: float) -> None:
    clean = device(PLAYED, TWINS[RATE].sos, RATE)
    clipped = device(PLAYED, TWINS[RATE].sos, RATE, clip_at=share * float(np.max(np.abs(clean))))
    assert "clipped" in verdict(clipped).words


def test_clipped_at_full_scale() -> None:
    loud = 20.0 * device(PLAYED, TWINS[RATE].sos, RATE)
    assert "clipped" in verdict(np.clip(loud, -1.0, 1.0 - 2.0**-23)).words


def test_an_offset_and_a_late_start_are_no_faults() -> None:
    recorded = device(PLAYED, TWINS[RATE].sos, RATE)[int(0.3 * RATE) :]
    assert verdict(recorded + 0.05).words == ("right filter",)


def test_mains_hum_does_not_pass() -> None:
    clean = device(PLAYED, TWINS[RATE].sos, RATE)
    hum = 10 ** (-45 / 20) * np.sin(2 * np.pi * 50.0 * np.arange(clean.size) / RATE)
    assert not verdict(clean + hum).right


@pytest.mark.parametrize("noise_dbfs", [-100.0, -60.0, -40.0])
def test_noise_is_not_taken_for_clipping(noise_dbfs: float) -> None:
    for sections in (FLAT, TWINS[RATE].sos):
        recorded = device(PLAYED, sections, RATE, noise_dbfs=noise_dbfs)
        assert not looks_clipped(recorded, PLAN, round(DELAY_S * RATE))
