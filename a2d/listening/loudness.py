"""Programme loudness by Rec. ITU-R BS.1770-5, with the weighting made by this tool from its analog parameters."""

from __future__ import annotations

from itertools import pairwise

import numpy as np

from a2d import checks
from a2d.analog.chain import AnalogChain
from a2d.arrays import FloatArray
from a2d.digital.twin import make_twin
from a2d.errors import AudioError
from a2d.listening.filters import TwinFilter

# The analog filters behind the 48 kHz coefficients of Rec. ITU-R BS.1770-5, Annex 1, Tables 1 and 2, as published by
# B. De Man, Evaluation of implementations of the EBU R128 loudness measurement, AES 145th Convention, 2018 (title
# from memory). The standard's second stage is not divided by its a0, hence the factor.
SHELF_F0_HZ, SHELF_Q, SHELF_GAIN_DB, SHELF_MIDDLE = (
    1681.974450955533,
    0.7071752369554196,
    3.999843853973347,
    0.4996667741545416,
)
CUT_F0_HZ, CUT_Q, CUT_FACTOR = 38.13547087602444, 0.5003270373238773, 1.0049948987146884

OFFSET_LU = -0.691  # BS.1770-5 equation (2): a 997 Hz sine at 0 dBFS in one channel reads -3.01
STEP_SECONDS, STEPS_A_BLOCK = 0.1, 4  # blocks of 400 ms that overlap by 75 %
ABSOLUTE_GATE_LUFS, RELATIVE_GATE_LU = -70.0, -10.0
SURROUND_WEIGHT = 1.41
LAYOUTS = {
    5: (1.0, 1.0, 1.0, SURROUND_WEIGHT, SURROUND_WEIGHT),
    6: (1.0, 1.0, 1.0, 0.0, SURROUND_WEIGHT, SURROUND_WEIGHT),  # the fourth channel is the low-frequency one
}


def weighting_chain() -> AnalogChain:
    """The two stages: (Vh·s² + (Vb/Q)·s + 1)/(s² + s/Q + 1) with Vh = 10^(G/20), Vb = Vh^0.49967, and a high-pass.

    Examples
    --------
    >>> twin = make_twin(weighting_chain(), 48_000.0)
    >>> [round(float(v), 12) for v in twin.sos[0]]
    [1.535124859587, -2.691696189406, 1.198392810853, 1.0, -1.690659293182, 0.732480774216]
    """
    high = 10.0 ** (SHELF_GAIN_DB / 20.0)
    middle = high**SHELF_MIDDLE
    w, v = 2.0 * np.pi * SHELF_F0_HZ, 2.0 * np.pi * CUT_F0_HZ
    return AnalogChain.of(
        ["shelf", "cut"],
        [[high, middle * w / SHELF_Q, w * w], [CUT_FACTOR, 0.0, 0.0]],
        [[1.0, w / SHELF_Q, w * w], [1.0, v / CUT_Q, v * v]],
        [SHELF_F0_HZ, CUT_F0_HZ],
    )


class LoudnessMeter:
    """Gated programme loudness of blocks that come one after the other; memory grows by 10 numbers a second.

    Parameters
    ----------
    sample_rate_hz
        Hz.
    channels
        1 to 4: all weigh 1; 5: L R C Ls Rs; 6: L R C LFE Ls Rs; more: all weigh 1.

    Examples
    --------
    >>> meter = LoudnessMeter(48_000.0, 1)
    >>> meter.push(np.sin(2 * np.pi * 997 / 48_000 * np.arange(96_000))[np.newaxis])
    >>> round(meter.loudness_lufs(), 2)
    -3.01
    """

    def __init__(self, sample_rate_hz: float, channels: int):
        checks.between("sample rate", sample_rate_hz, 4_000.0, 1_000_000.0, "Hz")
        self._rate = sample_rate_hz
        self._filter = TwinFilter(make_twin(weighting_chain(), sample_rate_hz).sos, channels)
        self._weights = np.array(LAYOUTS.get(channels, (1.0,) * channels))
        self._rest = np.zeros(0)
        self._taken = 0
        self._steps: list[float] = []

    def push(self, block: FloatArray) -> None:
        """Take in `block` [channels, n]."""
        weighted = self._filter.push(block)
        power = np.concatenate([self._rest, self._weights @ weighted**2])
        edges = [0]
        while (edge := self._edge(len(self._steps) + len(edges)) - self._taken) <= power.size:
            edges.append(edge)
        self._steps += [float(np.mean(power[a:b])) for a, b in pairwise(edges)]
        self._rest = power[edges[-1] :]
        self._taken += edges[-1]

    def _edge(self, step: int) -> int:
        return round(step * STEP_SECONDS * self._rate)

    def loudness_lufs(self) -> float:
        """The gated loudness so far in LUFS (equal to LKFS).

        Raises
        ------
        AudioError
            Less than 0.4 s, or nothing above the absolute gate of -70 LUFS.
        """
        if len(self._steps) < STEPS_A_BLOCK:
            raise AudioError(f"loudness needs 0.4 s or more ({len(self._steps) * STEP_SECONDS:.1f} s)")
        blocks = np.convolve(self._steps, np.full(STEPS_A_BLOCK, 1.0 / STEPS_A_BLOCK), "valid")
        loud = blocks[_lufs(blocks) > ABSOLUTE_GATE_LUFS]
        if not loud.size:
            raise AudioError("nothing is louder than the absolute gate (allowed above -70 LUFS)")
        gated = loud[_lufs(loud) > float(_lufs(np.mean(loud))) + RELATIVE_GATE_LU]
        return float(_lufs(np.mean(gated)))


def _lufs(power: FloatArray | np.floating) -> FloatArray:
    return np.asarray(OFFSET_LU + 10.0 * np.log10(np.maximum(power, 1e-30)))
