"""The comparison: worst means worst between grid points too, whatever the curve's shape."""

from __future__ import annotations

import numpy as np
import pytest
import scipy.signal as ss
from hypothesis import given, settings
from hypothesis import strategies as st

from a2d.analog.chain import AnalogChain
from a2d.analog.kinds import equalisers, filters
from a2d.arrays import FloatArray
from a2d.compare.curves import FLOOR_DB
from a2d.compare.errors import best_delay, compare, compare_sections
from a2d.digital.twin import Twin, make_twin
from a2d.errors import ParameterError


def chain_of(*sections: tuple[FloatArray, FloatArray, FloatArray]) -> AnalogChain:
    b, a, f0 = (np.concatenate(parts) for parts in zip(*sections, strict=True))
    return AnalogChain.of([f"s{i}" for i in range(len(f0))], b, a, f0)


def dense(chain: AnalogChain, twin: Twin, f: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Error curves by scipy: dB, degrees, µs."""
    analog, digital = np.ones(len(f), complex), np.ones(len(f), complex)
    delay = np.zeros(len(f))
    for b, a, row in zip(chain.b, chain.a, twin.sos, strict=True):
        analog *= ss.freqs(b, a, 2 * np.pi * f)[1]
        digital *= ss.freqz(row[:3], row[3:], worN=f, fs=twin.sample_rate_hz)[1]
        delay += ss.group_delay((row[:3], row[3:]), w=f, fs=twin.sample_rate_hz)[1] / twin.sample_rate_hz
    h = digital / analog
    step = 0.01
    analog_phase = np.zeros(len(f))
    for b, a in zip(chain.b, chain.a, strict=True):
        ends = [np.unwrap(np.angle(ss.freqs(b, a, 2 * np.pi * (f + d))[1])) for d in (-step, step)]
        analog_phase += ends[1] - ends[0]
    analog_delay = -analog_phase / (2 * np.pi * 2 * step)
    return 20 * np.log10(np.abs(h)), np.degrees(np.unwrap(np.angle(h))), 1e6 * (delay - analog_delay)


@pytest.mark.parametrize("rate", [44_100.0, 48_000.0, 96_000.0])
def test_a_chain_against_scipy_on_a_dense_grid(rate: float) -> None:
    chain = chain_of(
        equalisers.peaking(3_100.0, 8.0, 11.0), filters.highpass(41.0, 0.9), equalisers.high_shelf(9_000.0, -7.0, 0.8)
    )
    twin = make_twin(chain, rate)
    found = compare(chain, twin)
    curves = dense(chain, twin, np.geomspace(*found.band_hz, 40_001))
    # The dense grid misses a smooth maximum by at most the square of its step; scipy's numbers carry some 1e-7.
    for curve, worst in zip(curves, (found.magnitude_db, found.phase_deg, found.group_delay_us), strict=True):
        assert abs(worst.worst) == pytest.approx(np.max(np.abs(curve)), rel=2e-4)
        assert abs(worst.worst) >= np.max(np.abs(curve)) * (1 - 1e-5)


@given(
    f0=st.floats(30.0, 18_000.0), q=st.floats(0.3, 60.0), gain=st.floats(-15.0, 15.0), match=st.floats(0.9, 1.1)
)  # fmt: skip
@settings(max_examples=40, deadline=None)
def test_no_dense_grid_finds_more(f0: float, q: float, gain: float, match: float) -> None:
    chain = chain_of(equalisers.peaking(f0, q, gain))
    twin = make_twin(chain, 48_000.0, match_hz=f0 * match)
    found = compare(chain, twin, (20.0, 20_000.0)).magnitude_db
    near = f0 * (1.0 + np.linspace(-3.0, 3.0, 4001) / q)
    f = np.unique(np.concatenate([np.geomspace(20.0, 20_000.0, 4001), near[(near > 20.0) & (near < 20_000.0)]]))
    error = 20.0 * np.log10(np.abs(twin.response(f) / chain.response(f)))
    assert abs(found.worst) >= np.max(np.abs(error)) * (1.0 - 1e-6) - 1e-12


@pytest.mark.parametrize("own_hz", [61.0, 2345.6, 17_501.0])
def test_a_resonance_of_the_twin_alone_is_found(own_hz: float) -> None:
    """Sections made elsewhere may ring where the hardware does not, between the points of any fixed grid."""
    chain = chain_of(equalisers.peaking(1000.0, 1.0, 6.0))
    narrow = make_twin(chain_of(equalisers.peaking(own_hz, 4000.0, 12.0)), 48_000.0)
    twin = Twin.from_sos(np.concatenate([make_twin(chain, 48_000.0).sos, narrow.sos]), 48_000.0)
    f = own_hz * (1.0 + np.linspace(-5.0, 5.0, 20_001) / 4000.0)
    error = 20.0 * np.log10(np.abs(twin.response(f) / chain.response(f)))
    found = compare(chain, twin, (20.0, 20_000.0)).magnitude_db
    assert found.worst == pytest.approx(error.max(), rel=1e-6)
    assert found.at_hz == pytest.approx(own_hz, rel=1e-4)


def test_best_delay_takes_out_a_pure_delay() -> None:
    f = np.geomspace(20.0, 20_000.0, 400)
    delays = np.array([3.1e-6, -7.7e-6])
    np.testing.assert_allclose(best_delay(f, -360.0 * f * delays[:, None]), delays, rtol=1e-7)


def test_best_delay_is_the_least_worst() -> None:
    """Against a linear programme: minimise t subject to |phase + 360·f·tau| <= t."""
    from scipy.optimize import linprog

    f = np.geomspace(20.0, 20_000.0, 200)
    phase = np.random.default_rng(5).normal(size=200).cumsum()
    rows = np.concatenate([np.c_[360.0 * f, -np.ones(200)], np.c_[-360.0 * f, -np.ones(200)]])
    best = linprog([0, 1], rows, np.concatenate([-phase, phase]), bounds=[(None, None), (0, None)])
    tau = best_delay(f, phase[None])[0]
    assert np.max(np.abs(phase + 360.0 * f * tau)) == pytest.approx(best.fun, rel=1e-7)


def test_a_notch_that_misses_is_charged_and_one_that_meets_is_not() -> None:
    chain = chain_of(filters.notch(1000.0, 3.0))
    meets = compare(chain, make_twin(chain, 48_000.0)).magnitude_db
    assert abs(meets.worst) < 0.5
    twin = make_twin(chain, 48_000.0, match_hz=500.0)
    misses = compare(chain, twin).magnitude_db
    # Where one is at its bottom the other is not: the charge is from there down to the floor below the maximum, 0 dB.
    other = max(abs(h.response(misses.at_hz)[0]) for h in (chain, twin))
    assert abs(misses.worst) == pytest.approx(FLOOR_DB + 20.0 * np.log10(other), abs=0.01)
    assert abs(misses.worst) > 30.0


def test_sections_are_judged_alone() -> None:
    chain = chain_of(equalisers.peaking(12_000.0, 1.0, 9.0), filters.gain(3.0))
    twin = make_twin(chain, 48_000.0)
    rows = compare_sections(chain, twin)
    assert rows[0].magnitude_db.worst == pytest.approx(compare(chain, twin).magnitude_db.worst, rel=1e-12)
    assert rows[1].magnitude_db.worst == 0.0


@pytest.mark.parametrize(
    ("band", "message"), [((30.0, 20.0), "must rise"), ((20.0, 24_000.0), "below half the sample")]
)
def test_wrong_bands(band: tuple[float, float], message: str) -> None:
    chain = chain_of(filters.lowpass(1000.0, 1.0))
    with pytest.raises(ParameterError, match=message):
        compare(chain, make_twin(chain, 48_000.0), band)
