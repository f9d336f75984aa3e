"""H(s) of every section kind, against the equations evaluated directly and against scipy's analog designs."""

from __future__ import annotations

import numpy as np
import pytest
import scipy.signal as ss
from hypothesis import given
from hypothesis import strategies as st

from a2d.analog.build import build_chain
from a2d.analog.chain import AnalogChain
from a2d.analog.kinds.equalisers import equivalent_q
from a2d.design.read import parse_design
from a2d.errors import DesignError

F = np.geomspace(5.0, 80_000.0, 41)  # away from any normalising point
HEAD = '[design]\nname = "demo"\nsample_rates = [48000]\n[[section]]\nname = "a"\n'


def chain_of(text: str) -> AnalogChain:
    return build_chain(parse_design(HEAD + text))


def response(text: str, f: np.ndarray = F) -> np.ndarray:
    return chain_of(text).response(f)


# A few roundings of doubles: each H is some ten operations on numbers of like size.
ULPS = 2e-14

# H(s) with s normalised to f0, by hand from the W3C Note "Audio EQ Cookbook" (8 June 2021) and textbooks; p has q and
# g, the gain as a factor; A is its square root.
BY_HAND = {
    'kind = "gain"': lambda s, q, g, a: g + 0 * s,
    'kind = "lowpass"\nq = {q}': lambda s, q, g, a: g / (s * s + s / q + 1),
    'kind = "lowpass"\norder = 1': lambda s, q, g, a: g / (s + 1),
    'kind = "highpass"\nq = {q}': lambda s, q, g, a: g * s * s / (s * s + s / q + 1),
    'kind = "highpass"\norder = 1': lambda s, q, g, a: g * s / (s + 1),
    'kind = "allpass"\nq = {q}': lambda s, q, g, a: g * (s * s - s / q + 1) / (s * s + s / q + 1),
    'kind = "allpass"\norder = 1': lambda s, q, g, a: g * (1 - s) / (1 + s),
    'kind = "bandpass"\nq = {q}': lambda s, q, g, a: g * (s / q) / (s * s + s / q + 1),
    'kind = "bandpass_constant_skirt"\nq = {q}': lambda s, q, g, a: g * s / (s * s + s / q + 1),
    'kind = "notch"\nq = {q}': lambda s, q, g, a: g * (s * s + 1) / (s * s + s / q + 1),
    'kind = "peaking"\nq = {q}': lambda s, q, g, a: (s * s + s * a / q + 1) / (s * s + s / (a * q) + 1),
    'kind = "peaking"\nq = {q}\nq_meaning = "pole"': lambda s, q, g, a: (s * s + s * g / q + 1) / (s * s + s / q + 1),
    'kind = "low_shelf"\nq = {q}': lambda s, q, g, a: (
        a * (s * s + np.sqrt(a) / q * s + a) / (a * s * s + np.sqrt(a) / q * s + 1)
    ),
    'kind = "high_shelf"\nq = {q}': lambda s, q, g, a: (
        a * (a * s * s + np.sqrt(a) / q * s + 1) / (s * s + np.sqrt(a) / q * s + a)
    ),
    'kind = "low_shelf"\norder = 1': lambda s, q, g, a: (s + a) / (s + 1 / a),
    'kind = "high_shelf"\norder = 1': lambda s, q, g, a: (a * s + 1) / (s / a + 1),
}


@pytest.mark.parametrize("text", BY_HAND)
@pytest.mark.parametrize(("f0", "q", "gain"), [(137.0, 0.6, 7.5), (9_200.0, 3.1, -11.0)])
def test_equation(text: str, f0: float, q: float, gain: float) -> None:
    keys = text.format(q=q) + f"\ngain = {gain}" + ("" if '"gain"' in text else f"\nf0 = {f0}")
    g = 10.0 ** (gain / 20.0)
    expected = BY_HAND[text](1j * F / f0, q, g, np.sqrt(g))
    np.testing.assert_allclose(response(keys), expected, rtol=ULPS)


def test_a_cut_mirrors_its_boost_where_it_should() -> None:
    def pair(keys: str) -> np.ndarray:
        boost, cut = (response(f'kind = "peaking"\nf0 = 900\ngain = {g}\n{keys}') for g in (9, -9))
        return np.abs(boost * cut - 1.0)

    for keys in ("q = 2", 'q = 2\nq_meaning = "constant_mirrored"', "bandwidth = 1.3"):
        assert np.max(pair(keys)) < 1e-13
    for keys in ('q = 2\nq_meaning = "pole"', 'q = 2\nq_meaning = "constant_unmirrored"'):
        assert np.max(pair(keys)) > 0.1


@pytest.mark.parametrize(("octaves", "gain"), [(0.7, 12.0), (2.2, -7.0)])
@pytest.mark.parametrize(("at", "level"), [("half_gain", 0.5), ("-3 dB", None)])
def test_bandwidth_is_where_it_says(octaves: float, gain: float, at: str, level: float | None) -> None:
    keys = f'kind = "peaking"\nf0 = 1000\ngain = {gain}\nbandwidth = {octaves}\nbandwidth_at = "{at}"'
    edges = 1000.0 * 2.0 ** np.array([-octaves / 2.0, octaves / 2.0])
    wanted = gain * level if level else gain - np.sign(gain) * 10.0 * np.log10(2.0)
    np.testing.assert_allclose(20.0 * np.log10(np.abs(response(keys, edges))), wanted, atol=1e-10)


@given(st.floats(0.1, 30.0), st.floats(-24.0, 24.0))
def test_equivalent_q_all_give_the_same_section(q: float, gain: float) -> None:
    row = equivalent_q(q, gain)
    base = f'kind = "peaking"\nf0 = 1000\ngain = {gain!r}\n'
    given_as = [
        f'q = {row.pole!r}\nq_meaning = "pole"',
        f'q = {row.constant_mirrored!r}\nq_meaning = "constant_mirrored"',
        f"bandwidth = {row.octaves_at_half_gain!r}",
    ]
    if row.octaves_at_3_db is not None and abs(gain) > 3.02:
        given_as.append(f'bandwidth = {row.octaves_at_3_db!r}\nbandwidth_at = "-3 dB"')
    expected = response(base + f"q = {q!r}")
    for keys in given_as:
        np.testing.assert_allclose(response(base + keys), expected, rtol=1e-9)


def test_shelf_slope_one_is_q_of_half_sqrt_two() -> None:
    # 1/Q = sqrt((A + 1/A)(1/S - 1) + 2) at S = 1 (W3C note)
    base = 'kind = "high_shelf"\nf0 = 3000\ngain = 8\n'
    np.testing.assert_allclose(response(base + "slope = 1"), response(base + f"q = {0.5**0.5!r}"), rtol=ULPS)


def scipy_filter(kind: str, order: int, response_: str, w: object) -> tuple[np.ndarray, np.ndarray, float]:
    make = {
        "butterworth": lambda: ss.butter(order, w, response_, analog=True, output="zpk"),
        "bessel": lambda: ss.bessel(order, w, response_, analog=True, output="zpk", norm="mag"),
        'bessel"\nnormalisation = "phase': lambda: ss.bessel(order, w, response_, True, output="zpk", norm="phase"),
        'bessel"\nnormalisation = "delay': lambda: ss.bessel(order, w, response_, True, output="zpk", norm="delay"),
        'chebyshev"\nripple = "0.5 dB': lambda: ss.cheby1(order, 0.5, w, response_, analog=True, output="zpk"),
    }
    return make[kind]()


@pytest.mark.parametrize("kind", ["butterworth", "bessel", 'bessel"\nnormalisation = "phase',
                                  'bessel"\nnormalisation = "delay', 'chebyshev"\nripple = "0.5 dB'])  # fmt: skip
@pytest.mark.parametrize("order", [1, 2, 3, 5, 8])
@pytest.mark.parametrize("form", ["lowpass", "highpass", "bandpass"])
def test_prototype_filters_against_scipy(kind: str, order: int, form: str) -> None:
    edges = np.array([230.0, 1900.0]) if form == "bandpass" else 730.0
    zeros, poles, gain = scipy_filter(kind, order, form, 2.0 * np.pi * edges)
    place = "band = [230, 1900]" if form == "bandpass" else "f0 = 730"
    ours = response(f'kind = "{kind}"\nresponse = "{form}"\norder = {order}\n{place}')
    theirs = ss.freqs_zpk(zeros, poles, gain, 2.0 * np.pi * F)[1]
    if kind.endswith("delay") and form != "lowpass":
        # scipy's delay-normalised band-pass has the same poles but not unity at the centre; compare shapes.
        theirs = theirs * (abs(ours[20]) / abs(theirs[20]))
    if kind.startswith("chebyshev") and order % 2 == 0:
        assert np.max(np.abs(theirs)) <= 1.0 + 1e-12  # peak 1, as ours is by definition
    np.testing.assert_allclose(ours, theirs, rtol=1e-9)


def test_chebyshev_edge_at_3_db() -> None:
    # f0 is 3.01 dB below the peak: |H|² = 1/2 there
    keys = 'kind = "chebyshev"\nresponse = "lowpass"\norder = 6\nripple = 1\nedge = "-3 dB"\nf0 = 2000'
    assert abs(response(keys, np.array([2000.0]))[0]) ** 2 == pytest.approx(0.5, rel=1e-10)


def test_pole_zero_and_polynomial_give_the_same() -> None:
    w1, w2 = 2 * np.pi * 300.0, 2 * np.pi * 4000.0
    keys = 'kind = "pole_zero"\npoles = [{f0 = 300, q = 2}, {f0 = 4000}]\nzeros = [{f0 = 1000}]\ngain = "6 dB"'
    s = 2j * np.pi * F
    g = 10.0**0.3
    expected = g * (1 + s / (2 * np.pi * 1000.0)) / ((1 + s / (2 * w1) + (s / w1) ** 2) * (1 + s / w2))
    np.testing.assert_allclose(response(keys), expected, rtol=1e-12)
    den = np.polymul([1 / w1**2, 0.5 / w1, 1.0], [1 / w2, 1.0])
    num = [g / (2 * np.pi * 1000.0), g]
    poly = f'kind = "polynomial"\nb = {[float(v) for v in num]}\na = {[float(v) for v in den]}'
    np.testing.assert_allclose(response(poly), expected, rtol=1e-9)


def test_zeros_on_the_axis_at_the_origin_and_on_the_right() -> None:
    s = 2j * np.pi * F
    w = 2 * np.pi * 800.0
    notch = 'kind = "pole_zero"\npoles = [{f0 = 800, q = 1}]\nzeros = [{f0 = 800, axis = true}]'
    np.testing.assert_allclose(response(notch), (s**2 + w**2) / (s**2 + s * w + w**2), rtol=1e-12)
    high = (
        'kind = "pole_zero"\npoles = [{f0 = 800}]\nzeros = [{f0 = 0}]\nreference = 800\ngain = "-3.010299956639812 dB"'
    )
    np.testing.assert_allclose(response(high), s / (s + w), rtol=1e-12)
    allpass = 'kind = "pole_zero"\npoles = [{f0 = 800}]\nzeros = [{f0 = 800, right = true}]'
    np.testing.assert_allclose(response(allpass), (w - s) / (w + s), rtol=1e-12)


def test_a_negative_factor_keeps_its_polarity() -> None:
    keys = 'kind = "lowpass"\nf0 = 500\nq = 1\n'
    np.testing.assert_allclose(response(keys + "factor = -2.5"), -2.5 * response(keys), rtol=ULPS)


def test_an_ill_conditioned_polynomial_is_an_error() -> None:
    a = np.array([1.0])  # six resonances of Q 1000 at one frequency: doubles cannot hold their product's roots
    for _ in range(6):
        a = np.polymul(a, [1.0, 1e-3, 1.0])
    with pytest.raises(DesignError, match=r"too ill-conditioned to be factored .*@ section \"a\""):
        response(f'kind = "polynomial"\nb = [1]\na = {[float(v) for v in a]}')
