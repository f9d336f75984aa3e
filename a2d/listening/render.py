"""Audio through analog model and twin, in blocks: files, loudness, null test, level-matched versions."""

from __future__ import annotations

from collections.abc import Callable, Collection, Iterator, Sequence
from contextlib import ExitStack
from dataclasses import dataclass, field
from pathlib import Path

import numpy as np

from a2d.analog.chain import AnalogChain
from a2d.arrays import FloatArray
from a2d.digital.twin import Twin
from a2d.errors import AudioError
from a2d.listening.filters import AnalogFilter, BlockFilter, Through, TwinFilter, analog_whole, twin_whole
from a2d.listening.loudness import LoudnessMeter
from a2d.listening.null_test import NullMeter, NullTest
from a2d.listening.wav import BLOCK_FRAMES, AudioWriter, Written

VERSIONS = ("input", "analog", "twin", "difference")
Versions = dict[str, FloatArray]
Blocks = Callable[[], Iterator[FloatArray]]
Source = Callable[[Collection[str]], Iterator[Versions]]


@dataclass(frozen=True)
class Output:
    """How the files are written.

    Parameters
    ----------
    stem
        Folder and start of each name; `stem.twin.wav` and so on.
    versions
        Which of `VERSIONS`.
    encoding, suffix
        A name in `quantise.ENCODINGS`; .wav or .flac.
    matched
        Whether analog and twin are also written at the input's loudness.
    seed
        Of the dither.
    """

    stem: Path
    versions: Sequence[str] = VERSIONS
    encoding: str = "24"
    suffix: str = ".wav"
    matched: bool = False
    seed: int = 0

    def path(self, version: str) -> Path:
        return self.stem.with_name(f"{self.stem.name}.{version}{self.suffix}")


@dataclass(frozen=True, eq=False)
class Rendered:
    """What came of a rendering.

    Parameters
    ----------
    files
        Each file written.
    null
        Twin against analog model; None when there was no sound.
    loudness_lufs
        Of input, analog and twin, where the measure is defined.
    offsets_db
        Gain of each level-matched version.
    """

    files: tuple[Written, ...]
    null: NullTest | None
    loudness_lufs: dict[str, float]
    offsets_db: dict[str, float] = field(default_factory=dict)

    @property
    def overs(self) -> int:
        return sum(file.overs for file in self.files)


def in_blocks(samples: FloatArray) -> Blocks:
    """A source of blocks [n, channels] out of an array of that shape."""
    return lambda: (samples[at : at + BLOCK_FRAMES] for at in range(0, len(samples), BLOCK_FRAMES))


def signal_source(samples: FloatArray, chain: AnalogChain, twin: Twin) -> Source:
    """All versions of a signal [n] as a whole, each [1, n]: H(j2πf) on its zero-padded spectrum."""
    x = samples[np.newaxis]
    analog, digital = analog_whole(chain, twin.sample_rate_hz, x), twin_whole(twin, x)
    versions = {"input": x, "analog": analog, "twin": digital, "difference": digital - analog}
    return lambda names: iter([{name: versions[name] for name in names}])


def block_source(blocks: Blocks, channels: int, chain: AnalogChain, twin: Twin) -> Source:
    """Versions of audio that comes in blocks, each [channels, n]; only what is asked for is computed."""
    return lambda names: _stream(blocks(), channels, chain, twin, names)


def _stream(
    blocks: Iterator[FloatArray], channels: int, chain: AnalogChain, twin: Twin, names: Collection[str]
) -> Iterator[Versions]:
    """Blocks in step with each other: what is quicker than the analog filter waits for it."""
    filters: dict[str, BlockFilter] = {"input": Through(channels)}
    if {"twin", "difference"} & set(names):
        filters["twin"] = TwinFilter(twin.sos, channels)
    if {"analog", "difference"} & set(names):
        filters["analog"] = AnalogFilter(chain, twin.sample_rate_hz, channels)
    waiting = {name: np.zeros((channels, 0)) for name in filters}

    def step(fresh: dict[str, FloatArray]) -> Versions:
        for name, block in fresh.items():
            waiting[name] = np.concatenate([waiting[name], block], axis=-1) if waiting[name].size else block
        n = min(block.shape[-1] for block in waiting.values())
        out = {name: block[:, :n] for name, block in waiting.items()}
        waiting.update({name: block[:, n:] for name, block in waiting.items()})
        if "difference" in names:
            out["difference"] = out["twin"] - out["analog"]
        return out

    for block in blocks:
        x = np.ascontiguousarray(block.T)
        yield step({name: each.push(x) for name, each in filters.items()})
    yield step({name: each.finish() for name, each in filters.items()})


def write_versions(source: Source, sample_rate_hz: float, channels: int, frames: int, output: Output) -> Rendered:
    """Write the files and take the measures; a second pass writes the level-matched versions.

    Parameters
    ----------
    source
        Called once a pass with the versions wanted.
    sample_rate_hz, channels, frames
        Of the files; `frames` 0 when not known.
    output
        Names and format. The difference is written and the null test made where "difference" is among the versions.
    """
    heard = ("input", "analog", "twin") if output.matched else ()
    meters = {name: LoudnessMeter(sample_rate_hz, channels) for name in heard}
    null = NullMeter(sample_rate_hz, channels) if "difference" in output.versions else None
    size = (sample_rate_hz, channels, frames)
    wanted = {name: (name, 1.0) for name in output.versions}
    files = _write(_measured(source({*output.versions, *heard}), meters, null), wanted, size, output)
    loudness = {name: value for name, meter in meters.items() if (value := _defined(meter)) is not None}
    offsets = _offsets(loudness) if output.matched else {}
    if offsets:
        gains = {f"{name}.matched": (name, 10.0 ** (db / 20.0)) for name, db in offsets.items()}
        files += _write(source(tuple(offsets)), gains, size, output)
    return Rendered(files, _null_or_none(null), loudness, offsets)


def _measured(
    versions_by_block: Iterator[Versions], meters: dict[str, LoudnessMeter], null: NullMeter | None
) -> Iterator[Versions]:
    for versions in versions_by_block:
        for name, meter in meters.items():
            meter.push(versions[name])
        if null is not None:
            null.push(versions["analog"], versions["twin"])
        yield versions


def _write(
    source: Iterator[Versions],
    wanted: dict[str, tuple[str, float]],
    size: tuple[float, int, int],
    output: Output,
) -> tuple[Written, ...]:
    """Each wanted file is a version times a gain; `size` is rate, channels and frames."""
    sample_rate_hz, channels, frames = size
    with ExitStack() as stack:
        writers = {
            name: stack.enter_context(
                AudioWriter(output.path(name), sample_rate_hz, channels, output.encoding, output.seed, frames)
            )
            for name in wanted
        }
        for versions in source:
            for name, (version, gain) in wanted.items():
                block = versions[version] if gain == 1.0 else versions[version] * gain
                writers[name].write(block.T)
        for writer in writers.values():  # all of them, before the first appears under its name
            writer.settle()
    return tuple(writer.written for writer in writers.values())


def _defined(meter: LoudnessMeter) -> float | None:
    try:
        return meter.loudness_lufs()
    except AudioError:
        return None


def _null_or_none(meter: NullMeter | None) -> NullTest | None:
    try:
        return meter.result() if meter is not None else None
    except AudioError:
        return None


def _offsets(loudness: dict[str, float]) -> dict[str, float]:
    missing = {"input", "analog", "twin"} - loudness.keys()
    if missing:
        raise AudioError(
            f"level matching needs 0.4 s or more above -70 LUFS, which this is not: {', '.join(sorted(missing))}"
        )
    return {name: loudness["input"] - loudness[name] for name in ("analog", "twin")}
