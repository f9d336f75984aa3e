"""`a2d spread`: how far units of the hardware differ, and whether the twin's error matters beside that."""

from __future__ import annotations

import argparse
import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager

import msgspec
import numpy as np

from a2d.analog.build import build_chain
from a2d.analog.spread import spread_model
from a2d.analog.spread_causes import Corners, Sensitivity, corners, sensitivities
from a2d.analog.spread_draws import SpreadResult, run_spread
from a2d.arrays import FloatArray
from a2d.commands.options import add_design, add_out
from a2d.commands.terminal import console, hertz, table
from a2d.conversion import Conversion, convert
from a2d.design.model import Design
from a2d.design.read import read_design_file
from a2d.design.spread import Spread
from a2d.design.unit import measured_unit
from a2d.files import write_all
from a2d.firmware.spread_manifest import spread_json, statement

HELP = "component spread: bands of response, worst cases, which part does how much, and the twin's error beside it"
POINTS = 500
LONG_RUN = 20_000  # units from which a progress bar is worth its lines


def add_options(parser: argparse.ArgumentParser) -> None:
    """Declare the command's options."""
    add_design(parser)
    add_out(parser, required=False)
    parser.add_argument("--units", type=int, metavar="N", help="units to draw, in place of the design's")
    parser.add_argument("--seed", type=int, metavar="N", help="of the random numbers, in place of the design's")
    parser.add_argument("--plots", action="store_true", help="write pictures as SVG and PNG; needs --out")


def run(args: argparse.Namespace) -> int:
    """Draw units, show, write."""
    source = read_design_file(args.design)
    design = msgspec.structs.replace(source.design, controls=())  # as set in the file; a sweep has no part in this
    conversion = convert(design)
    band = conversion.judged[0].comparison.band_hz
    model = spread_model(design, np.geomspace(*band, POINTS))
    spread = design.spread or Spread()
    units = spread.units if args.units is None else args.units
    seed = spread.seed if args.seed is None else args.seed
    with _progress(units) as progress:
        result = run_spread(model, units, seed, progress)
    worst, causes = corners(model), sensitivities(model)
    unit_db = _unit_db(design, result.f_hz)
    show(conversion, result, worst, causes, unit_db, seed)
    if args.out is not None:
        name = design.design.name
        files: dict[str, bytes | str] = {
            f"{name}.spread.json": spread_json(conversion, source.sha256, result, worst, causes, unit_db, seed)
        }
        if args.plots:
            files |= _plots(conversion, result, worst, causes)
        write_all(args.out, files)
        print(f"Written to {args.out}: {', '.join(files)}")
    return 0


def show(
    conversion: Conversion,
    result: SpreadResult,
    worst: Corners,
    causes: list[Sensitivity],
    unit_db: FloatArray | None,
    seed: int,
) -> None:
    """Bands at octaves, parts in order, the statement."""
    out = console()
    out.print(table("Level relative to nominal", _BANDS, _band_rows(result, worst), left=1))
    rows = [
        [
            row.name,
            f"{100.0 * row.tolerance:g} %",
            f"{row.db_per_percent:+.3g} dB",
            hertz(row.at_hz),
            f"{row.contribution_db:.3g} dB",
        ]
        for row in causes
    ]
    columns = ["part", "tolerance", "for +1 %", "at", "at its tolerance"]
    out.print(table("Parts, the one that moves the response furthest first", columns, rows, left=1))
    out.print(f"{len(result.unit_worst_db)} units, seed {seed}.")
    for line in statement(conversion, result):
        out.print(f"- {line}")
    if unit_db is not None:
        k = int(np.argmax(np.abs(unit_db)))
        out.print(
            f"- The measured unit differs from nominal by up to {abs(unit_db[k]):.3g} dB, at {hertz(result.f_hz[k])}."
        )


_BANDS = ["frequency", "5 %", "50 %", "95 %", "lowest", "highest", "worst cases", ""]


def _band_rows(result: SpreadResult, worst: Corners) -> Iterator[list[str]]:
    """One row an octave."""
    wanted = 31.25 * 2.0 ** np.arange(0.0, 10.0)
    inside = wanted[(wanted >= result.f_hz[0]) & (wanted <= result.f_hz[-1])]
    curves = [*result.percentiles_db, result.lowest_db, result.highest_db, worst.lowest_db, worst.highest_db]
    for k in sorted({int(np.argmin(np.abs(np.log(result.f_hz / f)))) for f in inside}):
        yield [hertz(float(result.f_hz[k])), *(f"{float(c[k] - result.nominal_db[k]):+.3f} dB" for c in curves)]


def _unit_db(design: Design, f_hz: FloatArray) -> FloatArray | None:
    """The measured unit's level relative to nominal, [F]; None when nothing was measured."""
    if design.spread is None or not design.spread.measured:
        return None
    unit, nominal = (_level_db(d, f_hz) for d in (measured_unit(design), design))
    return unit - nominal


def _level_db(design: Design, f_hz: FloatArray) -> FloatArray:
    """The analog level of a design in dB, [F]."""
    return np.asarray(20.0 * np.log10(np.maximum(np.abs(build_chain(design).response(f_hz)), 1e-300)))


def _plots(conversion: Conversion, result: SpreadResult, worst: Corners, causes: list[Sensitivity]) -> dict[str, bytes]:
    from a2d.report.spread_plots import TwinError, spread_plots  # matplotlib is loaded only when asked for

    analog = np.abs(conversion.chain.response(result.f_hz))
    twins = [
        TwinError(j.twin.sample_rate_hz, 20.0 * np.log10(np.abs(j.twin.response(result.f_hz)) / analog))
        for j in conversion.judged
        if j.comparison.band_hz[1] >= result.f_hz[-1]
    ]
    design = conversion.design.design
    return spread_plots(result, worst, causes, twins, design.name, design.title or design.name)


@contextmanager
def _progress(units: int) -> Iterator[Callable[[int], None] | None]:
    """A bar on standard error for long runs on a terminal."""
    if units < LONG_RUN or not sys.stderr.isatty():
        yield None
        return
    from rich.progress import Progress

    with Progress(console=console(sys.stderr), transient=True) as bar:
        task = bar.add_task("drawing units", total=units)
        yield lambda done: bar.update(task, completed=done)
