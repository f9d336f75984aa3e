"""Curves against scipy's routes, the asymptotes against what they approximate, roots against numpy's eigenvalues."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import signal

from a2d.analog.chain import AnalogChain
from a2d.digital.twin import make_twin
from a2d.report.roots import quadratic_roots, s_of_z, s_roots, z_roots
from a2d.report.traces import analog_curves, asymptote_db, frequency_grid, traces, twin_curves
from tests.support.chains import chain_of, equaliser, first_order_lowpass, highpass, lowpass, peaking

F = np.geomspace(20.0, 20_000.0, 301)


def test_analog_curves_against_scipy() -> None:
    chain = chain_of(highpass(40.0, 0.8), peaking(3_200.0, 1.4, 4.5), first_order_lowpass(9_000.0))
    b, a = np.array([1.0]), np.array([1.0])
    for k in range(len(chain)):
        b, a = np.polymul(b, np.trim_zeros(chain.b[k], "f")), np.polymul(a, np.trim_zeros(chain.a[k], "f"))
    _, h = signal.freqs(b, a, 2.0 * np.pi * F)
    curves = analog_curves(chain, F)
    # scipy evaluates expanded polynomials of degree 5: 1e-9 dB and degrees is what they keep.
    assert curves.magnitude_db == pytest.approx(20.0 * np.log10(np.abs(h)), abs=1e-9)
    assert curves.phase_deg == pytest.approx(np.degrees(np.unwrap(np.angle(h))), abs=1e-8)
    slope = -np.gradient(np.radians(curves.phase_deg), 2.0 * np.pi * F, edge_order=2)
    # Central differences on a 2.3 % grid: the error is of the order (0.023·Q)²/6 of the largest delay.
    assert curves.group_delay_us == pytest.approx(1e6 * slope, abs=2e-3 * curves.group_delay_us.max())


@pytest.mark.parametrize("rate", [44_100.0, 96_000.0])
def test_twin_curves_against_scipy(rate: float) -> None:
    chain = equaliser()
    twin = make_twin(chain, rate, match_hz=np.minimum(chain.f0_hz, 0.4 * rate))
    _, h = signal.sosfreqz(twin.sos, F, fs=rate)
    curves = twin_curves(twin, F)
    assert curves.magnitude_db == pytest.approx(20.0 * np.log10(np.abs(h)), abs=1e-8)
    turned = np.unwrap(np.angle(h))
    difference = curves.phase_deg - np.degrees(turned)
    assert difference == pytest.approx(360.0 * np.round(difference[0] / 360.0), abs=1e-6)


def test_error_is_what_the_comparison_judges() -> None:
    chain = chain_of(peaking(16_000.0, 1.0, 12.0))
    shown = traces(chain, [make_twin(chain, 48_000.0)], [(20.0, 23_999.0)]).twins[0]
    # The known figure: 6.22 dB (within 0.02) are left of the analog gain at 20 kHz ... the twin falls to 0 dB
    # at half the rate, so that its error there is minus the analog gain.
    analog_db = analog_curves(chain, shown.error.f_hz).magnitude_db
    assert shown.error.magnitude_db[-1] == pytest.approx(-analog_db[-1], abs=1e-3)
    assert shown.curves.magnitude_db - shown.error.magnitude_db == pytest.approx(analog_db, abs=1e-9)


def test_notch_leaves_a_gap_in_phase_and_delay() -> None:
    w = 2.0 * np.pi * 1_000.0
    chain = chain_of(([1.0, 0.0, w * w], [1.0, w / 5.0, w * w]))
    shown = traces(chain, [make_twin(chain, 48_000.0)], [(20.0, 20_000.0)])
    at = int(np.argmin(np.abs(shown.analog.f_hz - 1_000.0)))
    assert shown.analog.f_hz[at] == pytest.approx(1_000.0, rel=1e-12)
    assert np.isnan(shown.analog.group_delay_us[at])
    assert np.nanmax(np.abs(shown.twins[0].error.group_delay_us)) < 50.0


@pytest.mark.parametrize("section", [lowpass(1_000.0, 0.7071), first_order_lowpass(300.0), highpass(50.0, 0.6)])
def test_asymptotes_meet_the_curve_far_from_corners(section: tuple[list[float], list[float]]) -> None:
    chain = chain_of(section)
    far = np.array([1e-3, 1e-2, 1e7, 1e8])
    # A corner ratio of 10^3.3 or more away the curve is within 20·lg(1 + 10^-6.6) of its asymptote.
    assert asymptote_db(chain, far) == pytest.approx(analog_curves(chain, far).magnitude_db, abs=1e-3)


def test_asymptote_is_3_db_off_at_a_first_order_corner() -> None:
    chain = chain_of(first_order_lowpass(300.0))
    corner = np.array([300.0])
    gap = asymptote_db(chain, corner) - analog_curves(chain, corner).magnitude_db
    assert gap == pytest.approx(10.0 * np.log10(2.0), abs=1e-12)


def test_grid_rises_stays_inside_and_finds_narrow_sections() -> None:
    chain = chain_of(peaking(1_000.0, 500.0, 12.0))
    f = frequency_grid((20.0, 20_000.0), s_roots(chain).values)
    assert f[0] == pytest.approx(20.0)
    assert f[-1] == pytest.approx(20_000.0)
    assert np.all(np.diff(f) > 0.0)
    assert analog_curves(chain, f).magnitude_db.max() == pytest.approx(12.0, abs=0.01)


@pytest.mark.parametrize("c", [[1.0, -3.0, 2.0], [2.0, 1.0, 5.0], [1.0, 1e9, 1.0], [0.0, 2.0, -4.0], [3.0, 0.0, 0.0]])
def test_quadratic_roots_against_eigenvalues(c: list[float]) -> None:
    ours, theirs = np.sort_complex(quadratic_roots(np.array(c))), np.sort_complex(np.roots(c).astype(complex))
    assert ours == pytest.approx(theirs, rel=1e-7, abs=1e-9)


def test_close_roots_keep_their_digits() -> None:
    assert max(quadratic_roots(np.array([1.0, 1e9, 1.0])), key=abs) == pytest.approx(-1e9)
    assert min(quadratic_roots(np.array([1.0, 1e9, 1.0])), key=abs) == pytest.approx(-1e-9, rel=1e-15)


def test_first_order_rows_have_one_root_and_gains_none() -> None:
    w = 2.0 * np.pi * 100.0
    chain = AnalogChain.of(["rc", "gain"], [[0, 0, w], [0, 0, -2.0]], [[0, 1, w], [0, 0, 1.0]])
    roots = z_roots(make_twin(chain, 48_000.0))
    assert roots.section.tolist() == [0, 0]
    assert roots.values[~roots.is_pole] == pytest.approx([-1.0])
    # The pole of a section matched at its own corner is close to where it rings alike: |s| = 2π·100 to (πf/fs)²/3.
    assert s_of_z(roots, 48_000.0).values[roots.is_pole].real == pytest.approx([-w], rel=1e-4)
