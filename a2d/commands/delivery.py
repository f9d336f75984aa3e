"""From a conversion to what firmware takes, for the commands that need it."""

from __future__ import annotations

from a2d.conversion import Conversion
from a2d.firmware.deliver import Delivery, deliver


def delivery_of(conversion: Conversion, sha256: str) -> Delivery:
    """The firmware files of a conversion; `sha256` is that of the design's file."""
    twins = tuple(judged.twin for judged in conversion.judged)
    bands = tuple(judged.comparison.band_hz for judged in conversion.judged)
    return deliver(conversion.design, sha256, conversion.chain, twins, bands)
