"""Is it the right filter? A measured device held against twin and analog response, and the likely faults tried."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from a2d.arrays import ComplexArray, FloatArray
from a2d.listening.measure import Alignment, Measured, align, aligned

USABLE_DB = 20.0  # a point counts where it stands so far above its noise
QUIET_SHARE = 0.05  # of the points may drown
NOISE_SIGMAS = 3.0


@dataclass(frozen=True, eq=False)
class Agreement:
    """A measured response against one reference.

    Parameters
    ----------
    alignment
        What was taken out.
    error_db, error_deg
        Shape [F]: measured minus reference; nan where noise hides it.
    worst_db, worst_at_hz
        The largest error in level.
    """

    alignment: Alignment
    error_db: FloatArray
    error_deg: FloatArray
    worst_db: float
    worst_at_hz: float


@dataclass(frozen=True, eq=False)
class Verdict:
    """What the device is.

    Parameters
    ----------
    words
        "right filter", or the faults found.
    right
        Whether it is the reference within the tolerance and without faults.
    agreement
        Against the reference.
    unusable
        Share of the points that noise hides.
    """

    words: tuple[str, ...]
    right: bool
    agreement: Agreement
    unusable: float


def judge_measured(
    measured: Measured,
    reference: ComplexArray,
    suspects: Mapping[str, ComplexArray],
    tolerance_db: float,
) -> Verdict:
    """Hold a measured channel against the response that it should have.

    Parameters
    ----------
    measured
        The channel.
    reference
        Shape [F] at `measured.f_hz`: what it should be.
    suspects
        What it might be instead, by the words to say then: "wrong rate: ..." and so on.
    tolerance_db
        Largest allowed error in level, dB.
    """
    usable = _usable(measured)
    own = agreement(measured, reference, usable)
    words = []
    if measured.clipped:
        words.append("clipped")
    unusable = 1.0 - float(np.mean(usable))
    if _drowned(measured, tolerance_db) > QUIET_SHARE:
        words.append("too noisy")
    if not abs(own.worst_db) <= tolerance_db:
        words.append(_likeliest(measured, usable, own, suspects, tolerance_db))
    elif own.alignment.inverted:
        words.append("wrong polarity")
    return Verdict(tuple(words) or ("right filter",), not words, own, unusable)


def agreement(measured: Measured, reference: ComplexArray, usable: FloatArray | None = None) -> Agreement:
    """Errors of a measured channel against one reference [F], with gain, polarity and delay taken out."""
    counted = _usable(measured) if usable is None else usable
    some = counted.astype(bool) & (np.abs(reference) > 0.0)
    if not np.any(some):
        empty = np.full(measured.f_hz.size, np.nan)
        return Agreement(Alignment(0.0, False, 0.0), empty, empty, float("nan"), float("nan"))
    f, h = measured.f_hz, measured.response
    found = align(h[some], reference[some], f[some], np.ones(np.count_nonzero(some)))
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = np.where(some, aligned(h, f, found) / reference, np.nan)
    error_db = 20.0 * np.log10(np.abs(ratio))
    worst = int(np.nanargmax(np.abs(error_db)))
    return Agreement(found, error_db, np.degrees(np.angle(ratio)), float(error_db[worst]), float(f[worst]))


def _usable(measured: Measured) -> FloatArray:
    return np.asarray(np.abs(measured.response) > measured.sigma * 10.0 ** (USABLE_DB / 20.0))


def _drowned(measured: Measured, tolerance_db: float) -> float:
    """Share of the points whose noise alone may exceed the tolerance."""
    noise_db = 20.0 * np.log10(1.0 + NOISE_SIGMAS * measured.sigma / np.maximum(np.abs(measured.response), 1e-30))
    return float(np.mean(noise_db > tolerance_db))


def _likeliest(
    measured: Measured,
    usable: FloatArray,
    own: Agreement,
    suspects: Mapping[str, ComplexArray],
    tolerance_db: float,
) -> str:
    """The suspect that fits, if one does and clearly better than the reference."""
    tried = {words: agreement(measured, response, usable) for words, response in suspects.items()}
    fitting = {w: abs(a.worst_db) for w, a in tried.items() if abs(a.worst_db) <= tolerance_db}
    if fitting:
        best = min(fitting, key=fitting.__getitem__)
        if fitting[best] < 0.7 * abs(own.worst_db):
            return best
    return f"another filter ({own.worst_db:+.2f} dB at {own.worst_at_hz:.0f} Hz)"
