"""The blind comparison: one self-contained page that plays two recordings and keeps the answers under seal."""

from __future__ import annotations

import base64
import io

import soundfile

from a2d import checks
from a2d.arrays import FloatArray
from a2d.errors import AudioError
from a2d.listening.loudness import LoudnessMeter
from a2d.report.template import render
from a2d.report.text import plain, signed

TRIALS = (5, 8, 10, 12, 16, 20, 25, 30, 40, 50)
GAP_MS = 16  # twice FADE in deck.js
LARGEST_BYTES = 100_000_000  # of both recordings; a page of text that is longer opens slowly anywhere
LEVEL_MATCH_DB = 0.1  # common practice for comparisons by ear


def blind_page(
    first: bytes,
    second: bytes,
    *,
    labels: tuple[str, str] = ("analog model", "digital twin"),
    title: str = "",
    trials: int = 16,
) -> bytes:
    """The page as HTML with both recordings inside; it works from a file and asks nothing of any network.

    The key is drawn in the browser when a run begins (crypto.getRandomValues), its SHA-256 with a random salt is
    shown before the first trial, key and salt after the last. The score's p value is that of
    `a2d.listening.trials.p_value`.

    Parameters
    ----------
    first, second
        Whole WAV files of the same rate, channels and length.
    labels
        What A and B are; any text.
    title
        What is compared; any text.
    trials
        How many are chosen when the page opens, one of `TRIALS`.

    Raises
    ------
    AudioError
        The recordings cannot be read or do not fit each other.
    ParameterError
        `trials` is out of range.
    """
    checks.whole("trials", trials, TRIALS[0], TRIALS[-1])
    if len(first) + len(second) > LARGEST_BYTES:
        size = (len(first) + len(second)) / 1e6
        raise AudioError(
            f"the recordings are too long for a page ({size:.0f} MB, allowed {LARGEST_BYTES / 1e6:.0f} MB)"
        )
    (a, rate), (b, rate_b) = _samples("first", first), _samples("second", second)
    if a.shape != b.shape or rate != rate_b:
        raise AudioError(
            f"the recordings must have the same length, channels and rate ({_shape(a, rate)}; {_shape(b, rate_b)})"
        )
    return render(
        "blind.html",
        title=plain(title) or f"{plain(labels[0])} and {plain(labels[1])}",
        first=plain(labels[0]),
        second=plain(labels[1]),
        sample_rate_hz=rate,
        level_note=level_note(a, b, float(rate)),
        choices=sorted({*TRIALS, trials}),
        trials=trials,
        gap_ms=GAP_MS,
        audio=[base64.b64encode(content).decode("ascii") for content in (first, second)],
    )


def _samples(which: str, content: bytes) -> tuple[FloatArray, int]:
    try:
        samples, rate = soundfile.read(io.BytesIO(content), dtype="float64", always_2d=True)
    except soundfile.LibsndfileError as error:
        raise AudioError(f"the {which} recording cannot be read: {error}") from error
    if not len(samples):
        raise AudioError(f"the {which} recording holds no samples (allowed one or more)")
    return samples.T, int(rate)


def _shape(samples: FloatArray, rate: int) -> str:
    return f"{samples.shape[1]} samples, {samples.shape[0]} channels, {rate} Hz"


def level_note(first: FloatArray, second: FloatArray, sample_rate_hz: float) -> str:
    """What the page says of the levels: matched, or which is louder and why that matters."""
    try:
        difference = _loudness(second, sample_rate_hz) - _loudness(first, sample_rate_hz)
    except AudioError as error:
        return f"The levels could not be compared ({error}). A difference of level alone can decide a comparison."
    if abs(difference) <= LEVEL_MATCH_DB:
        return f"Loudness is matched: B is {signed(difference)} LU from A (ITU-R BS.1770)."
    louder = "B" if difference > 0.0 else "A"
    return (
        f"Not level-matched: {louder} is louder by {abs(difference):.2f} LU (ITU-R BS.1770). The louder of two equal "
        "sounds seems the better one, and a difference of level alone can decide the comparison."
    )


def _loudness(samples: FloatArray, sample_rate_hz: float) -> float:
    meter = LoudnessMeter(sample_rate_hz, samples.shape[0])
    meter.push(samples)
    return meter.loudness_lufs()
