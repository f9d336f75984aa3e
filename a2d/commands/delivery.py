"""From a conversion to what firmware takes, for the commands that need it."""

from __future__ import annotations

from dataclasses import replace

from a2d.conversion import Conversion
from a2d.firmware.control_header import write_control_header
from a2d.firmware.deliver import Delivery, deliver


def delivery_of(conversion: Conversion, sha256: str) -> Delivery:
    """The firmware files of a conversion; `sha256` is that of the design's file."""
    twins = tuple(judged.twin for judged in conversion.judged)
    bands = tuple(judged.comparison.band_hz for judged in conversion.judged)
    delivery = deliver(conversion.design, sha256, conversion.chain, twins, bands)
    return _with_controls(conversion, delivery) if conversion.controls else delivery


def _with_controls(conversion: Conversion, delivery: Delivery) -> Delivery:
    """The tables of controls as C, where the main header's sections stand as designed and in floating point."""
    header = delivery.header
    if header.number.kind == "fixed" or conversion.design.firmware.searches_order:
        note = (
            "controls: no C tables, which need floating point and section_order = as_designed; the manifest has the "
            "tables in double precision"
        )
        return replace(delivery, lines=(*delivery.lines, note))
    files = {**delivery.files, f"{header.name}_controls.h": write_control_header(header, conversion.controls)}
    return replace(delivery, files=files)
