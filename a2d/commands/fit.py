"""`a2d fit`: a measured response to analog sections, written as a design file."""

from __future__ import annotations

import argparse
from collections.abc import Sequence
from pathlib import Path

import numpy as np

from a2d.analog.build import build_section
from a2d.analog.chain import AnalogChain
from a2d.analog.fit.fit import Fit, fit_response
from a2d.analog.fit.measured import MeasuredResponse, parse_response
from a2d.analog.fit.score import OrderTried
from a2d.analog.fit.text import design_text
from a2d.analog.fit.values import as_fitted, fit_values, without
from a2d.commands.options import add_out
from a2d.commands.terminal import console, hertz, table
from a2d.design.model import Design
from a2d.design.quantities import Hertz, SampleRate, parse
from a2d.design.read import read_design
from a2d.design.structs import nearest
from a2d.errors import FileError, ParameterError
from a2d.files import write_all

HELP = "a measured response (CSV: Hz, dB, deg or Hz, re, im) to analog sections, as a design file"


def add_options(parser: argparse.ArgumentParser) -> None:
    """Declare the command's options."""
    parser.add_argument("response", type=Path, metavar="RESPONSE", help="the measured response (CSV)")
    add_out(parser)
    parser.add_argument("--name", default="fitted", help="the design's name, a C identifier (default fitted)")
    parser.add_argument("--rate", nargs="+", default=["48 kHz"], metavar="HZ", help="the design's sample rates")
    parser.add_argument("--band", nargs=2, metavar="HZ", help="only the points from one frequency to another")
    parser.add_argument("--sections", type=int, default=12, metavar="N", help="as many sections at most (default 12)")
    parser.add_argument("--no-coupling", action="store_true", help="no coupling corner below the band is assumed")
    parser.add_argument("--keep-gain", action="store_true", help="gain and polarity belong to the device")
    parser.add_argument("--design", type=Path, metavar="DESIGN", help="known sections, of which some values are fitted")
    parser.add_argument(
        "--free", nargs="+", metavar="SECTION.VALUE", help="with --design: the values to fit, all others are held"
    )


def run(args: argparse.Namespace) -> int:
    """Fit, show, write."""
    measured = _read(args.response)
    if args.band:
        low, high = (float(parse(text, Hertz)) for text in args.band)
        measured = measured.between(low, high)
    rates = [float(parse(rate, SampleRate)) for rate in args.rate]
    fit, names = _known(args, measured) if args.design else _unknown(args, measured)
    text = design_text(
        fit, args.name, rates, title=f"Fitted to {args.response.name}", names=names, with_gain=args.keep_gain
    )
    files: dict[str, bytes | str] = {f"{args.name}.toml": text, f"{args.name}.residual.csv": residual_csv(fit)}
    from a2d.report.fit_plot import fit_plot

    files |= fit_plot(fit, args.name)
    write_all(args.out, files)
    _show(fit, names)
    print(f"Written to {args.out}: {', '.join(files)}")
    return 0


def _read(path: Path) -> MeasuredResponse:
    try:
        text = path.read_text("utf-8")
    except (OSError, UnicodeDecodeError) as error:
        raise FileError(f"cannot read {path} ({getattr(error, 'strerror', None) or 'not UTF-8 text'})") from None
    return parse_response(text, path.name)


def _unknown(args: argparse.Namespace, measured: MeasuredResponse) -> tuple[Fit, Sequence[str]]:
    if args.free:
        raise ParameterError("--free has no meaning without --design (give the design whose values are fitted)")
    return fit_response(measured, most_sections=args.sections, coupling=not args.no_coupling), ()


def _known(args: argparse.Namespace, measured: MeasuredResponse) -> tuple[Fit, Sequence[str]]:
    """Sections with a free value are fitted; the response of the others is taken out first."""
    design = read_design(args.design)
    wanted = [_free_value(design, text) for text in args.free or ()]
    if not wanted:
        raise ParameterError("--design needs --free SECTION.VALUE ... (which values to fit)")
    indices = sorted({index for index, _ in wanted})
    held = [build_section(s) for i, s in enumerate(design.sections) if i not in indices]
    if held:
        b, a, _ = (np.concatenate(parts) for parts in zip(*held, strict=True))
        measured = without(measured, AnalogChain.of([f"h{i}" for i in range(len(b))], b, a))
    guesses = [as_fitted(design.sections[i]) for i in indices]
    free = [(indices.index(index), name) for index, name in wanted]
    fit = fit_values(measured, guesses, free, coupling=not args.no_coupling)
    return fit, [design.sections[i].name for i in indices]


def _free_value(design: Design, text: str) -> tuple[int, str]:
    section, _, value = text.rpartition(".")
    names = [s.name for s in design.sections]
    if section not in names or not value:
        raise ParameterError(f"there is no section for {text!r}{nearest(section, names)}")
    return names.index(section), value


def residual_csv(fit: Fit) -> str:
    """Measured minus fitted, a line a frequency."""
    columns = [fit.measured.f_hz, fit.residual_db] + ([] if fit.residual_deg is None else [fit.residual_deg])
    head = "Hz,dB" + ("" if fit.residual_deg is None else ",deg")
    rows = (",".join(f"{v:.6g}" for v in row) for row in zip(*columns, strict=True))
    return "\n".join([head, *rows, ""])


def _show(fit: Fit, names: Sequence[str]) -> None:
    out = console()
    if not names:
        out.print(table("Order sweep", ["sections", "dB rms", "deg rms", "criterion"], map(_order, fit.sweep), left=0))
    labels = names or [str(i + 1) for i in range(len(fit.sections))]
    rows = [
        [label, s.shape.replace("_", " "), ", ".join(_value(n, v) for n, v in s.values.items())]
        for label, s in zip(labels, fit.sections, strict=True)
    ]
    out.print(table("Fitted sections", ["section", "what", "values"], rows, left=3))
    worst = int(np.argmax(np.abs(fit.residual_db)))
    print(f"Left: at most {fit.residual_db[worst]:+.3f} dB, at {hertz(float(fit.measured.f_hz[worst]))}")
    print(
        f"The measurement's own: gain {fit.gain_db:+.3f} dB, polarity {'inverted' if fit.inverted else 'kept'}, "
        f"delay {fit.delay_s * 1e6:.3f} µs, coupling corner {fit.corner_hz:.3g} Hz"
    )


def _order(tried: OrderTried) -> list[str]:
    degrees = "" if tried.rms_deg is None else f"{tried.rms_deg:.3f}"
    return [str(tried.sections), f"{tried.rms_db:.4f}", degrees, f"{tried.criterion:.1f}"]


def _value(name: str, value: float) -> str:
    if name.endswith("f0"):
        return f"{name} {hertz(value)}"
    return f"{name} {value:+.3f} dB" if name == "gain" else f"{name} {value:.4g}"
