"""Numbers and names as people read them."""

from __future__ import annotations

import math
from collections.abc import Sequence


def hertz(f_hz: float) -> str:
    """A short label: 20, 50, 1k, 2.5k, 20k, 1M.

    >>> [hertz(f) for f in (20.0, 0.5, 1000.0, 2500.0, 1e6)]
    ['20', '0.5', '1k', '2.5k', '1M']
    """
    for factor, letter in ((1e6, "M"), (1e3, "k")):
        if f_hz >= factor * (1.0 - 1e-9):
            return f"{f_hz / factor:.4g}{letter}"
    return f"{f_hz:.4g}"


def hertz_with_unit(f_hz: float) -> str:
    """A frequency to four digits with its unit.

    >>> hertz_with_unit(17_683.2), hertz_with_unit(100.0)
    ('17.68 kHz', '100 Hz')
    """
    text = hertz(f_hz)
    return f"{text[:-1]} {text[-1]}Hz" if text[-1] in "kM" else f"{text} Hz"


def rate_label(sample_rate_hz: float) -> str:
    """A sample rate as people say it.

    >>> rate_label(44100.0), rate_label(48000.0)
    ('44.1 kHz', '48 kHz')
    """
    return f"{sample_rate_hz / 1e3:.6g} kHz"


def signed(value: float) -> str:
    """Three significant digits with a sign, never with an exponent.

    >>> signed(6.2214), signed(-0.00131), signed(0.0), signed(-1.59e-05), signed(1234567.0)
    ('+6.22', '−0.00131', '0', '−0.0000159', '+1230000')
    """
    if value == 0.0:
        return "0"
    digits = max(0, 2 - math.floor(math.log10(abs(value)))) if math.isfinite(value) else 0
    text = f"{float(f'{value:.3g}'):+.{min(digits, 12)}f}"
    return (text.rstrip("0").rstrip(".") if "." in text else text).replace("-", "−")


def error_text(value: float, unit: str, at_hz: float) -> str:
    """An error and where it lies; what nobody can hear or measure is not spelled out.

    >>> error_text(-4.452, "dB", 20_000.0), error_text(1e-7, "°", 50.0)
    ('−4.45 dB at 20 kHz', 'below 0.0001°')
    """
    space = "" if unit == "°" else " "
    if abs(value) < 1e-4:
        return f"below 0.0001{space}{unit}"
    return f"{signed(value)}{space}{unit} at {hertz_with_unit(at_hz)}"


def grouped(value: float) -> str:
    """Thousands set apart by a thin space, a real minus sign.

    >>> grouped(25000.0), grouped(-0.5)
    ('25\u202f000', '−0.5')
    """
    return f"{value:,.6g}".replace(",", "\u202f").replace("-", "−")


def plain(text: str) -> str:
    """`text` on one line, with whatever cannot be printed shown as a replacement sign."""
    return "".join(c if c.isprintable() else "\ufffd" for c in " ".join(text.split()))


def listed(items: Sequence[str]) -> str:
    """`a`, `a and b`, `a, b and c`.

    >>> listed(["44.1 kHz", "48 kHz", "96 kHz"])
    '44.1 kHz, 48 kHz and 96 kHz'
    """
    return " and ".join([", ".join(items[:-1]), items[-1]] if len(items) > 1 else items)
