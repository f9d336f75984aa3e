"""How far two recordings cancel: level of the difference, overall and by third-octave band, raw and aligned."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy import fft, optimize

from a2d.arrays import ComplexArray, FloatArray
from a2d.errors import AudioError
from a2d.listening.bands import band_sums, third_octaves

FRAME = 32_768
SILENCE_DB = -300.0  # what is printed for a difference of exactly nothing
LARGEST_DELAY = FRAME // 4


@dataclass(frozen=True, eq=False)
class NullLevels:
    """Levels of a difference against the reference, the aligned one against gain·reference.

    Parameters
    ----------
    overall_db
        Power of the difference over that of the reference.
    bands_db
        Shape [B]: the same in each band.
    """

    overall_db: float
    bands_db: FloatArray


@dataclass(frozen=True, eq=False)
class NullTest:
    """The null test's outcome.

    Parameters
    ----------
    centres_hz
        Shape [B], the third-octave bands.
    raw
        other - reference.
    aligned
        other - gain·reference(t - delay), with the gain and delay that leave least.
    gain_db, inverted
        That gain, and whether it is negative.
    delay_samples
        That delay; positive when `other` is late.
    """

    centres_hz: FloatArray
    raw: NullLevels
    aligned: NullLevels
    gain_db: float
    inverted: bool
    delay_samples: float


class NullMeter:
    """Takes pairs of blocks and keeps their spectra's products; memory does not grow.

    Frames of 32,768 samples under a Hann window, half overlapping. A delay moves the sound but not the window,
    which limits the aligned null of a pair that differs by d samples to about -20·log10(FRAME/(4·d)) dB (for a Hann
    window the mean of (w(n) - w(n - d))² over that of w² is 4/3·(π·d/FRAME)²).

    Parameters
    ----------
    sample_rate_hz
        Hz.
    channels
        How many; their powers are summed.
    """

    def __init__(self, sample_rate_hz: float, channels: int):
        self._rate = sample_rate_hz
        self._waiting = np.zeros((2, channels, 0))
        self._window = np.sin(np.pi * (np.arange(FRAME) + 0.5) / FRAME) ** 2
        bins = FRAME // 2 + 1
        self._reference, self._other, self._difference = np.zeros(bins), np.zeros(bins), np.zeros(bins)
        self._cross = np.zeros(bins, dtype=np.complex128)
        self._seen = False

    def push(self, reference: FloatArray, other: FloatArray) -> None:
        """Take in two blocks [channels, n]."""
        self._waiting = np.concatenate([self._waiting, np.stack([reference, other])], axis=-1)
        while self._waiting.shape[-1] >= FRAME:
            self._take(self._waiting[..., :FRAME])
            self._waiting = self._waiting[..., FRAME // 2 :]

    def _take(self, frame: FloatArray) -> None:
        spectra = fft.rfft(frame * self._window, axis=-1)
        x, y = spectra
        self._reference += np.sum(_power(x), axis=0)
        self._other += np.sum(_power(y), axis=0)
        self._difference += np.sum(_power(y - x), axis=0)
        self._cross += np.sum(np.conj(x) * y, axis=0)
        self._seen = True

    def result(self) -> NullTest:
        """The null test of what was taken in.

        Raises
        ------
        AudioError
            The reference is silent.
        """
        if self._waiting.shape[-1] and not self._seen:
            self._take(_padded(self._waiting))
        if not self._reference.sum() > 0.0:
            raise AudioError("the null test's reference is silent (allowed any sound)")
        delay = best_delay(self._cross)
        turned = (self._cross * np.exp(1j * _angles() * delay)).real
        gain = float(turned.sum() / self._reference.sum())
        left = np.maximum(self._other - 2.0 * gain * turned + gain**2 * self._reference, 0.0)
        centres, edges = third_octaves(20.0, min(20_000.0, 0.4999 * self._rate))
        return NullTest(
            centres,
            self._levels(self._difference, self._reference, edges),
            self._levels(left, gain**2 * self._reference, edges),
            _db(gain**2),
            gain < 0.0,
            delay,
        )

    def _levels(self, difference: FloatArray, reference: FloatArray, edges: FloatArray) -> NullLevels:
        f = np.asarray(fft.rfftfreq(FRAME, 1.0 / self._rate))
        parts = band_sums(f, np.stack([difference, reference]), edges)
        bands = [_db(d / r) if r > 0.0 else float("nan") for d, r in parts.T]
        return NullLevels(_db(float(difference.sum() / reference.sum())), np.array(bands))


def null_test(reference: FloatArray, other: FloatArray, sample_rate_hz: float) -> NullTest:
    """The null test of two recordings [channels, n] of equal shape.

    Examples
    --------
    >>> x = np.random.default_rng(0).standard_normal((1, 100_000))
    >>> outcome = null_test(x, 1.01 * x, 48_000.0)
    >>> round(outcome.raw.overall_db, 2), round(outcome.gain_db, 4), outcome.aligned.overall_db < -140
    (-40.0, 0.0864, True)
    """
    if reference.shape != other.shape:
        raise AudioError(f"a null test needs two recordings of equal shape ({reference.shape}, {other.shape})")
    meter = NullMeter(sample_rate_hz, reference.shape[0])
    meter.push(reference, other)
    return meter.result()


def best_delay(cross: ComplexArray) -> float:
    """The delay in samples at which the correlation behind the spectrum `cross` [FRAME/2 + 1] is largest in modulus."""
    correlation = np.abs(fft.irfft(cross))
    correlation[LARGEST_DELAY:-LARGEST_DELAY] = 0.0
    coarse = int(np.argmax(correlation))
    coarse -= FRAME if coarse > FRAME // 2 else 0
    angles = _angles()

    def loss(delay: float) -> float:
        return -abs(float((cross * np.exp(1j * angles * delay)).real.sum()))

    found = optimize.minimize_scalar(
        loss, bounds=(coarse - 1.0, coarse + 1.0), method="bounded", options={"xatol": 1e-7}
    )
    return float(found.x)


def _angles() -> FloatArray:
    return 2.0 * np.pi * np.arange(FRAME // 2 + 1) / FRAME


def _power(x: ComplexArray) -> FloatArray:
    return np.asarray(x.real**2 + x.imag**2)


def _padded(waiting: FloatArray) -> FloatArray:
    return np.concatenate([waiting, np.zeros((*waiting.shape[:2], FRAME - waiting.shape[-1]))], axis=-1)


def _db(power_ratio: float) -> float:
    return float(10.0 * np.log10(power_ratio)) if power_ratio > 10.0 ** (SILENCE_DB / 10.0) else SILENCE_DB
