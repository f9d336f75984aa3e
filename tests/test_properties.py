"""Any valid section at any rate gives finite, stable coefficients that meet the match point."""

from __future__ import annotations

import numpy as np
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from a2d.analog.build import build_chain
from a2d.design.read import check_design
from a2d.digital.twin import make_twin
from a2d.errors import DesignError

RATES = st.sampled_from([8_000.0, 32_000.0, 44_100.0, 48_000.0, 96_000.0, 192_000.0, 768_000.0])
F0 = st.floats(5.0, 300_000.0)
Q = st.floats(0.1, 100.0)
GAIN = st.floats(-30.0, 30.0)
ORDER = st.integers(1, 12)
TAU = st.floats(1e-6, 1e-1)


def table(**keys: st.SearchStrategy[object]) -> st.SearchStrategy[dict[str, object]]:
    return st.fixed_dictionaries(keys)


def prototype(kind: str, **more: st.SearchStrategy[object]) -> st.SearchStrategy[dict[str, object]]:
    one = table(kind=st.just(kind), response=st.sampled_from(["lowpass", "highpass"]), order=ORDER, f0=F0, **more)
    band = F0.flatmap(lambda low: st.floats(1.05, 20.0).map(lambda ratio: [low, low * ratio]))
    two = table(kind=st.just(kind), response=st.just("bandpass"), order=st.integers(1, 6), band=band, **more)
    return st.one_of(one, two)


ROOT = st.one_of(table(f0=F0), table(f0=F0, q=st.floats(0.5, 50.0)))
SECTIONS = st.one_of(
    table(kind=st.just("gain"), gain=GAIN, factor=st.sampled_from([1.0, -1.0, -3.7, 0.01])),
    table(kind=st.sampled_from(["lowpass", "highpass", "allpass"]), f0=F0, q=Q, gain=GAIN),
    table(kind=st.sampled_from(["lowpass", "highpass", "allpass"]), f0=F0, order=st.just(1)),
    table(kind=st.sampled_from(["bandpass", "bandpass_constant_skirt", "notch"]), f0=F0, q=Q),
    table(
        kind=st.just("peaking"),
        f0=F0,
        q=Q,
        gain=GAIN,
        q_meaning=st.sampled_from(["w3c", "pole", "constant_mirrored", "constant_unmirrored"]),
    ),
    table(kind=st.just("peaking"), f0=F0, gain=GAIN, bandwidth=st.floats(0.05, 5.0)),
    table(kind=st.sampled_from(["low_shelf", "high_shelf"]), f0=F0, gain=GAIN, q=Q),
    table(kind=st.sampled_from(["low_shelf", "high_shelf"]), f0=F0, gain=GAIN, slope=st.floats(0.1, 1.0)),
    table(kind=st.sampled_from(["low_shelf", "high_shelf"]), f0=F0, gain=GAIN, order=st.just(1)),
    prototype("butterworth"),
    prototype("bessel", normalisation=st.sampled_from(["magnitude", "phase", "delay"])),
    prototype("chebyshev", ripple=st.floats(0.01, 3.0)),
    table(
        kind=st.just("time_constants"),
        poles=st.lists(TAU, min_size=2, max_size=4),
        zeros=st.lists(TAU, max_size=2),
        highpass=st.lists(TAU, max_size=1),
    ),
    table(
        kind=st.just("pole_zero"),
        poles=st.lists(ROOT, min_size=2, max_size=3),
        zeros=st.lists(table(f0=F0), max_size=2),
    ),
    table(
        kind=st.just("polynomial"),
        b=st.lists(st.floats(-5.0, 5.0), min_size=1, max_size=3),
        a=st.tuples(st.floats(1e-9, 1e-7), st.floats(1e-5, 1e-3), st.just(1.0)).map(list),
    ),
)


@given(section=SECTIONS, rate=RATES)
@settings(max_examples=400, deadline=None)
def test_valid_sections_convert(section: dict[str, object], rate: float) -> None:
    try:
        whole = {"design": {"name": "demo", "sample_rates": [rate]}, "section": [{"name": "a"} | section]}
        chain = build_chain(check_design(whole))
    except DesignError:
        assume(False)
    match = np.minimum(chain.f0_hz, 0.45 * rate)
    twin = make_twin(chain, rate, match_hz=match)
    assert np.all(np.isfinite(twin.sos))
    a1, a2 = twin.sos[:, 4], twin.sos[:, 5]
    # Inside the stability triangle (Jury); a pole at 5 Hz and 768 kHz lies 4e-5 inside, far above rounding.
    assert np.all(np.abs(a2) < 1.0)
    assert np.all(np.abs(a1) < 1.0 + a2)
    for b, a, row, f in zip(chain.b, chain.a, twin.sos, match, strict=True):
        s, z1 = 2j * np.pi * f, np.exp(-2j * np.pi * f / rate)
        analog = np.polyval(b, s) / np.polyval(a, s)
        digital = np.polyval(row[2::-1], z1) / np.polyval(row[:2:-1], z1)
        # Rounding of coefficients near 1 is magnified by 1/w² of the match frequency, and by Q, in the plain sum.
        size = np.polyval(np.abs(b), abs(s)) / abs(np.polyval(a, s))
        w, q = 2.0 * np.pi * f / rate, max(1.0, abs(np.polyval(np.abs(a), abs(s)) / np.polyval(a, s)))
        assert abs(digital - analog) <= 1e-14 * size * q * max(1.0, w**-2) + 1e-300
