"""One cascade in the design's number format: rounded, proved stable, or refused with what would carry it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from a2d.arrays import BoolArray, FloatArray
from a2d.digital.twin import Twin
from a2d.errors import RoundingError
from a2d.wordlength.deviation import deviation_db
from a2d.wordlength.formats import Number
from a2d.wordlength.neighbours import round_together
from a2d.wordlength.rounding import Rounded, round_nearest
from a2d.wordlength.stability import is_stable, margin_to_circle
from a2d.wordlength.structures import STRUCTURES, TITLES

INAUDIBLE_DB = 1e-3  # bits for a large numerator, or a zero kept at d.c., may cost this much
ACCEPTED_DB = 0.01  # what a format or structure may move the response to be advised
REFUSED_DB = 1.0  # a stable neighbour of an unstable rounding is no rounding of the design when it is further off


@dataclass(frozen=True, eq=False)
class Proof:
    """A rounded cascade and what was found about it.

    Attributes
    ----------
    rounded
        The numbers.
    nearest_db, error_db
        The largest level change by rounding each coefficient alone, and by the numbers chosen.
    margin
        1 - |p| of the outermost pole; above zero, for what is unstable is refused.
    exact_margin
        The same before rounding.
    """

    rounded: Rounded
    nearest_db: float
    error_db: float
    margin: float
    exact_margin: float


def rounding_band_hz(sos: FloatArray, rate_hz: float, band_hz: tuple[float, float]) -> tuple[float, float]:
    """The band to judge rounding in, Hz: the design's, extended to half the lowest pole frequency.

    Rounding moves a low section's peak out of the audible band or into it; only a look below the band sees both.
    """
    angle = pole_angles(sos)
    lowest = float(np.min(angle, initial=np.pi, where=angle > 0.0)) * rate_hz / (2.0 * np.pi)
    return min(band_hz[0], max(0.5 * lowest, 1.0)), band_hz[1]


def pole_angles(sos: FloatArray) -> FloatArray:
    """The angle of each section's upper pole in radians; 0 for real poles. `sos` [..., 6] -> [...]."""
    a1, a2 = sos[..., 4], sos[..., 5]
    return np.asarray(np.arctan2(np.sqrt(np.maximum(4.0 * a2 - a1 * a1, 0.0)), -a1) * (4.0 * a2 > a1 * a1))


def prove(twin: Twin, number: Number, structure: str, *, together: bool, band_hz: tuple[float, float]) -> Proof:
    """Round a twin and prove the result.

    Raises
    ------
    RoundingError
        It is unstable after rounding, or does not fit; the message says what carries it.
    """
    refuse_unstable_twin(twin)
    try:
        return prove_or_refuse(twin, number, structure, together=together, band_hz=band_hz)
    except RoundingError as error:
        advice = alternatives(twin, number, structure, band_hz)
        raise RoundingError(f"at {twin.sample_rate_hz:g} Hz {error}; {advice}") from None


def refuse_unstable_twin(twin: Twin) -> None:
    """Refuse a twin that no rounding could make stable."""
    margins = margin_to_circle(twin.sos)
    if np.any(margins <= 0.0):
        bad = int(np.argmin(margins))
        raise RoundingError(
            f'section "{twin.names[bad]}" at {twin.sample_rate_hz:g} Hz is not stable even before rounding: a pole of '
            f"modulus {1.0 - margins[bad]:.6g} (allowed below 1)"
        )


def prove_or_refuse(
    twin: Twin, number: Number, structure: str, *, together: bool, band_hz: tuple[float, float]
) -> Proof:
    """`prove`, whose error says only what is wrong."""
    sos, rate_hz = twin.sos, twin.sample_rate_hz
    band = rounding_band_hz(sos, rate_hz, band_hz)
    rounded, nearest_db = _nearest(sos, number, structure, rate_hz, band)
    stable = is_stable(rounded.values, structure)
    error_db = nearest_db
    if together and number.kind != "float64":
        searched = round_together(rounded, sos, rate_hz, band)
        if not np.array_equal(searched.words, rounded.words):
            searched_db = deviation_db(sos, searched.sos, rate_hz, band)
            if searched_db < max(nearest_db, INAUDIBLE_DB):
                rounded, error_db = searched, searched_db
    _refuse_unstable(rounded, stable, error_db, twin.names)
    margins = margin_to_circle(rounded.sections)
    return Proof(rounded, nearest_db, error_db, float(np.min(margins)), float(np.min(margin_to_circle(sos))))


def _nearest(
    sos: FloatArray, number: Number, structure: str, rate_hz: float, band_hz: tuple[float, float]
) -> tuple[Rounded, float]:
    """The nearest rounding and its level error in dB, infinite when unstable.

    A table gives up bits for a large numerator where no one hears it; where one would, the gain is moved instead.
    """
    moved = round_nearest(sos, number, structure)
    if not np.any(moved.moved):
        return moved, _level_error(sos, moved, rate_hz, band_hz)
    try:
        shifted = round_nearest(sos, number, structure, move_gain=False)
    except RoundingError:
        return moved, _level_error(sos, moved, rate_hz, band_hz)
    error = _level_error(sos, shifted, rate_hz, band_hz)
    if error <= INAUDIBLE_DB:
        return shifted, error
    return moved, _level_error(sos, moved, rate_hz, band_hz)


def _level_error(sos: FloatArray, rounded: Rounded, rate_hz: float, band_hz: tuple[float, float]) -> float:
    stable = np.all(is_stable(rounded.values, rounded.structure))
    return deviation_db(sos, rounded.sos, rate_hz, band_hz) if stable else np.inf


def _refuse_unstable(rounded: Rounded, stable: BoolArray, error_db: float, names: tuple[str, ...]) -> None:
    if np.all(stable) or (np.all(is_stable(rounded.values, rounded.structure)) and error_db < REFUSED_DB):
        return
    bad = int(np.flatnonzero(~stable)[0])
    raise RoundingError(
        f'section "{names[bad]}" is unstable in {rounded.number}, {TITLES[rounded.structure]}: '
        f"rounding puts a pole on or outside the unit circle"
    )


def alternatives(twin: Twin, number: Number, structure: str, band_hz: tuple[float, float]) -> str:
    """Which structures and formats carry a twin, with the level error each leaves, in words."""
    offers = []
    for other_number, other_structure in _other_choices(number, structure):
        try:
            proof = prove_or_refuse(twin, other_number, other_structure, together=True, band_hz=band_hz)
        except RoundingError:
            continue
        if proof.error_db <= ACCEPTED_DB:
            offers.append(f"{other_number} in {TITLES[other_structure]} ({proof.error_db:.2g} dB)")
        if len(offers) == 3:
            break
    return "what carries it: " + ", ".join(offers) if offers else "no format here carries it"


def _other_choices(number: Number, structure: str) -> list[tuple[Number, str]]:
    """Cheaper changes first: another structure, then wider words, then floating point."""
    wider = [Number("fixed", bits, bits - 2) for bits in (24, 32) if number.kind == "fixed" and bits > number.bits]
    numbers = [number, *wider, Number("float32"), Number("float64")]
    choices = [(n, s) for n in numbers for s in (structure, *STRUCTURES)]
    return [c for c in dict.fromkeys(choices) if c != (number, structure)]
