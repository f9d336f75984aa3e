"""`a2d check`: does a shipped header hold the twin of this design? For a firmware build's own continuous check."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path

from a2d.commands.delivery import delivery_of
from a2d.commands.options import add_design
from a2d.conversion import convert
from a2d.design.read import read_design_file
from a2d.errors import FileError, HeaderError
from a2d.firmware.check import differences
from a2d.firmware.read_header import read_header

HELP = "read a shipped header back and hold its numbers against the design"


def add_options(parser: argparse.ArgumentParser) -> None:
    """Declare the command's options."""
    add_design(parser)
    parser.add_argument("--header", type=Path, metavar="FILE", required=True, help="the header to check")


def run(args: argparse.Namespace) -> int:
    """0 when the header is the design's, 1 when it is not."""
    source = read_design_file(args.design)
    text = _text(args.header)
    try:
        found = read_header(text)
    except HeaderError as error:
        raise HeaderError(f"{error} @ {args.header}") from error
    conversion = convert(source.design)
    expected = delivery_of(conversion, source.sha256).header
    faults = differences(expected, found)
    for fault in faults:
        print(f"a2d check: {fault} @ {args.header}", file=sys.stderr)
    if faults:
        return 1
    rates = ", ".join(f"{rate:g} Hz" for rate in found.rates_hz)
    print(
        f"{args.header} holds the twin of {source.design.design.name}: {len(found.section_names)} sections at {rates}"
    )
    if found.sha256 != source.sha256:
        print("The design file has changed since, but not its numbers (hash differs).")
    return 0


def _text(path: Path) -> str:
    try:
        return path.read_text(encoding="utf-8")
    except (OSError, UnicodeDecodeError) as error:
        raise FileError(f"cannot read the header: {getattr(error, 'strerror', None) or error} @ {path}") from error
