"""A plain gain among the sections stays one: no pole at half the sample rate, cancelled or not."""

from __future__ import annotations

import pytest

from a2d.digital.twin import make_twin
from tests.support.chains import chain_of, first_order_lowpass, peaking


def test_bilinear_keeps_a_gain_plain() -> None:
    chain = chain_of(([0.0, 0.0, -3.0], [0.0, 0.0, 2.0]), first_order_lowpass(500.0), peaking(1_000.0, 1.0, 6.0))
    sos = make_twin(chain, 48_000.0).sos
    assert sos[0].tolist() == [-1.5, 0.0, 0.0, 1.0, 0.0, 0.0]
    assert sos[1, [2, 5]].tolist() == [0.0, 0.0]
    assert sos[1, 1] == pytest.approx(sos[1, 0], rel=1e-15)  # the zero of a lowpass at half the rate is still there
