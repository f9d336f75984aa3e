"""A parallel twin against the analog sum of its bands."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from a2d.analog.bank import Bank
from a2d.arrays import FloatArray
from a2d.compare.curves import FLOOR_DB
from a2d.compare.errors import Worst
from a2d.compare.grid import frequency_grid, largest_between
from a2d.digital.parallel import ParallelTwin


@dataclass(frozen=True)
class BankComparison:
    """Parallel twin minus analog sum over a band: worst errors in dB and degrees."""

    band_hz: tuple[float, float]
    magnitude_db: Worst
    phase_deg: Worst


def compare_bank(bank: Bank, twin: ParallelTwin, band_hz: tuple[float, float]) -> BankComparison:
    """Worst errors between grid points too; what lies 80 dB below the largest response counts as lying there."""
    b = np.concatenate([band.b for band in bank.bands])
    a = np.concatenate([band.a for band in bank.bands])
    sos = np.concatenate([band.sos for band in twin.bands])
    grid = frequency_grid(b, a, np.asarray(band_hz), sos, twin.sample_rate_hz)
    floor = float(np.abs(bank.response(grid)).max()) * 10.0 ** (-FLOOR_DB / 20.0)

    def curves(f_hz: FloatArray) -> FloatArray:
        return np.stack([_errors(bank, twin, f, floor)[row] for row, f in enumerate(f_hz)])

    worst, at_hz = largest_between(curves, grid, curves(np.stack([grid, grid])))
    found = [Worst(float(w), float(f)) for w, f in zip(worst, at_hz, strict=True)]
    return BankComparison((float(band_hz[0]), float(band_hz[1])), *found)


def _errors(bank: Bank, twin: ParallelTwin, f_hz: FloatArray, floor: float) -> FloatArray:
    """Magnitude in dB and phase in degrees, shape [2, F]."""
    analog, digital = bank.response(f_hz), twin.response(f_hz)
    size_a, size_d = np.abs(analog), np.abs(digital)
    level = 20.0 * np.log10(np.maximum(size_d, floor) / np.maximum(size_a, floor))
    phase = np.degrees(np.angle(digital * np.conj(analog)))
    return np.stack([level, np.where((size_a > floor) & (size_d > floor), phase, 0.0)])
