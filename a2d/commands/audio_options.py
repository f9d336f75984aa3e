"""Options about sound that several commands share, each declared once."""

from __future__ import annotations

import argparse

from a2d.design.quantities import Decibel, parse
from a2d.errors import ParameterError

CAUTION = (
    "Caution: test signals can damage hearing and loudspeakers. Turn the volume down before playing them, raise it "
    "slowly, and take headphones off while connecting."
)
LOUD_DBFS = -20.0


def add_level(parser: argparse.ArgumentParser) -> None:
    """The level of test signals; what was rendered at a level is measured with the same."""
    parser.add_argument(
        "--level", default="-20 dB", metavar="DB", help="peak of test signals in dBFS, at most 0 (default -20 dB)"
    )


def add_sweep_length(parser: argparse.ArgumentParser) -> None:
    """The sweep's length; what was rendered with one is measured with the same."""
    parser.add_argument(
        "--sweep-seconds", type=float, default=10.0, metavar="S", help="length of the sweep, 1 to 120 s (default 10)"
    )


def level_dbfs(args: argparse.Namespace) -> float:
    """The level asked for, which must not be above full scale."""
    level = float(parse(args.level, Decibel))
    if level > 0.0:
        raise ParameterError(f"level is above full scale ({level:g} dBFS, allowed up to 0)")
    return level
