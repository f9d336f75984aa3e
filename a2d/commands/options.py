"""Options that several commands share, each declared once."""

from __future__ import annotations

import argparse
from pathlib import Path


def add_design(parser: argparse.ArgumentParser) -> None:
    """The design file."""
    parser.add_argument("design", type=Path, metavar="DESIGN", help="the design file (TOML)")


def add_out(parser: argparse.ArgumentParser, *, required: bool = True) -> None:
    """The folder that files are written to."""
    parser.add_argument(
        "--out", type=Path, metavar="DIR", required=required, help="the folder for the files; made when absent"
    )
