"""`a2d measure`: a recording of the device, its response, and whether it is the right filter."""

from __future__ import annotations

import argparse
import json
import sys
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from a2d.analog.build import build_chain
from a2d.analog.chain import AnalogChain
from a2d.arrays import ComplexArray, FloatArray
from a2d.commands import audio_options
from a2d.commands.options import add_out
from a2d.commands.terminal import hertz
from a2d.conversion import convert_at
from a2d.design.model import Design
from a2d.design.quantities import PositiveDecibel, SampleRate, parse
from a2d.design.read import read_design
from a2d.digital.twin import Twin
from a2d.errors import AudioError, ConversionError, ParameterError
from a2d.files import write_all
from a2d.listening import suspects
from a2d.listening.judge import Agreement, Verdict, agreement, judge_measured
from a2d.listening.measure import HARMONICS, Measured, measure_channel
from a2d.listening.sweep import SweepPlan
from a2d.listening.tables import channel_data, decibels, response_csv
from a2d.listening.wav import read_audio

HELP = "a recording of the rendered sweep: the device's response, distortion, and whether it is the right filter"
DRIFT_PPM = 5.0  # of clocks, beyond which a phase says little: 50 µs in 10 s


@dataclass(frozen=True, eq=False)
class Expected:
    """One design with its twin at the device's rate and at all others that it has one at."""

    name: str
    chain: AnalogChain
    twins: dict[float, Twin]
    rate_hz: float

    def references(self, f_hz: FloatArray) -> dict[str, ComplexArray]:
        """The responses that the device is held against."""
        return {"twin": self.twins[self.rate_hz].response(f_hz), "analog": self.chain.response(f_hz)}


@dataclass(frozen=True, eq=False)
class Channel:
    """One measured channel with what was found."""

    number: int
    measured: Measured
    agreements: dict[str, Agreement]
    verdict: Verdict | None


def add_options(parser: argparse.ArgumentParser) -> None:
    """Declare the command's options."""
    parser.add_argument("recording", type=Path, metavar="RECORDING", help="what the device made of the rendered sweep")
    parser.add_argument("design", nargs="?", type=Path, metavar="DESIGN", help="what it should be; none: only measure")
    add_out(parser)
    parser.add_argument("--channel", type=int, default=1, metavar="N", help="the device's channel (default 1)")
    parser.add_argument("--second", type=Path, metavar="DESIGN", help="what the channel after it should be")
    parser.add_argument("--loopback", type=int, metavar="N", help="the channel that bypasses the device")
    parser.add_argument("--device-rate", metavar="HZ", help="the device's own sample rate; the recording's if absent")
    parser.add_argument("--against", choices=("twin", "analog"), default="twin", help="what decides (default twin)")
    parser.add_argument("--tolerance", default="0.5 dB", metavar="DB", help="largest error in level (default 0.5 dB)")
    audio_options.add_level(parser)
    audio_options.add_sweep_length(parser)


def run(args: argparse.Namespace) -> int:
    """Measure, judge, write; 1 when the device is not what it should be."""
    samples, rate = read_audio(args.recording)
    plan = SweepPlan(rate, args.sweep_seconds, audio_options.level_dbfs(args))
    device_rate = float(parse(args.device_rate, SampleRate)) if args.device_rate else rate
    expected = [_expected(path, device_rate) for path in (args.design, args.second) if path is not None]
    if args.second is not None and (args.design is None or args.loopback is not None):
        raise ParameterError(
            "--second goes with a design, and not with --loopback (measure one channel after the other)"
        )
    tolerance = float(parse(args.tolerance, PositiveDecibel))
    channels = _channels(args, samples, plan, expected, tolerance)
    name = args.recording.stem
    files: dict[str, bytes | str] = {
        f"{name}.{c.number}.response.csv": response_csv(c.measured, c.agreements) for c in channels
    }
    report = [{"channel": c.number} | channel_data(c.measured, c.verdict, c.agreements) for c in channels]
    files[f"{name}.measure.json"] = json.dumps({"recording": args.recording.name, "channels": report}, indent=1) + "\n"
    for channel in channels:
        files |= _plots(channel, args.against, f"{name}.{channel.number}.response")
    write_all(args.out, files)
    for channel in channels:
        _show(channel)
    print(f"Written to {args.out}: {', '.join(files)}")
    return _report(channels)


def _expected(path: Path, rate_hz: float) -> Expected:
    design = read_design(path)
    chain = build_chain(design)
    twins = {rate_hz: convert_at(design, chain, rate_hz).twin}
    for rate in suspects.rates_to_try(float(r) for r in design.design.sample_rates):
        twin = _twin_or_none(design, chain, rate)
        if twin is not None:
            twins.setdefault(rate, twin)
    return Expected(design.design.name, chain, twins, rate_hz)


def _twin_or_none(design: Design, chain: AnalogChain, rate_hz: float) -> Twin | None:
    """A rate at which the design has no twin is no suspect."""
    try:
        return convert_at(design, chain, rate_hz).twin
    except (ParameterError, ConversionError):
        return None


def _channels(
    args: argparse.Namespace, samples: FloatArray, plan: SweepPlan, expected: list[Expected], tolerance: float
) -> list[Channel]:
    loopback = None if args.loopback is None else _one(samples, args.loopback, "--loopback")
    found = []
    for offset in range(max(len(expected), 1)):
        measured = measure_channel(_one(samples, args.channel + offset, "--channel"), plan, loopback)
        f = measured.f_hz
        references = expected[offset].references(f) if expected else {}
        agreements = {name: agreement(measured, h) for name, h in references.items()}
        verdict = None
        if expected:
            own = references[args.against]
            others = suspects.wrong_rates(expected[offset].twins, expected[offset].rate_hz, f) | suspects.bypassed(f)
            if loopback is not None:
                others[suspects.SWAPPED] = np.asarray(1.0 / np.where(own == 0.0, 1e-12, own), dtype=np.complex128)
            if len(expected) > 1:
                others[suspects.SWAPPED] = expected[1 - offset].references(f)[args.against]
            verdict = judge_measured(measured, own, others, tolerance)
        found.append(Channel(args.channel + offset, measured, agreements, verdict))
    return found


def _one(samples: FloatArray, number: int, option: str) -> FloatArray:
    if not 1 <= number <= samples.shape[1]:
        raise AudioError(f"{option} asks for channel {number} of a recording with {samples.shape[1]} (counted from 1)")
    return samples[:, number - 1]


def _plots(channel: Channel, against: str, stem: str) -> dict[str, bytes | str]:
    """The response beside the one that it should be; nothing without a design."""
    found = channel.agreements.get(against)
    if found is None:
        return {}
    from a2d.report.fit_plot import Pair, pair_plot  # matplotlib only once there is something to draw

    f = channel.measured.f_hz
    level = decibels(channel.measured.response) - found.alignment.gain_db
    pair = Pair(f, level, level - found.error_db, against, found.error_db, found.error_deg)
    return pair_plot(pair, stem, f"Measured, channel {channel.number}, gain and delay taken out")


def _show(channel: Channel) -> None:
    m = channel.measured
    delay = next((a.alignment.delay_s for a in channel.agreements.values()), 0.0)
    latency, peak = (m.latency_s + delay) * 1e3, float(decibels(np.array(m.peak)))
    print(f"Channel {channel.number}: latency {latency:.3f} ms, peak {peak:.1f} dBFS")
    for name, found in channel.agreements.items():
        polarity = ", polarity inverted" if found.alignment.inverted else ""
        worst = f"worst error {found.worst_db:+.3f} dB at {hertz(found.worst_at_hz)}"
        print(f"  against the {name}: gain {found.alignment.gain_db:+.3f} dB{polarity}, {worst}")
    levels = [float(np.interp(1_000.0, m.f_hz, row)) for row in decibels(m.harmonics)]
    words = [
        f"{n}. {v:.1f} dB" if np.isfinite(v) else f"{n}. below noise" for n, v in zip(HARMONICS, levels, strict=True)
    ]
    print(f"  harmonics at 1 kHz: {', '.join(words)}")
    if abs(m.drift_ppm) > DRIFT_PPM:
        print(f"  player's and recorder's clocks differ by {m.drift_ppm:+.1f} ppm: the phase is not to be relied on")
    if channel.verdict is not None:
        print(f"  verdict: {'; '.join(channel.verdict.words)}")


def _report(channels: list[Channel]) -> int:
    wrong = [c for c in channels if c.verdict is not None and not c.verdict.right]
    for channel in wrong:
        assert channel.verdict is not None
        print(f"a2d measure: channel {channel.number}: {'; '.join(channel.verdict.words)}", file=sys.stderr)
    return 1 if wrong else 0
