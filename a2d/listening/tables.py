"""A measurement as CSV and as plain data."""

from __future__ import annotations

import math
from typing import Any

import numpy as np

from a2d.arrays import FloatArray
from a2d.listening.judge import Agreement, Verdict
from a2d.listening.measure import HARMONICS, Measured


def response_csv(measured: Measured, agreements: dict[str, Agreement]) -> str:
    """One line a frequency; `a2d fit` reads the columns Hz, dB and deg.

    The level is absolute, over the signal as it was rendered; `noise_dB` is the level of the noise in it. The
    harmonics are against the fundamental. For each agreement `NAME_error_dB` and `NAME_error_deg` follow, with gain
    and delay out.
    """
    columns: dict[str, FloatArray] = {
        "Hz": measured.f_hz,
        "dB": decibels(measured.response),
        "deg": np.degrees(np.angle(measured.response)),
        "noise_dB": decibels(measured.sigma),
    }
    columns |= {f"harmonic_{n}_dB": decibels(h) for n, h in zip(HARMONICS, measured.harmonics, strict=True)}
    for name, found in agreements.items():
        columns |= {f"{name}_error_dB": found.error_db, f"{name}_error_deg": found.error_deg}
    lines = (",".join(_cell(v) for v in row) for row in zip(*columns.values(), strict=True))
    return "\n".join([",".join(columns), *lines, ""])


def channel_data(measured: Measured, verdict: Verdict | None, agreements: dict[str, Agreement]) -> dict[str, Any]:
    """What a JSON file says of one channel."""
    delay = next((a.alignment.delay_s for a in agreements.values()), 0.0)
    return {
        "latency_ms": round((measured.latency_s + delay) * 1e3, 6),
        "clock_difference_ppm": round(measured.drift_ppm, 3),
        "peak_dbfs": round(20.0 * math.log10(measured.peak), 3),
        "clipped": measured.clipped,
        "harmonics_db_at_1_khz": {
            str(n): _rounded(float(np.interp(1_000.0, measured.f_hz, row)))
            for n, row in zip(HARMONICS, decibels(measured.harmonics), strict=True)
        },
        "verdict": None if verdict is None else list(verdict.words),
        "right": None if verdict is None else verdict.right,
        "hidden_by_noise": None if verdict is None else round(verdict.unusable, 4),
        "against": {
            name: {
                "gain_db": round(a.alignment.gain_db, 4),
                "inverted": a.alignment.inverted,
                "worst_db": _rounded(a.worst_db),
                "worst_at_hz": _rounded(a.worst_at_hz),
                "worst_deg": _rounded(float(np.nanmax(np.abs(a.error_deg), initial=0.0))),
            }
            for name, a in agreements.items()
        },
    }


def decibels(values: np.ndarray) -> FloatArray:
    """20·log10 of the modulus; nan where there is nothing."""
    modulus = np.abs(values)
    return np.asarray(20.0 * np.log10(np.where(modulus > 0.0, modulus, np.nan)))


def _cell(value: float) -> str:
    return f"{value:.7g}" if math.isfinite(value) else ""


def _rounded(value: float) -> float | None:
    return round(value, 3) if math.isfinite(value) else None
