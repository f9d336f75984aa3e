"""From float samples to the whole numbers of a PCM file: dither, rounding, overs."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from a2d.arrays import FloatArray, IntArray
from a2d.errors import AudioError


@dataclass(frozen=True)
class Encoding:
    """How samples stand in a file.

    Parameters
    ----------
    subtype
        The audio library's name.
    bits
        Of a whole number; 0 for float.
    dithered
        Whether triangular dither is added before rounding.
    """

    subtype: str
    bits: int
    dithered: bool

    @property
    def full_scale(self) -> float:
        """Steps from zero to full scale, 2^(bits - 1)."""
        return float(2 ** (self.bits - 1))


ENCODINGS: dict[str, Encoding] = {
    "16": Encoding("PCM_16", 16, True),
    "24": Encoding("PCM_24", 24, False),
    "float": Encoding("FLOAT", 0, False),
}


def triangular_dither(generator: np.random.Generator, shape: tuple[int, ...]) -> FloatArray:
    """The difference of two uniform numbers: triangular density from -1 to +1 step.

    Added before rounding it makes the error's mean and variance independent of the signal, the variance 1/4 step²
    (Wannamaker, Lipshitz, Vanderkooy, A theory of nonsubtractive dither, IEEE Trans. Signal Processing 48, 2000).
    """
    raw = generator.integers(0, 2**32, size=(2, *shape), dtype=np.uint32)
    return np.asarray(np.subtract(raw[0], raw[1], dtype=np.float64) * 2.0**-32)


def to_steps(
    samples: FloatArray, encoding: Encoding, dither: Callable[[tuple[int, ...]], FloatArray]
) -> tuple[IntArray, int]:
    """Whole steps of a PCM encoding, and how many samples did not fit.

    Parameters
    ----------
    samples
        Any shape; ±1 is full scale.
    encoding
        A PCM entry of `ENCODINGS`.
    dither
        Shape -> dither in steps; called where the encoding is dithered.

    Returns
    -------
    Steps of the same shape, held at the ends of the range and never wrapped, and the number of those held.
    """
    scaled = samples * encoding.full_scale
    if encoding.dithered:
        scaled = scaled + dither(samples.shape)
    steps = np.rint(scaled)
    low, high = -encoding.full_scale, encoding.full_scale - 1.0
    overs = int(np.count_nonzero(steps < low)) + int(np.count_nonzero(steps > high))
    return np.clip(steps, low, high).astype(np.int64), overs


def refuse_non_numbers(samples: FloatArray, first_frame: int) -> None:
    """An error for NaN and infinity: a file must not carry them, and rounding would make a sample of them."""
    good = np.isfinite(samples)
    if not good.all():
        frame = first_frame + int(np.argwhere(~good)[0][0])
        value = samples[~good][0]
        raise AudioError(f"sample {frame} is not a finite number ({value}); nothing was written")
