"""The twin of a bank kept as branches: a direct gain, and for each band its sections and one multiplier."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from a2d.analog.bank import Bank
from a2d.analog.chain import AnalogChain, numbered
from a2d.arrays import ArrayLike, ComplexArray, FloatArray
from a2d.digital.match import match_points
from a2d.digital.twin import Twin, default_band_hz, make_twin


@dataclass(frozen=True, eq=False)
class ParallelTwin:
    """y = direct·x + Σ mix·band(x) at one sample rate.

    Parameters
    ----------
    names
        One a band, B of them.
    bands
        The twin of each band, of weight 1.
    mix
        Shape [B]: the weights.
    direct
        The weight of the direct path.
    sample_rate_hz
        Hz.
    """

    names: tuple[str, ...]
    bands: tuple[Twin, ...]
    mix: FloatArray
    direct: float
    sample_rate_hz: float

    def response(self, f_hz: ArrayLike) -> ComplexArray:
        """H(e^{j2πf/fs}) at `f_hz` [F] (Hz); complex, shape [F]."""
        each = np.array([band.response(f_hz) for band in self.bands])
        return np.asarray(self.direct + np.tensordot(self.mix, each, axes=1))


def make_parallel_twin(
    bank: Bank,
    sample_rate_hz: float,
    *,
    method: Sequence[str],
    match_hz: Sequence[float | None],
    found: Sequence[bool],
    band_hz: tuple[float, float] | None = None,
    weight_phase: float = 0.0,
) -> ParallelTwin:
    """The twin of a bank, band by band.

    Parameters
    ----------
    bank
        The analog bands and their weights.
    sample_rate_hz
        Hz.
    method, match_hz, found
        One a band: how it is converted, where it is exact (None: at its own f0), and whether that f0 was found from a
        circuit (`match_points`).
    band_hz
        The band that matters, Hz; `default_band_hz` when absent.
    weight_phase
        For minimax, as in `make_twin`.
    """
    low, high = (float(f) for f in (default_band_hz(sample_rate_hz) if band_hz is None else band_hz))
    twins = []
    for name, sections, how, stated, is_found in zip(bank.names, bank.bands, method, match_hz, found, strict=True):
        count = len(sections.f0_hz)
        chain = AnalogChain.of(numbered(name, count), *sections)
        match = match_points(chain.f0_hz, [stated] * count, [is_found] * count, (low, high))
        twins.append(
            make_twin(chain, sample_rate_hz, method=how, match_hz=match, band_hz=(low, high), weight_phase=weight_phase)
        )
    return ParallelTwin(bank.names, tuple(twins), bank.mix, bank.direct, float(sample_rate_hz))
