"""Coefficients that change while playing: the structures against scipy's, and how loud each policy clicks."""

from __future__ import annotations

import numpy as np
import pytest
import scipy.signal as ss

from a2d.errors import ParameterError
from a2d.listening.clicks import ClickTest, advice, click_dbfs, click_levels, high_pass_taps, ramp_needed_ms
from a2d.listening.moving import FORMS, POLICIES, Change, render_moving
from tests.support.prototypes import section

RATE = 48_000.0


def bell(gain_db: float, f0: float = 80.0, q: float = 1.0) -> np.ndarray:
    """By scipy's bilinear transform, prewarped at f0."""
    b, a = section("peaking", f0, q, gain_db)
    w = 2.0 * np.pi * f0
    scale = w / (2.0 * RATE * np.tan(0.5 * w / RATE))  # s -> s·scale makes f0 exact
    powers = scale ** np.array([2.0, 1.0, 0.0])
    return ss.tf2sos(*ss.bilinear(b * powers, a * powers, RATE))


def noise(count: int = 2000) -> np.ndarray:
    return np.random.default_rng(2).standard_normal((count, 2))


@pytest.mark.parametrize("structure", FORMS)
@pytest.mark.parametrize("policy", POLICIES)
def test_without_a_change_every_policy_is_a_plain_filter(structure: str, policy: str) -> None:
    sos = np.concatenate([bell(6.0), bell(-4.0, 900.0)])
    out = render_moving(np.stack([sos, sos, sos]), noise(), structure, Change(policy, 300, 64))
    # The structures add the same products in another order: rounding, times the gain at low frequencies.
    np.testing.assert_allclose(out, ss.sosfilt(sos, noise(), axis=0), rtol=0, atol=1e-10)


@pytest.mark.parametrize("structure", FORMS)
def test_a_ramp_between_equal_coefficients_is_the_plain_filter(structure: str) -> None:
    """Each structure's own equation, sample by sample, against scipy's: the ramp's steps are of one part in 1e14."""
    sos = np.concatenate([bell(6.0), bell(-4.0, 900.0)])
    nearly = sos * np.array([1 + 1e-14, 1, 1, 1, 1, 1])
    out = render_moving(np.stack([sos, nearly, sos]), noise(), structure, Change("ramp", 600, 500))
    np.testing.assert_allclose(out, ss.sosfilt(sos, noise(), axis=0), rtol=0, atol=1e-9)


def test_held_direct_form_1_keeps_past_samples() -> None:
    before, after = bell(12.0), bell(-12.0)
    x = noise()[:, 0]
    out = render_moving(np.stack([before, after]), x, "direct_form_1", Change("hold", 700))
    y = ss.sosfilt(before, x[:700])
    zi = ss.lfiltic(after[0, :3], after[0, 3:], y[::-1], x[699::-1])
    np.testing.assert_allclose(out[700:], ss.lfilter(after[0, :3], after[0, 3:], x[700:], zi=zi)[0], atol=1e-11)


def test_held_transposed_direct_form_2_keeps_its_sums() -> None:
    """scipy's lfilter is this structure, with this state."""
    before, after = bell(12.0), bell(-12.0)
    x = noise()[:, 0]
    out = render_moving(np.stack([before, after]), x, "transposed_direct_form_2", Change("hold", 700))
    _, zi = ss.sosfilt(before, x[:700], zi=np.zeros((1, 2)))
    np.testing.assert_allclose(out[700:], ss.sosfilt(after, x[700:], zi=zi)[0], atol=1e-11)


def test_a_ramp_of_one_block_moves_through_the_coefficients_between() -> None:
    before, after = bell(12.0), bell(-12.0)
    x = noise()[:, 0]
    out = render_moving(np.stack([before, after]), x, "direct_form_1", Change("ramp", 700, 500))
    y = ss.sosfilt(before, x[:700])
    for n in range(700, 1300):
        c = (before + (after - before) * min((n - 699) / 500.0, 1.0))[0]
        past = np.array([x[n], x[n - 1], x[n - 2], -y[n - 1], -y[n - 2]])
        y = np.append(y, c[[0, 1, 2, 4, 5]] @ past)
    np.testing.assert_allclose(out[700:1300], y[700:], atol=1e-11)


def test_a_cross_fade_goes_from_the_old_filter_to_a_new_one() -> None:
    before, after = bell(12.0), bell(-12.0)
    x = noise()[:, 0]
    out = render_moving(np.stack([before, after]), x, "delta", Change("cross_fade", 700, 100))
    old, new = ss.sosfilt(before, x), ss.sosfilt(after, x[700:])
    weight = np.minimum((np.arange(len(new)) + 1) / 100.0, 1.0)
    np.testing.assert_allclose(out[700:], old[700:] * (1 - weight) + new * weight, atol=1e-11)
    np.testing.assert_allclose(out[:700], old[:700], atol=1e-11)


def test_clearing_the_state_clicks_and_a_ramp_does_not() -> None:
    """+12 to -12 dB at 80 Hz under 100 Hz at -12 dBFS: about -14 dBFS at the tone's crest, below -100 dBFS by ramp."""
    test = ClickTest(RATE)
    cleared = click_dbfs(bell(12.0), bell(-12.0), test, "clear", "direct_form_1")
    assert cleared[2] == pytest.approx(-14.0, abs=1.0)  # a quarter of the period: the input's crest
    assert np.max(click_dbfs(bell(12.0), bell(-12.0), test, "ramp", "direct_form_1")) < -100.0


def test_the_measure_itself() -> None:
    """A step of 1 at the output has half its height above 2 kHz on either side of a linear-phase filter."""
    taps = high_pass_taps(RATE)
    step = np.repeat([0.0, 1.0], 3000)
    heard = np.convolve(step, taps, mode="valid")
    assert np.max(np.abs(heard)) == pytest.approx(0.5, abs=0.05)
    f, h = ss.freqz(taps, worN=8192, fs=RATE)
    assert np.max(np.abs(h[f < 1400.0])) < 10 ** (-155 / 20)
    assert np.min(np.abs(h[f > 2600.0])) > 0.999


def test_every_policy_in_every_structure_has_a_figure() -> None:
    levels = {(c.policy, c.structure): c.dbfs for c in click_levels(bell(6.0), bell(5.0), ClickTest(RATE))}
    assert set(levels) == {(p, s) for p in POLICIES for s in FORMS}
    assert levels["ramp", "direct_form_1"] < levels["hold", "direct_form_1"] < levels["clear", "direct_form_1"]


def test_advice_names_a_ramp_that_is_quiet() -> None:
    before, after, test = bell(12.0), bell(-12.0), ClickTest(RATE)
    needed = ramp_needed_ms(before, after, test, "direct_form_1")
    assert needed is not None
    longer = ClickTest(RATE, ramp_seconds=needed / 1000.0)
    assert np.max(click_dbfs(before, after, longer, "ramp", "direct_form_1")) < -100.0
    clicks = click_levels(before, after, test)
    said = advice(before, after, test, clicks, "direct_form_1")
    assert f"over {needed:g} ms" in said
    assert "never clear the state" in said
    assert "direct form I" in advice(before, after, test, clicks, "transposed_direct_form_2")


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: Change("jump", 64), "no policy 'jump'"),
        (lambda: Change("ramp", 64, 65), "ramp must be a whole number from 1 to 64"),
        (lambda: render_moving(np.zeros((2, 1, 6)), np.zeros(10), "lattice", Change("hold", 4)), "no structure"),
        (lambda: render_moving(np.zeros((3, 1, 6)), np.zeros(10), "delta", Change("hold", 5)), "need more samples"),
        (lambda: ClickTest(RATE, tone_hz=1500.0), "tone must lie from 20 to 1000"),
        (lambda: ClickTest(RATE, level_dbfs=1.0), "level must lie"),
    ],
)
def test_wrong_input_is_refused(call: object, message: str) -> None:
    with pytest.raises(ParameterError, match=message):
        call()  # type: ignore[operator]
