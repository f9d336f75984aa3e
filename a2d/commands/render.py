"""`a2d render`: test signals or an audio file through the analog model and the twin."""

from __future__ import annotations

import argparse
import json
import sys
from pathlib import Path

from a2d.analog.build import build_chain
from a2d.analog.chain import AnalogChain
from a2d.commands import audio_options
from a2d.commands.options import add_design, add_out
from a2d.commands.terminal import hertz
from a2d.conversion import convert_at
from a2d.design.model import Design
from a2d.design.quantities import Hertz, SampleRate, parse
from a2d.design.read import read_design
from a2d.digital.twin import Twin
from a2d.errors import ParameterError
from a2d.files import write_all
from a2d.listening import log
from a2d.listening.quantise import ENCODINGS
from a2d.listening.render import VERSIONS, Output, Rendered, block_source, signal_source, write_versions
from a2d.listening.signals import SIGNALS, SignalSettings
from a2d.listening.wav import audio_info, read_blocks

HELP = "test signals or an audio file through the analog model and the twin, as WAV or FLAC"
_BLIND = (".analog", ".twin", ".analog.matched", ".twin.matched")
SECONDS = {"sines": 2.0, "impulse": 1.0, "pink": 10.0}


def add_options(parser: argparse.ArgumentParser) -> None:
    """Declare the command's options."""
    add_design(parser)
    parser.add_argument(
        "audio", nargs="?", type=Path, metavar="AUDIO", help="a WAV or FLAC file; without it, test signals"
    )
    add_out(parser)
    parser.add_argument("--signal", nargs="+", choices=list(SIGNALS), default=list(SIGNALS), help="which test signals")
    parser.add_argument(
        "--sine", nargs="+", default=["100 Hz", "1 kHz", "10 kHz"], metavar="HZ", help="frequencies of the sines"
    )
    audio_options.add_level(parser)
    audio_options.add_sweep_length(parser)
    parser.add_argument(
        "--rate", nargs="+", metavar="HZ", help="sample rates of the test signals; the design's if absent"
    )
    parser.add_argument(
        "--write", nargs="+", choices=VERSIONS, help="which versions to write; all that are new if absent"
    )
    parser.add_argument("--bits", choices=list(ENCODINGS), default="24", help="16 (dithered), 24 or float (default 24)")
    parser.add_argument("--flac", action="store_true", help="write FLAC instead of WAV")
    parser.add_argument(
        "--match-level", action="store_true", help="also write analog and twin at the input's loudness (ITU-R BS.1770)"
    )
    parser.add_argument(
        "--blind", action="store_true", help="also write a page for a blind comparison of analog model and twin"
    )
    parser.add_argument("--seed", type=int, default=1, help="of noise and dither (default 1)")


def run(args: argparse.Namespace) -> int:
    """Render, log, and report; 1 when samples went over full scale."""
    design = read_design(args.design)
    chain = build_chain(design)
    jobs = _test_signals(args, design, chain) if args.audio is None else {args.audio.stem: _audio(args, design, chain)}
    name = design.design.name
    write_all(args.out, {f"{name}.render.json": json.dumps({"renderings": _data(jobs)}, indent=1) + "\n"})
    if args.blind:
        write_all(args.out, _blind_pages(jobs))
    for title, (rendered, twin) in jobs.items():
        print(f"{title} at {hertz(twin.sample_rate_hz)}")
        print("".join(f"  {line}\n" for line in log.lines(rendered)), end="")
    print("The analog model is H(j2πf) up to half the sample rate; what lies above is not in a file of that rate.")
    print(audio_options.CAUTION)
    return _report_overs([rendered for rendered, _ in jobs.values()])


def _data(jobs: dict[str, tuple[Rendered, Twin]]) -> list[dict[str, object]]:
    return [
        {"name": title, "sample_rate_hz": twin.sample_rate_hz, "analog_model_up_to_hz": twin.sample_rate_hz / 2.0}
        | log.as_data(rendered)
        for title, (rendered, twin) in jobs.items()
    ]


def _blind_pages(jobs: dict[str, tuple[Rendered, Twin]]) -> dict[str, bytes | str]:
    """A blind comparison of each rendering's analog and twin files, level-matched where there are such."""
    from a2d.report.blind import blind_page  # jinja2 is loaded only when asked for

    pages: dict[str, bytes | str] = {}
    for title, (rendered, _) in jobs.items():
        by_version = {name: file.path for file in rendered.files for name in _BLIND if file.path.stem.endswith(name)}
        found = [by_version.get(f"{name}.matched", by_version.get(name)) for name in (".analog", ".twin")]
        if found[0] is None or found[1] is None:
            raise ParameterError("a blind comparison needs analog and twin (add both to --write, or leave it out)")
        stem = found[0].stem.removesuffix(".matched").removesuffix(".analog")
        pages[f"{stem}.blind.html"] = blind_page(found[0].read_bytes(), found[1].read_bytes(), title=title)
    return pages


def _output(args: argparse.Namespace, stem: str, versions: list[str]) -> Output:
    return Output(
        args.out / stem,
        tuple(args.write or versions),
        args.bits,
        ".flac" if args.flac else ".wav",
        args.match_level,
        args.seed,
    )


def _test_signals(args: argparse.Namespace, design: Design, chain: AnalogChain) -> dict[str, tuple[Rendered, Twin]]:
    rates = [float(parse(r, SampleRate)) for r in args.rate] if args.rate else design.design.sample_rates
    frequencies = tuple(float(parse(f, Hertz)) for f in args.sine)
    level = audio_options.level_dbfs(args)
    jobs = {}
    for rate in rates:
        twin = convert_at(design, chain, float(rate)).twin
        for name in dict.fromkeys(args.signal):
            seconds = SECONDS.get(name, args.sweep_seconds)
            samples = SIGNALS[name](SignalSettings(float(rate), level, seconds, frequencies, args.seed))
            title = f"{design.design.name}.{name}.{rate:.0f}"
            output = _output(args, title, list(VERSIONS))
            rendered = write_versions(signal_source(samples, chain, twin), float(rate), 1, len(samples), output)
            jobs[title] = (rendered, twin)
    return jobs


def _audio(args: argparse.Namespace, design: Design, chain: AnalogChain) -> tuple[Rendered, Twin]:
    info = audio_info(args.audio)
    if not info.frames:
        raise ParameterError(f"{args.audio} holds no samples (allowed one or more)")
    twin = convert_at(design, chain, info.sample_rate_hz).twin
    source = block_source(lambda: read_blocks(args.audio), info.channels, chain, twin)
    output = _output(args, f"{design.design.name}.{args.audio.stem}", ["analog", "twin", "difference"])
    return write_versions(source, info.sample_rate_hz, info.channels, info.frames, output), twin


def _report_overs(all_rendered: list[Rendered]) -> int:
    """Say on standard error which files went over full scale and by how much; the exit status."""
    over = [file for rendered in all_rendered for file in rendered.files if file.overs]
    for file in over:
        print(
            f"a2d render: {file.path.name}: {file.overs} samples over full scale, held there; the level would have to "
            f"be {log.decibels(file.peak):.1f} dB lower",
            file=sys.stderr,
        )
    return 1 if over else 0
