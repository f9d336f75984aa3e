"""Which structure to compute a cascade in: the level error, the noise and the work of each, and the one to take."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from a2d.digital.twin import Twin
from a2d.errors import RoundingError
from a2d.wordlength.choose import ACCEPTED_DB, prove_or_refuse
from a2d.wordlength.formats import Number
from a2d.wordlength.noise import noise_dbfs, noise_gains_by_frequency
from a2d.wordlength.structures import TITLES

QUIET_DBFS = -120.0  # about the noise of a very good 24-bit converter (common practice)
FLOAT32_STEP_BITS = 24  # a float32 just below full scale has steps of 2^-24


@dataclass(frozen=True)
class Candidate:
    """A structure and what it does to a cascade.

    Parameters
    ----------
    structure, error_feedback
        The structure; the order of error feedback (fixed-point direct form I).
    error_db
        The largest level change by rounding the coefficients; infinite when unstable.
    noise_dbfs
        Round-off noise at the output by the textbook formula, dB re full scale; in floating point that of a signal at
        full scale, and an estimate.
    multiplies, additions, states
        A sample and section; `states` are the words remembered.
    """

    structure: str
    error_feedback: int
    error_db: float
    noise_dbfs: float
    multiplies: int
    additions: int
    states: int

    @property
    def title(self) -> str:
        """The structure in words."""
        fed = f" with error feedback of order {self.error_feedback}" if self.error_feedback else ""
        return TITLES[self.structure] + fed

    @property
    def figures(self) -> str:
        """Error, noise and work in words."""
        if not np.isfinite(self.error_db):
            return f"{self.title}: unstable"
        return (
            f"{self.title}: level error {self.error_db:.2g} dB, noise {self.noise_dbfs:.0f} dBFS, "
            f"{self.multiplies} multiplies, {self.additions} additions, {self.states} states"
        )


# structure, order of error feedback, multiplies, additions, states, roundings; the least work first.
# Fixed point rounds once. In floating point a1·y and the sums with it, up to four times the output, each round in steps
# up to four times as large: measured with tones, the noise of low sections lies 10 dB above that of one rounding at the
# output in transposed direct form II, and 11 dB in direct form I.
_FIXED = (
    ("direct_form_1", 0, 5, 4, 4, 1),
    ("transposed_direct_form_2", 0, 5, 4, 2, 1),
    ("direct_form_1", 1, 5, 6, 5, 1),
    ("direct_form_1", 2, 5, 8, 6, 1),
    ("delta", 0, 5, 6, 2, 1),
)
_FLOAT = (("transposed_direct_form_2", 0, 5, 4, 2, 10), ("direct_form_1", 0, 5, 4, 4, 12), ("delta", 0, 5, 6, 2, 1))


def candidates(twin: Twin, number: Number, sample_fraction: int, band_hz: tuple[float, float]) -> tuple[Candidate, ...]:
    """Every structure for a twin in a number format, the least work first.

    Parameters
    ----------
    twin
        Before rounding, at the sample rate that is hardest: the highest.
    sample_fraction
        Fraction bits of a fixed-point sample.
    """
    fixed = number.kind == "fixed"
    step_bits = {"fixed": sample_fraction, "float32": FLOAT32_STEP_BITS, "float64": 53}[number.kind]
    found = []
    for structure, error_feedback, multiplies, additions, states, roundings in _FIXED if fixed else _FLOAT:
        error = _error_db(twin, number, structure, band_hz)
        shaping = _shaping(structure, error_feedback, fixed)
        noise = noise_dbfs(roundings * noise_gains_by_frequency(twin.sos, *shaping), step_bits)
        found.append(Candidate(structure, error_feedback, error, noise, multiplies, additions, states))
    return tuple(found)


def _shaping(structure: str, error_feedback: int, fixed: bool) -> tuple[str, int]:
    """What shapes the noise like the structure does.

    In floating point the first state of the difference form is rounded too; its noise passes one difference only, like
    error feedback of first order.
    """
    return ("direct_form_1", 1) if structure == "delta" and not fixed else (structure, error_feedback)


def _error_db(twin: Twin, number: Number, structure: str, band_hz: tuple[float, float]) -> float:
    try:
        return prove_or_refuse(twin, number, structure, together=False, band_hz=band_hz).error_db
    except RoundingError:
        return float(np.inf)


def recommended(choices: tuple[Candidate, ...]) -> Candidate:
    """The least work that keeps error and noise out of hearing; else the quietest of the accurate, or the best."""
    accurate = [c for c in choices if c.error_db <= ACCEPTED_DB]
    quiet = [c for c in accurate if c.noise_dbfs <= QUIET_DBFS]
    if quiet:
        return quiet[0]
    if accurate:
        return min(accurate, key=lambda c: c.noise_dbfs)
    return min(choices, key=lambda c: c.error_db)
