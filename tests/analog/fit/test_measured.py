"""Reading a measured response from CSV: what is accepted, and what is refused by line."""

from __future__ import annotations

import numpy as np
import pytest

from a2d.analog.fit.measured import parse_response
from a2d.errors import AudioError

ROWS = [(f, -0.1 * i, 3.0 * i) for i, f in enumerate(range(100, 1100, 100))]


def text(rows: list[tuple[float, ...]], separator: str = ",", head: str = "") -> str:
    return head + "\n".join(separator.join(str(v) for v in row) for row in rows) + "\n"


@pytest.mark.parametrize("separator", [",", ";", "\t", "  "])
def test_separators_without_names(separator: str) -> None:
    measured = parse_response(text(ROWS, separator))
    np.testing.assert_allclose(measured.f_hz, [r[0] for r in ROWS])
    np.testing.assert_allclose(measured.level_db, [r[1] for r in ROWS], atol=1e-12)
    assert measured.phase is not None
    np.testing.assert_allclose(np.degrees(measured.phase), [r[2] for r in ROWS], atol=1e-12)


def test_names_comments_and_columns_in_any_order() -> None:
    rows = [(r[2], 7.0, r[0], r[1]) for r in ROWS]
    measured = parse_response("\ufeff# desk, channel 3\n\n" + text(rows, head="deg,room,Frequency,dB\n"))
    np.testing.assert_allclose(measured.level_db, [r[1] for r in ROWS], atol=1e-12)
    assert measured.phase is not None


def test_real_and_imaginary_parts() -> None:
    z = np.exp(1j * np.linspace(0, 2, 10)) * 0.5
    rows = [(100.0 * (i + 1), v.real, v.imag) for i, v in enumerate(z)]
    measured = parse_response(text(rows, head="Hz,re,im\n"))
    np.testing.assert_allclose(np.exp(measured.log_gain + 1j * measured.phase), z, rtol=1e-12)


def test_frequencies_are_put_in_order() -> None:
    measured = parse_response(text(ROWS[::-1]))
    assert np.all(np.diff(measured.f_hz) > 0)
    np.testing.assert_allclose(measured.level_db, [r[1] for r in ROWS], atol=1e-12)


@pytest.mark.parametrize(
    ("content", "message"),
    [
        ("", "has no lines with numbers"),
        ("Hz,dB\n1,2\n3,x\n", "line 3: 'x' is not a finite number"),
        ("Hz;dB\n1;2\n3;4,5\n", "line 3: '4,5' is not a finite number"),
        ("Hz,dB\n1,2\n3\n", "line 3 has 1 columns"),
        ("Hz,dB\n1,nan\n", "line 2: 'nan' is not a finite number"),
        ("Hz,volts\n1,2\n", "needs the columns Hz and dB"),
        ("Hz,dB\n1,2\n2,2\n", "has 2 points"),
        (text([(0.0, 1.0), *[r[:2] for r in ROWS]]), "not above zero"),
        (text([*[r[:2] for r in ROWS], (100.0, 1.0)]), "has 100 Hz twice"),
    ],
)
def test_faults(content: str, message: str) -> None:
    with pytest.raises(AudioError, match=message):
        parse_response(content)


def test_a_band_needs_points() -> None:
    with pytest.raises(AudioError, match="3 points lie from 300 to 500 Hz"):
        parse_response(text(ROWS)).between(300.0, 500.0)
