"""magnitude_matched against Vicanek's own formulas, the squared magnitude it promises, and its mirror."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from a2d.analog.chain import AnalogChain
from a2d.digital.magnitude_matched import magnitude_matched
from a2d.digital.twin import make_twin
from a2d.errors import ConversionError
from tests.support import prototypes

RATE = 48_000.0


def convert(b, a, match_hz, rate=RATE):
    return magnitude_matched(np.asarray(b, float), np.asarray(a, float), np.asarray(rate), np.asarray(match_hz), None)


def vicanek_poles(f0, q, rate):
    """M. Vicanek, Matched Second Order Digital Filters (2016), eq. for a1, a2 from the impulse invariant poles."""
    w, d = 2 * np.pi * f0 / rate, 1 / (2 * q)
    swing = np.cos(np.sqrt(1 - d * d) * w) if d <= 1 else np.cosh(np.sqrt(d * d - 1) * w)
    return -2 * np.exp(-d * w) * swing, np.exp(-2 * d * w)


def vicanek(kind, f0, q, gain_db=0.0, rate=RATE):
    """The note's forms for low-, high-, band-pass and peaking sections, written out as they stand there."""
    g = 10 ** (gain_db / 20)
    a1, a2 = vicanek_poles(f0, q * np.sqrt(g), rate)
    p1 = np.sin(np.pi * f0 / rate) ** 2
    p0, p2 = 1 - p1, 4 * p1 * (1 - p1)
    a_0, a_1, a_2 = (1 + a1 + a2) ** 2, (1 - a1 + a2) ** 2, -4 * a2
    s = a_0 * p0 + a_1 * p1 + a_2 * p2
    slope = -a_0 + a_1 + 4 * (p0 - p1) * a_2
    if kind == "lowpass":
        b_1 = (s * q * q - a_0 * p0) / p1
        b0 = 0.5 * (np.sqrt(a_0) + np.sqrt(b_1))
        b = [b0, np.sqrt(a_0) - b0, 0]
    elif kind == "highpass":
        b0 = q * np.sqrt(s) / (4 * p1)
        b = [b0, -2 * b0, b0]
    elif kind == "bandpass":
        b_2 = (s - slope * p1) / (4 * p1**2)
        b1 = -0.5 * np.sqrt(slope + 4 * (p1 - p0) * b_2)
        b0 = 0.5 * (np.sqrt(b_2 + b1 * b1) - b1)
        b = [b0, b1, -b0 - b1]
    else:
        r1, r2 = s * g * g, slope * g * g
        b_2 = (r1 - r2 * p1 - a_0) / (4 * p1**2)
        b_1 = r2 + a_0 + 4 * (p1 - p0) * b_2
        w = 0.5 * (np.sqrt(a_0) + np.sqrt(b_1))
        b0 = 0.5 * (w + np.sqrt(w * w + b_2))
        b = [b0, 0.5 * (np.sqrt(a_0) - np.sqrt(b_1)), -b_2 / (4 * b0)]
    return np.array([*b, 1, a1, a2])


@pytest.mark.parametrize("kind", ["lowpass", "highpass", "bandpass", "peaking"])
@pytest.mark.parametrize(("f0", "q"), [(1000.0, 0.7071067811865476), (16_000.0, 2.0), (5000.0, 0.4), (19_000.0, 1.0)])
def test_is_the_published_form(kind, f0, q):
    """Both routes are a few operations on doubles; at f0/fs = 1/48 B2 comes from a difference of some 1e-5 over p²."""
    gain_db = 12.0 if kind == "peaking" else 0.0
    b, a = prototypes.section(kind, f0, q, gain_db)
    assert convert(b, a, f0) == pytest.approx(vicanek(kind, f0, q, gain_db), rel=1e-9, abs=1e-10)


@pytest.mark.parametrize(
    ("kind", "b", "q"),
    [
        ("lowpass", [0.789640899222, 0.221272919763, 0.0], 0.70710678),
        ("highpass", [0.235175657142, -0.470351314284, 0.235175657142], 0.70710678),
        ("bandpass", [0.541000247147, -0.425778673446, -0.1152215737], 1.0),
        ("peaking", [2.17140644412, -0.191886843456, -0.107574344598], 1.0),
    ],
)
def test_at_16_kHz_gives_the_figures_worked_from_the_note(kind, b, q):
    """Worked out from the note's formulas by a separate program, printed to 12 digits."""
    analog = prototypes.section(kind, 16_000.0, q, 12.0 if kind == "peaking" else 0.0)
    assert convert(*analog, 16_000.0)[:3] == pytest.approx(b, abs=1e-11)


@pytest.mark.parametrize("kind", ["peaking", "lowshelf", "highshelf"])
@pytest.mark.parametrize("f0", [100.0, 3000.0, 12_000.0, 20_000.0])
def test_a_cut_is_the_reciprocal_of_its_boost(kind, f0):
    boost, cut = (convert(*prototypes.section(kind, f0, 0.7071, g), f0) for g in (12.0, -12.0))
    product = np.polymul(boost[:3], cut[:3]) - np.polymul(boost[3:], cut[3:])
    assert np.abs(product).max() < 1e-12  # a few roundings of coefficients up to 4


@pytest.mark.parametrize("kind", ["peaking", "lowshelf", "highshelf", "bandpass", "allpass", "notch"])
@pytest.mark.parametrize("f0", [500.0, 6000.0, 20_000.0])
def test_value_at_the_match_frequency_and_at_zero(kind, f0):
    """Off f0 too: 1e-7 dB is the rounding of coefficients near -2 and 1, divided by p = sin²(w/2) = 1e-3 at 500 Hz."""
    analog = prototypes.section(kind, f0, 1.4, -9.0)
    match = 0.8 * f0
    sos = convert(*analog, match)
    exact, got = prototypes.analog_db(*analog, match), prototypes.digital_db(sos, match, RATE)
    assert got == pytest.approx(exact, abs=1e-7)
    low = prototypes.digital_db(sos, 0.01, RATE) - prototypes.analog_db(*analog, 0.01)
    assert abs(low) < (1.0 if kind == "bandpass" else 1e-6)


def test_a_notch_keeps_place_and_depth():
    f0 = 9000.0
    sos = convert(*prototypes.section("notch", f0, 2.0, 0.0), f0)
    zeros = np.roots(sos[:3])
    assert np.abs(zeros) == pytest.approx(1.0, abs=1e-15)
    assert np.abs(np.angle(zeros)) == pytest.approx(2 * np.pi * f0 / RATE, abs=1e-15)


@pytest.mark.parametrize(
    ("kind", "f0", "limit_db"), [("peaking", 16_000.0, 0.34), ("highshelf", 12_000.0, 0.18), ("lowpass", 1000.0, 1.06)]
)
def test_error_in_the_band_is_as_measured(kind, f0, limit_db):
    """The bilinear transform leaves 6 dB and more at 20 kHz in the first case."""
    analog = prototypes.section(kind, f0, 1.4 if kind == "peaking" else 0.7071, 12.0)
    f = np.geomspace(20.0, 20_000.0, 2000)
    error = prototypes.digital_db(convert(*analog, f0), f, RATE) - prototypes.analog_db(*analog, f)
    assert np.abs(error).max() < limit_db


def test_zeros_stay_on_the_side_where_the_analog_zeros_are():
    """b = (s - 1000)(s + 20000): one zero outside the circle, near e^{1000/fs}, one inside."""
    b, a = [1.0, 19_000.0, -2e7], [1.0, 30_000.0, 4e8]
    zeros = np.sort(np.abs(np.roots(convert(b, a, 3000.0)[:3])))
    assert zeros[0] < 1.0 < zeros[1]
    assert zeros[1] == pytest.approx(np.exp(1000.0 / RATE), rel=1e-4)


@pytest.mark.parametrize("kind", ["peaking", "highshelf", "notch", "bandpass", "lowpass", "highpass"])
@pytest.mark.parametrize("gain_db", [9.0, -9.0])
def test_an_inverting_section_is_the_other_times_minus_one(kind, gain_db):
    b, a = prototypes.section(kind, 3000.0, 0.8, gain_db)
    plain, inverted = convert(b, a, 3000.0), convert(-b, a, 3000.0)
    assert inverted[:3] == pytest.approx(-plain[:3], rel=1e-12, abs=1e-15)
    assert inverted[3:] == pytest.approx(plain[3:], rel=1e-12)


def test_a_resonance_above_half_the_rate_is_refused_by_name():
    b, a = prototypes.section("peaking", 30_000.0, 4.0, 6.0)
    chain = AnalogChain.of(["air"], b=[b], a=[a])
    with pytest.raises(ConversionError, match=r'half the sample rate; minimax .*\(section "air" at 48000 Hz\)'):
        make_twin(chain, RATE, method="magnitude_matched", match_hz=20_000.0)


def test_no_real_zeros_is_refused():
    b, a = prototypes.section("lowshelf", 5000.0, 50.0, -12.0)
    with pytest.raises(ConversionError, match=r"no real zeros .* minimax has"):
        convert(b, a, 5000.0)


@settings(max_examples=60, deadline=None)
@given(
    kind=st.sampled_from(prototypes.KINDS),
    f0=st.floats(10.0, 23_900.0),
    q=st.floats(0.1, 30.0),
    gain_db=st.floats(-30.0, 30.0),
)
def test_gives_a_stable_finite_section_or_refuses(kind, f0, q, gain_db):
    try:
        sos = convert(*prototypes.section(kind, f0, q, gain_db), f0)
    except ConversionError as error:
        assert "minimax" in str(error)  # noqa: PT017 - both outcomes are right, each has its own promise
        return
    assert np.all(np.isfinite(sos))
    assert abs(sos[5]) < 1.0
    assert abs(sos[4]) < 1.0 + sos[5]
