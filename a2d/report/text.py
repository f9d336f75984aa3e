"""Numbers and names as people read them."""

from __future__ import annotations


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
    """Three significant digits with a sign: +6.22, −0.00131."""
    return f"{value:+.3g}".replace("-", "−")


def grouped(value: float) -> str:
    """Thousands set apart by a thin space, a real minus sign.

    >>> grouped(25000.0), grouped(-0.5)
    ('25\u202f000', '−0.5')
    """
    return f"{value:,.6g}".replace(",", "\u202f").replace("-", "−")


def plain(text: str) -> str:
    """`text` on one line, with whatever cannot be printed shown as a replacement sign."""
    return "".join(c if c.isprintable() else "\ufffd" for c in " ".join(text.split()))
