"""`a2d controls`: what a design's controls do, how firmware may move them, and pictures of both."""

from __future__ import annotations

import argparse

import numpy as np
from rich.console import RenderableType

from a2d.arrays import FloatArray
from a2d.commands.audio_options import CAUTION, level_dbfs
from a2d.commands.control_summary import control_breaches, control_notes, controls_table
from a2d.commands.options import add_design, add_out
from a2d.commands.terminal import console, hertz, table
from a2d.compare.control_tables import ControlTable, RateTable
from a2d.conversion import Conversion, convert
from a2d.design.quantities import Hertz, Seconds, parse
from a2d.design.read import read_design_file
from a2d.errors import ParameterError
from a2d.files import write_all
from a2d.listening.clicks import ClickTest, advice, click_levels
from a2d.listening.moving import POLICIES, Change
from a2d.listening.sweep import FADE_SECONDS, faded
from a2d.wordlength.structures import TITLES

TAKE_SECONDS = 2.0
HELP = "panel controls: the worst position, interpolation, clicks when they move, pictures"


def add_options(parser: argparse.ArgumentParser) -> None:
    """Declare the command's options."""
    add_design(parser)
    add_out(parser, required=False)
    parser.add_argument("--tone", default="100 Hz", metavar="HZ", help="the tone under a change (default 100 Hz)")
    parser.add_argument("--level", default="-12 dB", metavar="DB", help="the tone's peak in dBFS (default -12 dB)")
    parser.add_argument("--ramp", default="10 ms", metavar="S", help="of ramp and cross-fade (default 10 ms)")
    parser.add_argument("--plots", action="store_true", help="write pictures as SVG and PNG; needs --out")
    parser.add_argument("--wav", action="store_true", help="write the tone while each control moves; needs --out")
    parser.add_argument("--block", type=int, default=480, metavar="N", help="samples between two looks at the control")
    parser.add_argument("--policy", choices=list(POLICIES), default="ramp", help="how coefficients follow in --wav")


def run(args: argparse.Namespace) -> int:
    """Sweep, play, show, draw; 1 when a limit is broken at some position."""
    design = read_design_file(args.design).design
    if not design.controls:
        raise ParameterError("the design has no [[control]] (see docs/controls.md)")
    conversion = convert(design)
    out = console()
    found = controls_table(conversion.controls)
    if found is not None:
        out.print(found)
    for note in [*control_notes(conversion), *control_breaches(conversion.controls)]:
        out.print(f"- {note}")
    for control in conversion.controls:
        rate = control.rates[0]
        test = ClickTest(
            rate.sample_rate_hz,
            float(parse(args.tone, Hertz)),
            level_dbfs(args),
            float(parse(args.ramp, Seconds)),
        )
        for line in play(conversion, control, rate, test):
            out.print(line)
    if args.out is not None and args.plots:
        files: dict[str, bytes | str] = {**_plots(conversion)}
        write_all(args.out, files)
        out.print(f"Written to {args.out}: {', '.join(files)}")
    if args.out is not None and args.wav:
        print(CAUTION)
        out.print(f"Written to {args.out}: {', '.join(_recordings(args, conversion))}")
    return int(any(rate.breaches for control in conversion.controls for rate in control.rates))


def play(conversion: Conversion, control: ControlTable, rate: RateTable, test: ClickTest) -> list[RenderableType]:
    """The clicks of a move from one end to the other, every policy in every structure, and advice."""
    before, after = ends(rate)
    clicks = click_levels(before, after, test)
    levels = {(click.policy, click.structure): click.dbfs for click in clicks}
    rows = [
        [TITLES[structure], *(f"{levels[policy, structure]:.1f}" for policy in POLICIES)]
        for structure in dict.fromkeys(click.structure for click in clicks)
    ]
    title = (
        f"{control.group.name}, end to end under {hertz(test.tone_hz)} at {test.level_dbfs:g} dBFS, "
        f"{1000.0 * test.ramp_seconds:g} ms at {hertz(test.sample_rate_hz)}: click above 2 kHz, dBFS"
    )
    structure = chosen_structure(conversion)
    columns = ["structure", *(policy.replace("_", "-") for policy in POLICIES)]
    return [
        table(title, columns, rows, left=1),
        f"- In {TITLES[structure]}: {advice(before, after, test, clicks, structure)}.",
    ]


def ends(rate: RateTable) -> tuple[FloatArray, FloatArray]:
    """The table's first and last position, [T, 6] each."""
    flat = rate.sos.reshape(-1, *rate.sos.shape[-2:])
    return np.asarray(flat[0]), np.asarray(flat[-1])


def _recordings(args: argparse.Namespace, conversion: Conversion) -> list[str]:
    """NAME.CONTROLS.moving.wav for each group; their names."""
    from a2d.listening.moving_take import moving_take  # soundfile is loaded only when asked for
    from a2d.listening.wav import AudioWriter

    args.out.mkdir(parents=True, exist_ok=True)
    names = []
    for control in conversion.controls:
        rate = control.rates[0]
        n = np.arange(round(TAKE_SECONDS * rate.sample_rate_hz))
        phase = 2.0 * np.pi * float(parse(args.tone, Hertz)) * n / rate.sample_rate_hz
        tone = faded(10.0 ** (level_dbfs(args) / 20.0) * np.sin(phase), rate.sample_rate_hz, FADE_SECONDS)
        ramp = min(max(1, round(float(parse(args.ramp, Seconds)) * rate.sample_rate_hz)), args.block)
        structure = chosen_structure(conversion)
        knots = [axis.knots for axis in control.group.axes]
        take = moving_take(rate.sos, knots, tone, structure, Change(args.policy, args.block, ramp))
        names.append(f"{conversion.design.design.name}.{control.group.name}.moving.wav")
        with AudioWriter(args.out / names[-1], rate.sample_rate_hz, 1, "float") as writer:
            writer.write(take[:, np.newaxis])
    return names


def chosen_structure(conversion: Conversion) -> str:
    """The design's structure; what floating point has by default where it asks for a recommendation."""
    own = conversion.design.firmware.chosen_structure
    return own if own in TITLES else "transposed_direct_form_2"


def _plots(conversion: Conversion) -> dict[str, bytes]:
    from a2d.report.controls_plots import control_plots  # matplotlib is loaded only when asked for

    design = conversion.design.design
    return control_plots(conversion.controls, design.name, design.title or design.name)
