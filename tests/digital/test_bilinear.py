"""The prewarped bilinear transform against the W3C note, scipy, python-control and known figures."""

from __future__ import annotations

import itertools

import control
import numpy as np
import pytest
import scipy.signal as ss

from a2d.analog.chain import AnalogChain
from a2d.analog.kinds import equalisers, filters
from a2d.analog.kinds.prototypes import bandpass_of, butterworth_poles
from a2d.arrays import FloatArray
from a2d.compare.errors import compare
from a2d.digital.twin import make_twin
from a2d.errors import ConversionError, ParameterError


def chain_of(sections: tuple[FloatArray, FloatArray, FloatArray]) -> AnalogChain:
    return AnalogChain.of([str(i) for i in range(len(sections[2]))], *sections)


def note(kind: str, f0: float, q: float, gain: float, rate: float) -> np.ndarray:
    """Coefficients as the W3C Note "Audio EQ Cookbook" (8 June 2021) prints them."""
    amp, w0 = 10.0 ** (gain / 40.0), 2.0 * np.pi * f0 / rate
    c, alpha = np.cos(w0), np.sin(w0) / (2.0 * q)
    r, up, down = 2.0 * np.sqrt(amp) * alpha, amp + 1, amp - 1
    b, a = {
        "lowpass": ([(1 - c) / 2, 1 - c, (1 - c) / 2], [1 + alpha, -2 * c, 1 - alpha]),
        "highpass": ([(1 + c) / 2, -(1 + c), (1 + c) / 2], [1 + alpha, -2 * c, 1 - alpha]),
        "skirt": ([np.sin(w0) / 2, 0, -np.sin(w0) / 2], [1 + alpha, -2 * c, 1 - alpha]),
        "bandpass": ([alpha, 0, -alpha], [1 + alpha, -2 * c, 1 - alpha]),
        "notch": ([1, -2 * c, 1], [1 + alpha, -2 * c, 1 - alpha]),
        "allpass": ([1 - alpha, -2 * c, 1 + alpha], [1 + alpha, -2 * c, 1 - alpha]),
        "peaking": ([1 + alpha * amp, -2 * c, 1 - alpha * amp], [1 + alpha / amp, -2 * c, 1 - alpha / amp]),
        "low_shelf": (
            [amp * (up - down * c + r), 2 * amp * (down - up * c), amp * (up - down * c - r)],
            [up + down * c + r, -2 * (down + up * c), up + down * c - r],
        ),
        "high_shelf": (
            [amp * (up + down * c + r), -2 * amp * (down + up * c), amp * (up + down * c - r)],
            [up - down * c + r, 2 * (down - up * c), up - down * c - r],
        ),
    }[kind]
    return np.array([*b, *a]) / a[0]


OURS = {
    "lowpass": lambda f0, q, g: filters.lowpass(f0, q),
    "highpass": lambda f0, q, g: filters.highpass(f0, q),
    "skirt": lambda f0, q, g: filters.bandpass_constant_skirt(f0, q),
    "bandpass": lambda f0, q, g: filters.bandpass(f0, q),
    "notch": lambda f0, q, g: filters.notch(f0, q),
    "allpass": lambda f0, q, g: filters.allpass(f0, q),
    "peaking": equalisers.peaking,
    "low_shelf": lambda f0, q, g: equalisers.low_shelf(f0, g, q),
    "high_shelf": lambda f0, q, g: equalisers.high_shelf(f0, g, q),
}
GRID = list(itertools.product([20.0, 731.0, 5_000.0, 19_000.0], [0.3, 0.7071, 5.0], [-12.0, 6.0], [44_100.0, 96_000.0]))


@pytest.mark.parametrize("kind", OURS)
def test_w3c_note(kind: str) -> None:
    for f0, q, gain, rate in GRID:
        sos = make_twin(chain_of(OURS[kind](f0, q, gain)), rate).sos[0]
        # Coefficients are of the order of 1 to 4: 1e-12 leaves room for the cancellations of 1 - cos at 20 Hz.
        np.testing.assert_allclose(
            sos, note(kind, f0, q, gain, rate), rtol=0, atol=1e-12, err_msg=f"{f0} {q} {gain} {rate}"
        )


@pytest.mark.parametrize("order", [1, 2, 5])
def test_scipy_bilinear_with_the_same_prewarping(order: int) -> None:
    rate, match = 48_000.0, 6_000.0
    warped = 2.0 * rate * np.tan(np.pi * match / rate)
    theirs = ss.butter(order, warped, analog=True, output="zpk")
    digital = ss.bilinear_zpk(*theirs, fs=rate)
    from a2d.analog.kinds.prototypes import lowpass_of

    twin = make_twin(chain_of(lowpass_of(butterworth_poles(order), match, 0.0)), rate)
    f = np.geomspace(20.0, 20_000.0, 50)
    expected = ss.freqz_zpk(*digital, worN=f, fs=rate)[1]
    np.testing.assert_allclose(twin.response(f), expected, rtol=1e-9)


def test_python_control_prewarped_conversion() -> None:
    sections = equalisers.peaking(5_200.0, 1.3, 9.0)
    rate, match = 48_000.0, 5_200.0
    system = control.TransferFunction(sections.b[0], sections.a[0])
    theirs = control.sample_system(system, 1.0 / rate, method="bilinear", prewarp_frequency=2.0 * np.pi * match)
    ours = make_twin(chain_of(sections), rate, match_hz=match).sos[0]
    scale = theirs.den[0][0][0]
    np.testing.assert_allclose(ours, np.concatenate([theirs.num[0][0], theirs.den[0][0]]) / scale, rtol=1e-9)


def test_known_figure_of_a_16_khz_bell() -> None:
    """Peaking at 16 kHz, +12 dB, Q 1 at 48 kHz leaves 6.22 dB at the band's end: H(s) and the W3C note's
    coefficients evaluated at 20 kHz.
    """
    sos = note("peaking", 16_000.0, 1.0, 12.0, 48_000.0)
    s, amp = 1j * 20.0 / 16.0, 10.0**0.3
    analog = (s * s + s * amp + 1) / (s * s + s / amp + 1)
    z = np.exp(-2j * np.pi * 20.0 / 48.0)
    digital = np.polyval(sos[2::-1], z) / np.polyval(sos[:2:-1], z)
    figure = 20.0 * np.log10(abs(digital / analog))
    assert figure == pytest.approx(-6.22, abs=0.02)
    chain = chain_of(equalisers.peaking(16_000.0, 1.0, 12.0))
    found = compare(chain, make_twin(chain, 48_000.0)).magnitude_db
    assert found.worst == pytest.approx(figure, abs=1e-9)
    assert found.at_hz == 20_000.0


def test_without_prewarping_a_10_khz_bell_lands_at_8855_hz() -> None:
    """fs/π·atan(π·f0/fs) = 8,855 Hz: what matching at (nearly) 0 Hz does."""
    chain = chain_of(equalisers.peaking(10_000.0, 4.0, 12.0))
    twin = make_twin(chain, 48_000.0, match_hz=1.0)
    f = np.linspace(8_000.0, 11_000.0, 30_001)
    peak = f[np.argmax(np.abs(twin.response(f)))]
    assert peak == pytest.approx(48_000.0 / np.pi * np.arctan(np.pi * 10_000.0 / 48_000.0), abs=0.2)
    assert peak == pytest.approx(8_855.0, abs=0.5)


def test_first_order_stays_first_order_and_a_gain_a_gain() -> None:
    chain = AnalogChain.of(["one", "gain"], b=[[0, 0, 1], [0, 0, -3]], a=[[0, 1e-4, 1], [0, 0, 2]])
    sos = make_twin(chain, 48_000.0).sos
    assert sos[0, 2] == sos[0, 5] == 0.0
    np.testing.assert_array_equal(sos[1], [-1.5, 0, 0, 1, 0, 0])


def test_broadcasts_over_leading_axes() -> None:
    sections = equalisers.peaking(np.array([[100.0], [1000.0]]), 1.0, np.array([-6.0, 3.0, 6.0]))
    from a2d.digital.bilinear import bilinear

    rates = np.array([44_100.0, 96_000.0])[:, None, None, None]
    sos = bilinear(sections.b, sections.a, rates, sections.f0_hz, np.array([20.0, 20e3]))
    assert sos.shape == (2, 2, 3, 1, 6)
    single = equalisers.peaking(1000.0, 1.0, 6.0)
    np.testing.assert_array_equal(sos[1, 1, 2, 0], make_twin(chain_of(single), 96_000.0).sos[0])


def test_sosfilt_takes_the_rows() -> None:
    chain = chain_of(bandpass_of(butterworth_poles(3), (300.0, 3000.0), 0.0))
    twin = make_twin(chain, 48_000.0)
    impulse = np.zeros(4096 * 4)
    impulse[0] = 1.0
    f = np.array([500.0, 1000.0, 2500.0])
    spectrum = np.exp(-2j * np.pi * np.outer(f, np.arange(len(impulse))) / 48_000.0) @ ss.sosfilt(twin.sos, impulse)
    np.testing.assert_allclose(spectrum, twin.response(f), rtol=1e-9)


@pytest.mark.parametrize("f0", [24_000.0, 30_000.0])
def test_a_match_frequency_beyond_half_the_rate_is_an_error(f0: float) -> None:
    chain = chain_of(equalisers.peaking(f0, 1.0, 6.0))
    with pytest.raises(ParameterError, match=r'section "0" .*below half the sample rate .*allowed below 24000 Hz'):
        make_twin(chain, 48_000.0)


def test_more_zeros_than_poles_is_an_error() -> None:
    chain = AnalogChain.of(["rise"], b=[[0, 1e-4, 1]], a=[[0, 0, 1]])
    with pytest.raises(ConversionError, match=r'section "rise" has more zeros than poles'):
        make_twin(chain, 48_000.0)


@pytest.mark.parametrize(
    ("wrong", "message"),
    [
        ({"sample_rate_hz": "48k"}, "sample rate is not a real number"),
        ({"sample_rate_hz": 48_000.0 + 0j}, "sample rate is not a real number"),
        ({"match_hz": [1e3, 2e3, 3e3]}, "match_hz must be one number or one a section"),
        ({"method": ["bilinear"]}, "method must be one name or one a section"),
        ({"weight_phase": 101.0}, r"weight_phase must lie from 0 to 100 \(101\)"),
    ],
)
def test_arguments_that_make_no_sense_are_one_clear_error(wrong: dict[str, object], message: str) -> None:
    chain = AnalogChain.of(["a", "b"], b=[[0, 0, 1], [0, 0, 1]], a=[[0, 1e-3, 1], [0, 1e-4, 1]])
    with pytest.raises(ParameterError, match=message):
        make_twin(chain, **{"sample_rate_hz": 48_000.0, **wrong})  # type: ignore[arg-type]


def test_an_unknown_method_is_an_error() -> None:
    chain = chain_of(equalisers.peaking(1000.0, 1.0, 6.0))
    with pytest.raises(ParameterError, match="there is no method 'magic'"):
        make_twin(chain, 48_000.0, method="magic")


@pytest.mark.parametrize("a", [[1, 0, 1e6], [1, -3, 1e6], [0, 1, -5], [1, 2, 0]])
def test_an_unstable_section_is_an_error(a: list[float]) -> None:
    chain = AnalogChain.of(["howl"], b=[[0, 0, 1]], a=[a], f0_hz=100.0)
    with pytest.raises(ConversionError, match=r'section "howl" is unstable'):
        make_twin(chain, 48_000.0)
