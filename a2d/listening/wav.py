"""Audio files: read in blocks, written whole or not at all."""

from __future__ import annotations

import os
from collections.abc import Iterator
from concurrent.futures import Future, ThreadPoolExecutor
from dataclasses import dataclass
from functools import partial
from pathlib import Path
from types import TracebackType

import numpy as np
import numpy.typing as npt
import soundfile

from a2d.arrays import FloatArray
from a2d.errors import AudioError, FileError
from a2d.listening.quantise import ENCODINGS, peak_of, to_steps, triangular_dither

BLOCK_FRAMES = 16_384  # a stereo block fits a core's own cache
CONTAINERS = {".wav": "WAV", ".flac": "FLAC"}
EXACT_IN_FLOAT32 = ("PCM_16", "PCM_24", "PCM_S8", "PCM_U8", "FLOAT")  # 24 bits of significand; read quicker
FLOATS = ("FLOAT", "DOUBLE", "VORBIS", "OPUS")  # what can hold NaN
LARGEST_WAV_BYTES = 4_000_000_000  # a WAV's length field has 32 bits; RF64 (EBU Tech 3306) is written beyond


@dataclass(frozen=True)
class AudioInfo:
    """What a file says of itself."""

    sample_rate_hz: float
    channels: int
    frames: int


@dataclass(frozen=True)
class Written:
    """What was written.

    Parameters
    ----------
    path
        The file.
    frames, channels
        Its size.
    peak
        The largest sample's modulus before rounding; 1 is full scale.
    overs
        Samples beyond full scale: held there in PCM, kept as they are in float.
    """

    path: Path
    frames: int
    channels: int
    peak: float
    overs: int


def audio_info(path: Path) -> AudioInfo:
    """Rate, channels and length of an audio file."""
    with _opened(path) as source:
        return AudioInfo(float(source.samplerate), int(source.channels), int(source.frames))


def read_blocks(path: Path, frames: int = BLOCK_FRAMES) -> Iterator[FloatArray]:
    """The file's samples in blocks [n, channels], ±1 at full scale.

    Raises
    ------
    AudioError
        The file holds NaN or infinity.
    FileError
        It cannot be read, or is no audio file.
    """
    with ThreadPoolExecutor(1) as reader:  # one block ahead: the file is decoded while the last block is filtered
        blocks = _decoded(path, frames)
        following = reader.submit(next, blocks, None)
        while (block := following.result()) is not None:
            following = reader.submit(next, blocks, None)
            yield block


def _decoded(path: Path, frames: int) -> Iterator[FloatArray]:
    at = 0
    with _opened(path) as source:
        kept = "float32" if source.subtype in EXACT_IN_FLOAT32 else "float64"
        while True:
            block = source.read(frames, dtype=kept, always_2d=True)
            if not len(block):
                return
            if source.subtype in FLOATS and not np.isfinite(block).all():
                raise AudioError(f"{path} holds a sample that is not a finite number (near sample {at})")
            at += len(block)
            yield block.astype(np.float64, order="F")  # each channel in one piece, as the filters want it


def read_audio(path: Path) -> tuple[FloatArray, float]:
    """All samples [n, channels] and the rate in Hz."""
    info = audio_info(path)
    blocks = list(read_blocks(path))
    return (np.concatenate(blocks) if blocks else np.zeros((0, info.channels))), info.sample_rate_hz


def _opened(path: Path) -> soundfile.SoundFile:
    if not path.is_file():
        raise FileError(f"there is no file {path}")
    try:
        return soundfile.SoundFile(path)
    except soundfile.LibsndfileError as error:
        raise FileError(f"{path} is not an audio file that can be read ({error.error_string})") from None


class AudioWriter:
    """Writes one WAV or FLAC file in blocks; the file appears under its name only when everything was written.

    Parameters
    ----------
    path
        Ends in .wav or .flac.
    sample_rate_hz
        Hz, a whole number.
    channels
        1 or more (FLAC: up to 8).
    encoding
        A name in `ENCODINGS`: 16, 24 or float (FLAC: 16 or 24).
    seed
        Of the dither: the same samples give the same bytes.
    expected_frames
        Where known; decides between WAV and RF64.

    Examples
    --------
    >>> import tempfile
    >>> with tempfile.TemporaryDirectory() as folder:
    ...     with AudioWriter(Path(folder) / "x.wav", 48_000.0, 1, "24") as out:
    ...         out.write(np.array([[0.5], [2.0]]))
    ...     out.written.overs, float(read_audio(out.path)[0][0, 0])
    (1, 0.5)
    """

    def __init__(
        self,
        path: Path,
        sample_rate_hz: float,
        channels: int,
        encoding: str = "24",
        seed: int = 0,
        expected_frames: int = 0,
    ):
        if encoding not in ENCODINGS:
            raise AudioError(f"there is no encoding {encoding!r} (allowed: {', '.join(ENCODINGS)})")
        self.path, self.encoding = path, ENCODINGS[encoding]
        self._dither = partial(triangular_dither, np.random.Generator(np.random.SFC64(seed)))
        self._frames, self._overs, self._peak, self._channels = 0, 0, 0.0, channels
        self._worker = ThreadPoolExecutor(1)  # rounds and stores one block while the next is made
        self._pending: Future[None] | None = None
        self._part = path.with_name(f".{path.name}.part")
        container = self._container(expected_frames * channels * (self.encoding.bits or 32) // 8)
        rate = _whole_rate(sample_rate_hz)
        try:
            path.parent.mkdir(parents=True, exist_ok=True)
            self._file = soundfile.SoundFile(self._part, "w", rate, channels, self.encoding.subtype, format=container)
        except (OSError, ValueError, soundfile.LibsndfileError) as error:
            self._part.unlink(missing_ok=True)
            raise FileError(f"{path} cannot be written at {rate} Hz, {channels} channels ({error})") from None

    def _container(self, data_bytes: int) -> str:
        suffix = self.path.suffix.lower()
        if suffix not in CONTAINERS:
            raise AudioError(f"{self.path.name} is no known audio file name (allowed: {', '.join(CONTAINERS)})")
        if suffix == ".flac" and not self.encoding.bits:
            raise AudioError("FLAC holds whole numbers only (allowed with .flac: 16, 24)")
        return "RF64" if suffix == ".wav" and data_bytes > LARGEST_WAV_BYTES else CONTAINERS[suffix]

    def write(self, block: FloatArray) -> None:
        """Append `block` [n, channels], which must not change any more; NaN and infinity are refused, overs counted.

        An error may come with the next block or at the end.
        """
        self.settle()
        self._pending = self._worker.submit(self._take, block)

    def settle(self) -> None:
        """Wait for the last block, and raise what went wrong with it."""
        if self._pending is not None:
            self._pending.result()

    def _take(self, block: FloatArray) -> None:
        peak = peak_of(block, self._frames)
        self._peak = max(self._peak, peak)
        self._frames += len(block)
        if not self.encoding.bits:
            self._overs += int(np.count_nonzero(np.abs(block) > 1.0)) if peak > 1.0 else 0
            self._store(block.astype(np.float32))
            return
        steps, overs = to_steps(block, self.encoding, self._dither)
        self._overs += overs
        steps <<= 32 - self.encoding.bits  # the library takes the upper bits
        self._store(steps)

    def _store(self, values: npt.NDArray[np.float32] | npt.NDArray[np.int32]) -> None:
        try:
            self._file.write(values)
        except soundfile.LibsndfileError as error:
            raise FileError(f"{self.path} cannot be written ({error.error_string})") from None

    @property
    def written(self) -> Written:
        return Written(self.path, self._frames, self._channels, self._peak, self._overs)

    def __enter__(self) -> AudioWriter:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        complete = False
        try:
            if kind is None:
                self.settle()
                complete = True
        finally:
            self._worker.shutdown()
            self._file.close()
            if complete:
                _blank_time_stamp(self._part)
                os.replace(self._part, self.path)
            else:
                self._part.unlink(missing_ok=True)


def _whole_rate(sample_rate_hz: float) -> int:
    if not float(sample_rate_hz).is_integer() or not 1 <= sample_rate_hz <= 2**31 - 1:
        raise AudioError(f"an audio file's sample rate is a whole number of Hz ({sample_rate_hz:g} Hz)")
    return int(sample_rate_hz)


def _blank_time_stamp(path: Path) -> None:
    """Zero the time of writing that a float WAV's PEAK chunk carries: the same samples must give the same bytes."""
    with path.open("r+b") as file:
        at = file.read(4096).find(b"PEAK")
        if at >= 0 and path.name.endswith(".wav.part"):
            file.seek(at + 12)  # after the name, the size and the version, 4 bytes each
            file.write(bytes(4))
