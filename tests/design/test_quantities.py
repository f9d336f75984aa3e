"""Quantities: what IEC 60062 codes and SI prefixes mean, and that anything else is one clear error."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from a2d.design import quantities as q
from a2d.errors import QuantityError

# IEC 60062:2016 examples of letter codes for resistance and capacitance, and SI prefixes.
READS = [
    ("R47", q.Ohm, 0.47),
    ("4R7", q.Ohm, 4.7),
    ("470R", q.Ohm, 470.0),
    ("4K7", q.Ohm, 4700.0),
    ("4k7", q.Ohm, 4700.0),
    ("47K3", q.Ohm, 47300.0),
    ("4M7", q.Ohm, 4.7e6),
    ("1M5", q.Ohm, 1.5e6),
    ("2R2", q.Ohm, 2.2),
    ("3n3", q.Farad, 3.3e-9),
    ("p47", q.Farad, 0.47e-12),
    ("1µ0", q.Farad, 1e-6),
    ("100n", q.Farad, 100e-9),
    ("4.7 kΩ", q.Ohm, 4700.0),
    ("4.7 k\u2126", q.Ohm, 4700.0),
    ("0.22u", q.Farad, 0.22e-6),
    ("10 µF", q.Farad, 10e-6),
    ("10 \u03bcF", q.Farad, 10e-6),
    ("13 mH", q.Henry, 13e-3),
    ("3.2 kHz", q.Hertz, 3200.0),
    ("20 Hz", q.Hertz, 20.0),
    ("3k2", q.Hertz, 3200.0),
    ("-4.5 dB", q.Decibel, -4.5),
    ("5 deg", q.Degree, 5.0),
    ("318 us", q.Seconds, 318e-6),
    ("1 %", q.Fraction, 0.01),
    ("1.5 octaves", q.Octaves, 1.5),
    (4700, q.Ohm, 4700.0),
]


@pytest.mark.parametrize(("text", "kind", "value"), READS)
def test_reads(text: object, kind: type[q.Quantity], value: float) -> None:
    # One ulp: the prefix is applied to the decimal text, so most are exact.
    assert math.isclose(q.parse(text, kind), value, rel_tol=2.3e-16)


REFUSED = [
    ("1meg", q.Ohm, "'meg' after the number"),
    ("-4k7", q.Ohm, "out of range"),
    ("10 nF", q.Ohm, "'nF' after the number"),
    ("4M7", q.Farad, "'M7' after the number"),
    ("1,5k", q.Ohm, "comma"),
    ("1_000", q.Hertz, "after the number"),
    ("20 hz", q.Hertz, "'hz' after the number"),
    ("3 k Hz", q.Hertz, "after the number"),
    ("1e5k", q.Ohm, "an exponent and a prefix"),
    ("2 mdB", q.Decibel, "'mdB' after the number"),
    ("nan", q.Number, "not a quantity"),
    ("inf", q.Hertz, "not a quantity"),
    (float("nan"), q.Number, "not a finite number"),
    (float("inf"), q.Hertz, "not a finite number"),
    ("1e999", q.Hertz, "not a quantity|not a finite number|after the number"),
    ("", q.Hertz, "not a quantity"),
    ("kHz", q.Hertz, "not a quantity"),
    ("0 Hz", q.Hertz, "out of range"),
    (True, q.Hertz, "not a quantity"),
    (None, q.Hertz, "not a quantity"),
    ("١٢ Hz", q.Hertz, "not a quantity"),
    ("5" * 100, q.Hertz, "too long"),
]


@pytest.mark.parametrize(("value", "kind", "message"), REFUSED)
def test_refuses(value: object, kind: type[q.Quantity], message: str) -> None:
    with pytest.raises(QuantityError, match=message):
        q.parse(value, kind)


KINDS = st.sampled_from([q.Ohm, q.Farad, q.Hertz, q.Decibel, q.Fraction, q.Seconds, q.QFactor, q.Number])


@given(st.one_of(st.text(max_size=80), st.from_regex(r"[-+]?[0-9.]{1,6} ?[a-zA-ZµΩ%]{0,4}[0-9]?")), KINDS)
def test_any_text_is_a_value_in_range_or_one_error(text: str, kind: type[q.Quantity]) -> None:
    try:
        value = q.parse(text, kind)
    except QuantityError as error:
        assert str(error)  # noqa: PT017 - both outcomes are allowed; a message must be there
    else:
        assert kind.low <= value <= kind.high
        assert math.isfinite(value)


@given(st.floats(min_value=1e-3, max_value=9e8), st.sampled_from(["", "k", "m", "µ", "n", "M"]))
def test_prefix_scales(number: float, prefix: str) -> None:
    factor = {"": 1.0, "k": 1e3, "m": 1e-3, "µ": 1e-6, "n": 1e-9, "M": 1e6}[prefix]
    value = q.parse(f"{number:.15f} {prefix}Ω", q.Ohm)
    number = float(f"{number:.15f}")
    assert math.isclose(value, number * factor, rel_tol=4.5e-16)
