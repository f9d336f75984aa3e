"""Potentiometer laws: ends, middle, mirror image, and the textbook's exponential."""

import numpy as np
import pytest

from a2d.analog.network.taper import TAPERS, track_fraction
from tests.support.networks import pot

P = np.linspace(0.0, 1.0, 21)
LAWS = {
    "linear": {},
    "logarithmic": {"mid": 0.15},
    "reverse_logarithmic": {"mid": 0.85},
    "two_slope": {"mid": 0.12},
    "table": {"table": ((0.0, 0.0), (0.3, 0.05), (0.5, 0.2), (1.0, 1.0))},
}


def law(taper, **more):
    return track_fraction(pot(1e4, "a", "w", "b", 0.5, taper=taper, **more), P)


def test_every_taper_is_tested():
    assert set(LAWS) == set(TAPERS)


@pytest.mark.parametrize("taper", LAWS)
def test_ends_and_middle(taper):
    f = law(taper, **LAWS[taper])
    assert f[[0, -1]] == pytest.approx([0.0, 1.0], abs=1e-15)
    assert np.all(np.diff(f) > 0)
    assert f[10] == pytest.approx({"linear": 0.5, "table": 0.2}.get(taper, LAWS[taper].get("mid")), rel=1e-14)


@pytest.mark.parametrize("mid", [*np.linspace(0.02, 0.48, 47), *np.linspace(0.52, 0.98, 47)])
def test_ends_of_logarithmic_tracks_are_exact(mid):
    """A rounding error beyond 1 would be a resistance below zero, a pole in the right half-plane."""
    taper = "logarithmic" if mid < 0.5 else "reverse_logarithmic"
    assert law(taper, mid=mid)[[0, -1]].tolist() == [0.0, 1.0]


def test_logarithmic_law_rises_by_equal_ratios():
    """f + 1/(k - 1) is an exponential: equal steps of the shaft multiply it by equal factors."""
    k = (1 / 0.15 - 1) ** 2
    shifted = law("logarithmic", mid=0.15) + 1 / (k - 1)
    assert shifted[1:] / shifted[:-1] == pytest.approx(np.full(20, k ** (1 / 20)), rel=1e-12)


def test_reverse_is_the_mirror_image():
    assert law("reverse_logarithmic", mid=0.85) == pytest.approx(1 - law("logarithmic", mid=0.15)[::-1], abs=1e-14)


def test_two_slopes():
    f = law("two_slope", mid=0.12)
    assert np.diff(f)[:10] == pytest.approx(np.full(10, 0.012))
    assert np.diff(f)[10:] == pytest.approx(np.full(10, 0.088))
