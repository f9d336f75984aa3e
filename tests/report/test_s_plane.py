"""The logarithmic s plane: where roots are put, what is left out, and that labels keep off one another."""

from __future__ import annotations

import numpy as np
import pytest

from a2d.report.s_plane import LogPlane, root_labels

TURN = 2.0 * np.pi


def test_decades_are_rings_and_q_is_a_ray() -> None:
    plane = LogPlane(1.0, 1e5, right_half=False)
    q = 0.8
    angle = np.pi - np.arccos(1.0 / (2.0 * q))
    s = TURN * np.array([10.0, 100.0, 1_000.0]) * np.exp(1j * angle)
    assert plane.place(s) == pytest.approx(np.array([1.0, 2.0, 3.0]) * np.exp(1j * angle))
    assert plane.place(np.array([0.0 + 0.0j, TURN * 0.3])) == pytest.approx([0.0, 0.0])


def test_room_for_what_is_shown() -> None:
    plane = LogPlane.around(TURN * np.array([-30.0, -1e4 + 2e4j, 5e7 + 0.0j, 1e-12]), 192e3)
    assert plane.inner_hz <= 30.0 / 2.0
    assert plane.outer_hz == pytest.approx(1.3 * np.hypot(1e4, 2e4))
    assert not plane.right_half  # one right-hand root lies beyond what is shown, the other in the centre
    assert LogPlane.around(np.array([], dtype=complex), 1e5).radius > 1.0
    assert LogPlane.around(TURN * np.array([300.0 + 0.0j]), 1e5).right_half


def test_close_roots_share_a_label_and_the_lower_half_has_none() -> None:
    place = np.array([1.0 + 2.0j, 1.0 - 2.0j, 1.01 + 2.0j, -3.0 + 1.0j])
    labels = root_labels(place, np.array([0, 0, 4, 1]), 0.1)
    assert [(label.text, label.on_axis) for label in labels] == [("2", False), ("1, 5", False)]


def test_neighbours_on_the_real_axis_are_raised() -> None:
    labels = root_labels(np.array([-4.0, -3.8, -3.6, -1.0]).astype(complex), np.arange(4), 0.1)
    assert [label.level for label in labels] == [0, 1, 2, 0]
