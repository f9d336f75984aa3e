"""`a2d convert`: the main job, from a design file to proven twins and the files that firmware takes."""

from __future__ import annotations

import argparse
import sys
from dataclasses import replace

from a2d.commands import summary
from a2d.commands.banks import bank_breaches, bank_files
from a2d.commands.circuits import FIGURE_COLUMNS, figure_rows
from a2d.commands.control_summary import control_breaches, control_notes, controls_table
from a2d.commands.delivery import delivery_of
from a2d.commands.options import add_design, add_out
from a2d.commands.terminal import console
from a2d.conversion import Conversion, convert
from a2d.design.read import DesignFile, read_design_file
from a2d.design.unit import measured_unit
from a2d.errors import AudioError
from a2d.files import write_all
from a2d.firmware.deliver import Delivery
from a2d.firmware.manifest import manifest, sos_table

HELP = "make the digital twin of a design: table, C header, manifest; plots, report and sound on request"

CIRCUITS_TEXT = "Natural frequency, Q and gain of each section that component values led to."


def add_options(parser: argparse.ArgumentParser) -> None:
    """Declare the command's options."""
    add_design(parser)
    add_out(parser)
    parser.add_argument("--coefficients", action="store_true", help="show every coefficient in the terminal")
    parser.add_argument("--plots", action="store_true", help="write plots as SVG and PNG")
    parser.add_argument("--measured", action="store_true", help="the unit of [spread.measured], not the nominal one")
    parser.add_argument("--report", action="store_true", help="write a report page: one HTML file with all of it")
    parser.add_argument("--wav", action="store_true", help="write test signals through analog model and twin, as WAV")


def run(args: argparse.Namespace) -> int:
    """Convert, show, write; 1 when a limit is broken."""
    source = read_design_file(args.design)
    if args.measured:
        source = replace(source, design=measured_unit(source.design))
    conversion = convert(source.design)
    delivery = delivery_of(conversion, source.sha256)
    files = output_files(args, source, conversion, delivery)
    write_all(args.out, files)
    show(args, conversion, delivery, list(files))
    sound = _sound(args) if args.wav else 0
    return max(sound, report_breaches(conversion, delivery))


def output_files(
    args: argparse.Namespace, source: DesignFile, conversion: Conversion, delivery: Delivery
) -> dict[str, bytes | str]:
    """Everything that goes to the output folder, by file name."""
    name = source.design.design.name
    files: dict[str, bytes | str] = {
        **delivery.files,
        f"{name}.twin.json": manifest(conversion, source.sha256),
        f"{name}.sos.csv": sos_table(conversion),
        **bank_files(conversion, source.sha256),
    }
    if args.plots:
        files |= _plots(conversion)
    if args.report:
        files[f"{name}.report.html"] = _report(source, conversion, delivery)
    return files


def _plots(conversion: Conversion) -> dict[str, bytes]:
    from a2d.report.plots import plots  # matplotlib is loaded only when asked for

    table, judged = conversion.design.design, conversion.judged
    return plots(
        conversion.chain,
        [j.twin for j in judged],
        [j.comparison for j in judged],
        table.name,
        table.title or table.name,
    )


def _sound(args: argparse.Namespace) -> int:
    """What `a2d render` writes of itself, and its exit status."""
    from a2d.commands import render  # scipy.signal and soundfile are loaded only when asked for

    parser = argparse.ArgumentParser()
    render.add_options(parser)
    return render.run(parser.parse_args([str(args.design), "--out", str(args.out)]))


def _report(source: DesignFile, conversion: Conversion, delivery: Delivery) -> bytes:
    from a2d.report.content import Extras, Finding  # as above
    from a2d.report.examples import examples
    from a2d.report.findings import findings
    from a2d.report.page import report_page
    from a2d.report.spread_finding import spread_finding

    spread, why_not = spread_finding(conversion)
    rows = figure_rows(conversion)
    circuits = (
        [Finding("Sections out of circuits", CIRCUITS_TEXT, "f0, Q and gains", FIGURE_COLUMNS, rows)] if rows else []
    )
    found = [*circuits, *findings(conversion, delivery), *([spread] if spread else [])]
    notes = [
        *summary.notes(conversion),
        *summary.reasons(conversion),
        *control_notes(conversion),
        *([why_not] if why_not else []),
    ]
    try:
        recordings = examples(conversion)
    except AudioError as error:
        recordings, notes = (), [*notes, f"No sound to play: {error}"]
    return report_page(conversion, source.sha256, Extras(found, recordings, notes, delivery.warnings))


def show(args: argparse.Namespace, conversion: Conversion, delivery: Delivery, names: list[str]) -> None:
    """The tables and notes on the terminal."""
    out = console()
    table = conversion.design.design
    out.print(f"{table.name}: {table.title}" if table.title else table.name, style="bold")
    out.print(summary.sections_table(conversion))
    if args.coefficients:
        print("\n".join(summary.coefficient_lines(conversion)), end="\n\n")
    optional = (summary.choices_table(conversion), summary.circuits_table(conversion), summary.q_table(conversion))
    for shown in (*optional, summary.errors_table(conversion), controls_table(conversion.controls)):
        if shown is not None:
            out.print(shown)
    for note in [*summary.notes(conversion), *control_notes(conversion)]:
        out.print(f"- {note}")
    out.print("Firmware", style="bold")
    for line in delivery.lines:
        out.print(f"- {line}")
    out.print(f"Written to {args.out}: {', '.join(names)}")


def report_breaches(conversion: Conversion, delivery: Delivery) -> int:
    """Say each broken limit and each warning on standard error; the exit status."""
    for warning in delivery.warnings:
        print(f"a2d convert: {warning}", file=sys.stderr)
    within = True
    for judged, rounded in zip(conversion.judged, delivery.breaches, strict=True):
        for breach in judged.breaches or rounded:
            within = False
            after = "" if judged.breaches else " after rounding"
            print(f"a2d convert: limit broken{after} at {judged.twin.sample_rate_hz:g} Hz: {breach}", file=sys.stderr)
        for remedy in judged.advice:
            print(f"a2d convert: at {judged.twin.sample_rate_hz:g} Hz {remedy}", file=sys.stderr)
        if judged.breaches and not judged.advice:
            print("a2d convert: no other method, scope or doubled rate that was tried comes nearer", file=sys.stderr)
    for line in [*bank_breaches(conversion.design), *control_breaches(conversion.controls)]:
        within = False
        print(f"a2d convert: {line}", file=sys.stderr)
    return 0 if within else 1
