"""The command `a2d`: finds the command asked for, runs it, and turns errors into one clear message and an exit status.

Exit status 0: done and within limits; 1: done, and a limit is broken; 2: bad input or usage.
"""

from __future__ import annotations

import argparse
import sys
from collections.abc import Sequence
from importlib import import_module
from types import ModuleType

from a2d.errors import A2dError

# Each is a module a2d.commands.NAME with HELP, add_options(parser) and run(args) -> exit status.
COMMANDS = ("convert", "check", "controls", "spread", "render", "measure", "fit", "list")
BAD_INPUT = 2


def main(arguments: Sequence[str] | None = None) -> int:
    """Run a command line and return its exit status."""
    _write_utf8()
    given = list(sys.argv[1:] if arguments is None else arguments)
    parser = build_parser(given[:1])
    args = parser.parse_args(given)
    try:
        status: int = args.run(args)
        sys.stdout.flush()
    except A2dError as error:
        for line in str(error).splitlines():  # a design's faults, one a line
            print(f"a2d {args.command}: {line}", file=sys.stderr)
        return BAD_INPUT
    except BrokenPipeError:  # the reader of the output went away, as `head` does
        sys.stderr.close()
        return BAD_INPUT
    return status


def build_parser(asked: Sequence[str] = ()) -> argparse.ArgumentParser:
    """The parser of all commands; when the first word is a command, only that one is loaded, which saves start-up."""
    parser = argparse.ArgumentParser(
        prog="a2d", description="The digital twin of a hardware equaliser: sections, proof, headers, sound."
    )
    chosen = [name for name in COMMANDS if name in asked] or list(COMMANDS)
    commands = parser.add_subparsers(dest="command", required=True, metavar="{" + ",".join(COMMANDS) + "}")
    for name in chosen:
        module = command(name)
        own = commands.add_parser(name, help=module.HELP, description=module.HELP)
        module.add_options(own)
        own.set_defaults(run=module.run)
    return parser


def command(name: str) -> ModuleType:
    """The module of a command."""
    return import_module(f"a2d.commands.{name}")


def _write_utf8() -> None:
    """Units such as Ω and µs are written whatever the locale says."""
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(encoding="utf-8")


if __name__ == "__main__":
    sys.exit(main())
