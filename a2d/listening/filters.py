"""The twin and the analog model as filters on samples, in blocks with state."""

from __future__ import annotations

from typing import Protocol

import numpy as np
from scipy import fft, signal

from a2d.analog.chain import AnalogChain
from a2d.arrays import FloatArray
from a2d.digital.twin import Twin
from a2d.listening.analog_taps import HALF_TAPS, matched_recursion, refuse_unstable, short_correction

LONGEST_PADDING = 2**22  # samples; 87 s at 48 kHz, e⁻²³ of a pole at 0.04 Hz


class BlockFilter(Protocol):
    """Takes blocks [channels, n] one after the other; `lag` samples come later, at the latest from `finish`."""

    lag: int

    def push(self, block: FloatArray) -> FloatArray: ...

    def finish(self) -> FloatArray: ...


class Through:
    """Changes nothing: the input as a filter among others."""

    lag = 0

    def __init__(self, channels: int):
        self._channels = channels

    def push(self, block: FloatArray) -> FloatArray:
        return block

    def finish(self) -> FloatArray:
        return np.zeros((self._channels, 0))


class TwinFilter:
    """The digital twin: second-order sections with their states kept between blocks.

    Parameters
    ----------
    sos
        Shape [S, 6].
    channels
        How many, filtered alike.
    """

    lag = 0

    def __init__(self, sos: FloatArray, channels: int):
        self._sos = np.ascontiguousarray(sos, dtype=np.float64)
        self._channels = channels
        self._state = np.zeros((len(sos), channels, 2))

    def push(self, block: FloatArray) -> FloatArray:
        """Filter `block` [channels, n]."""
        if not len(self._sos) or not block.shape[-1]:
            return block
        out, self._state = signal.sosfilt(self._sos, block, axis=-1, zi=self._state)
        return np.asarray(out)

    def finish(self) -> FloatArray:
        """Nothing is held back."""
        return np.zeros((self._channels, 0))


class AnalogFilter:
    """The analog model on blocks: the sections' own exponentials recursively, the rest by a short filter.

    H(j2πf) below half the rate is written as M(e^{jw})·C(f), M a cascade with poles and zeros at e^{pT}: M carries
    everything that rings long, exactly, and C is so smooth that `2·HALF_TAPS` taps hold it. The result is that of
    `analog_whole` but for a narrow region below half the rate, and needs the same memory for any length and any pole.

    Parameters
    ----------
    chain
        The analog sections.
    sample_rate_hz
        Hz.
    channels
        How many, filtered alike.

    Raises
    ------
    AudioError
        The chain has a pole that is not in the left half-plane.
    """

    lag = HALF_TAPS

    def __init__(self, chain: AnalogChain, sample_rate_hz: float, channels: int):
        refuse_unstable(chain)
        self._recursion = TwinFilter(matched_recursion(chain, sample_rate_hz), channels)
        self._taps = short_correction(chain, sample_rate_hz)
        self._history = np.zeros((channels, self._taps.size - 1))
        self._skip = HALF_TAPS
        self._spectra: dict[int, FloatArray] = {}

    def push(self, block: FloatArray) -> FloatArray:
        """Filter `block` [channels, n]; the first call returns `lag` samples fewer."""
        out = self._convolve(self._recursion.push(block))
        skipped = min(self._skip, out.shape[-1])
        self._skip -= skipped
        return out[:, skipped:]

    def finish(self) -> FloatArray:
        """The samples held back."""
        return self.push(np.zeros((len(self._history), HALF_TAPS)))

    def _convolve(self, block: FloatArray) -> FloatArray:
        """Overlap-save: every output sample is a whole sum over the taps."""
        if not block.shape[-1]:
            return block
        joined = np.concatenate([self._history, block], axis=-1)
        self._history = joined[:, -(self._taps.size - 1) :]
        size = fft.next_fast_len(joined.shape[-1], real=True)
        if size not in self._spectra:
            self._spectra = {size: fft.rfft(self._taps, size)}
        whole = fft.irfft(fft.rfft(joined, size, axis=-1) * self._spectra[size], size, axis=-1)
        return np.asarray(whole[:, self._taps.size - 1 : joined.shape[-1]])


def twin_whole(twin: Twin, samples: FloatArray) -> FloatArray:
    """The twin's answer to `samples` [..., n] from rest."""
    return np.asarray(signal.sosfilt(twin.sos, samples, axis=-1)) if len(twin) else samples.copy()


def analog_whole(chain: AnalogChain, sample_rate_hz: float, samples: FloatArray) -> FloatArray:
    """The analog model's answer to band-limited `samples` [..., n]: H(j2πf) on their zero-padded spectrum.

    The padding is at least the length of the samples and as long as the slowest pole needs to fall by 200 dB, so
    that nothing comes round from the end to the start.

    Raises
    ------
    AudioError
        The chain has a pole that is not in the left half-plane.
    """
    refuse_unstable(chain)
    n = samples.shape[-1]
    size = fft.next_fast_len(n + max(n, _ringing_samples(chain, sample_rate_hz)), real=True)
    f = np.fft.rfftfreq(size, 1.0 / sample_rate_hz)
    spectrum = fft.rfft(samples, size, axis=-1) * chain.response(f)
    return np.asarray(fft.irfft(spectrum, size, axis=-1)[..., :n])


def _ringing_samples(chain: AnalogChain, sample_rate_hz: float) -> int:
    slowest = min((-float(p.real) for a in chain.a for p in np.roots(a)), default=np.inf)
    seconds = np.log(1e10) / slowest
    return int(min(np.ceil(seconds * sample_rate_hz), LONGEST_PADDING))
