"""From float samples to the whole numbers of a PCM file: dither, rounding, overs."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
import numpy.typing as npt

from a2d.arrays import FloatArray
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


def triangular_dither(generator: np.random.Generator, shape: tuple[int, ...]) -> npt.NDArray[np.float32]:
    """The difference of two uniform numbers: triangular density from -1 to +1 step.

    Added before rounding it makes the error's mean and variance independent of the signal, the variance 1/4 step²
    (Wannamaker, Lipshitz, Vanderkooy, A theory of nonsubtractive dither, IEEE Trans. Signal Processing 48, 2000).
    """
    uniform = generator.random((2, *shape), dtype=np.float32)
    return np.asarray(uniform[0] - uniform[1])


def to_steps(
    samples: FloatArray, encoding: Encoding, dither: Callable[[tuple[int, ...]], npt.NDArray[Any]]
) -> tuple[npt.NDArray[np.int32], int]:
    """Whole steps of a PCM encoding, and how many samples did not fit.

    Parameters
    ----------
    samples
        Shape [n, channels]; ±1 is full scale.
    encoding
        A PCM entry of `ENCODINGS`.
    dither
        Shape -> dither in steps; called where the encoding is dithered.

    Returns
    -------
    Steps of the same shape, held at the ends of the range and never wrapped, and the number of those held.
    """
    steps = samples * encoding.full_scale
    if encoding.dithered:
        steps += dither(samples.shape)
    np.rint(steps, out=steps)
    low, high = -encoding.full_scale, encoding.full_scale - 1.0
    overs = 0
    if steps.size and (steps.min() < low or steps.max() > high):
        overs = int(np.count_nonzero(steps < low)) + int(np.count_nonzero(steps > high))
        np.clip(steps, low, high, out=steps)
    whole = np.empty(steps.shape, dtype=np.int32)
    for channel in range(steps.shape[-1]):  # the filters keep each channel in one piece, the file its frames
        whole[..., channel] = steps[..., channel]
    return whole, overs


def peak_of(samples: FloatArray, first_frame: int) -> float:
    """The largest modulus; an error for NaN and infinity, which a file must not carry."""
    if not samples.size:
        return 0.0
    peak = max(float(samples.max()), -float(samples.min()))
    if not np.isfinite(peak):
        bad = ~np.isfinite(samples)
        frame, value = first_frame + int(np.argwhere(bad)[0][0]), samples[bad][0]
        raise AudioError(f"sample {frame} is not a finite number ({value}); nothing was written")
    return peak
