"""Files: exact at 24 bits, dithered at 16, overs held and counted, NaN refused, whole or not at all."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
import soundfile

from a2d.errors import AudioError, FileError
from a2d.listening.quantise import ENCODINGS, to_steps, triangular_dither
from a2d.listening.wav import AudioWriter, audio_info, read_audio, read_blocks

STEP_24, STEP_16 = 2.0**-23, 2.0**-15


def write(path: Path, samples: np.ndarray, encoding: str, seed: int = 0) -> AudioWriter:
    with AudioWriter(path, 48_000.0, samples.shape[1], encoding, seed) as out:
        for block in np.array_split(samples, 3):
            out.write(block)
    return out


@pytest.mark.parametrize("suffix", [".wav", ".flac"])
def test_24_bits_read_back_exactly(tmp_path: Path, suffix: str) -> None:
    steps = np.random.default_rng(3).integers(-(2**23), 2**23, (5_000, 2))
    steps[:6, 0] = [-(2**23), -(2**23) + 1, 2**23 - 1, -1, 0, 1]
    path = tmp_path / f"x{suffix}"
    assert write(path, steps * STEP_24, "24").written.overs == 0
    back, rate = soundfile.read(path, dtype="int32", always_2d=True)
    assert rate == 48_000
    np.testing.assert_array_equal(back >> 8, steps)
    np.testing.assert_array_equal(read_audio(path)[0], steps * STEP_24)


def test_one_step_either_side_of_full_scale() -> None:
    one = 2.0**23
    values = np.array(
        [one - 2, one - 1, one - 0.6, one - 0.4, one, one + 1, -one + 1, -one, -one - 0.4, -one - 0.6, -one - 1]
    )
    steps, overs = to_steps(values[:, np.newaxis] / one, ENCODINGS["24"], np.zeros)
    top, low = 2**23 - 1, -(2**23)
    np.testing.assert_array_equal(steps[:, 0], [top - 1, top, top, top, top, top, low + 1, low, low, low, low])
    assert overs == 5


@pytest.mark.parametrize("encoding", ["16", "24"])
def test_overs_are_counted_and_never_wrapped(tmp_path: Path, encoding: str) -> None:
    samples = np.array([[0.0], [1.5], [-1.5], [40.0], [-1e30], [0.25]])
    written = write(tmp_path / "x.wav", samples, encoding).written
    back = read_audio(tmp_path / "x.wav")[0]
    assert written.overs == 4
    assert written.peak == 1e30
    np.testing.assert_allclose(back[:, 0], [0.0, 1.0, -1.0, 1.0, -1.0, 0.25], atol=2.5 * STEP_16)


def test_float_keeps_what_is_beyond_full_scale_and_counts_it(tmp_path: Path) -> None:
    samples = np.array([[0.5], [1.5], [-2.0]])
    assert write(tmp_path / "x.wav", samples, "float").written.overs == 2
    np.testing.assert_array_equal(read_audio(tmp_path / "x.wav")[0], samples)


@pytest.mark.parametrize("offset", [0.0, 0.1, 0.25, 0.5])
def test_dither_error_has_a_quarter_step_of_variance(offset: float) -> None:
    # TPDF: variance q²/4 whatever the input (Wannamaker, Lipshitz, Vanderkooy 2000). The sample variance of n values
    # with kurtosis below 3 scatters by less than sqrt(2/n): 0.2 % at n = 500,000; the issue allows 4 %.
    n = 500_000
    generator = np.random.default_rng(11)
    steps, _ = to_steps(
        np.full((n, 1), (100.0 + offset) * STEP_16), ENCODINGS["16"], lambda shape: triangular_dither(generator, shape)
    )
    error = steps - (100.0 + offset)
    assert np.var(error) == pytest.approx(0.25, rel=0.01)
    assert abs(np.mean(error)) < 5 * 0.5 / np.sqrt(n)


def test_dither_keeps_a_tone_of_half_a_step(tmp_path: Path) -> None:
    # Rounded without dither this tone would be silence.
    n = np.arange(200_000)
    tone = 0.4 * STEP_16 * np.sin(2 * np.pi * 0.01 * n)
    write(tmp_path / "x.wav", tone[:, np.newaxis], "16")
    back = read_audio(tmp_path / "x.wav")[0][:, 0]
    level = 2 * abs(np.mean(back * np.exp(-2j * np.pi * 0.01 * n)))
    assert level == pytest.approx(0.4 * STEP_16, rel=0.02)  # noise: 0.5 step rms·sqrt(2·2/n)/0.4 = 0.6 % rms


@pytest.mark.parametrize("bad", [np.nan, np.inf, -np.inf])
def test_non_numbers_are_refused_and_leave_nothing(tmp_path: Path, bad: float) -> None:
    samples = np.zeros((10, 2))
    samples[7, 1] = bad
    with pytest.raises(AudioError, match="sample 7 is not a finite number"):
        write(tmp_path / "x.wav", samples, "float")
    assert list(tmp_path.iterdir()) == []


def test_same_samples_same_bytes(tmp_path: Path) -> None:
    samples = 0.1 * np.random.default_rng(0).standard_normal((1_000, 2))
    for encoding in ENCODINGS:
        first, second = tmp_path / f"a{encoding}.wav", tmp_path / f"b{encoding}.wav"
        write(first, samples, encoding)
        write(second, samples, encoding)
        assert first.read_bytes() == second.read_bytes()
    head = (tmp_path / "afloat.wav").read_bytes()[:200]
    at = head.index(b"PEAK")
    assert head[at + 12 : at + 16] == bytes(4)  # no time of writing


def test_reading_faults(tmp_path: Path) -> None:
    with pytest.raises(FileError, match="there is no file"):
        audio_info(tmp_path / "none.wav")
    (tmp_path / "text.wav").write_text("no sound")
    with pytest.raises(FileError, match="not an audio file"):
        read_audio(tmp_path / "text.wav")
    soundfile.write(tmp_path / "nan.wav", np.array([0.0, np.nan]), 48_000, subtype="FLOAT")
    with pytest.raises(AudioError, match="holds a sample that is not a finite number"):
        list(read_blocks(tmp_path / "nan.wav"))


def test_writing_faults(tmp_path: Path) -> None:
    with pytest.raises(AudioError, match=r"allowed: \.wav, \.flac"):
        AudioWriter(tmp_path / "x.ogg", 48_000.0, 1)
    with pytest.raises(AudioError, match="FLAC holds whole numbers"):
        AudioWriter(tmp_path / "x.flac", 48_000.0, 1, "float")
    with pytest.raises(AudioError, match="no encoding '32'"):
        AudioWriter(tmp_path / "x.wav", 48_000.0, 1, "32")
    with pytest.raises(AudioError, match="whole number of Hz"):
        AudioWriter(tmp_path / "x.wav", 48_000.5, 1)
    with pytest.raises(FileError, match="cannot be written"):
        AudioWriter(tmp_path / "x.flac", 48_000.0, 9, "24")
    assert list(tmp_path.iterdir()) == []
