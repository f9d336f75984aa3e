"""`auto`: the simplest method that keeps the limits, a section at a time."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from a2d.analog import response as analog
from a2d.arrays import FloatArray
from a2d.digital import response as digital
from a2d.digital.allowed import Allowed
from a2d.digital.methods import EXACT_AT_MATCH, METHODS
from a2d.digital.refusal import SectionRefused

SIMPLEST_FIRST = ("bilinear", "magnitude_matched", "minimax")
AUTO = "auto"


@dataclass(frozen=True)
class Choice:
    """The method of one section, its coefficients [6], and why."""

    method: str
    sos: FloatArray
    why: str


@dataclass(frozen=True, eq=False)
class _Options:
    """Every section by every method: coefficients [K, S, 6] and errors [K, 3, S, G]; which exist, [K, S]."""

    sos: FloatArray
    errors: FloatArray
    exists: FloatArray


def choose(
    b: FloatArray,
    a: FloatArray,
    rate: float,
    match: FloatArray,
    band: FloatArray,
    methods: Sequence[str],
    allowed: Allowed | None,
) -> tuple[Choice, ...]:
    """A method for each section that asks for `auto`; the others keep theirs.

    Parameters
    ----------
    b, a, match
        Shape [S, 3] and [S], as for a method.
    rate, band
        Hz, the band of shape [2].
    methods
        One a section.
    allowed
        The limits of the whole chain; without them every section takes the method of least error.

    Notes
    -----
    From the bilinear transform everywhere, the one change of method that brings the whole chain nearest to its limits
    is made, until they are kept; then each section goes back to the simplest method with which they still are.
    """
    options = _options(b, a, rate, match, band, allowed)
    asking = np.array([method == AUTO for method in methods])
    fixed = np.array([SIMPLEST_FIRST.index(m) if m in SIMPLEST_FIRST else 0 for m in methods])
    if allowed is None:
        taken = np.where(asking, len(SIMPLEST_FIRST) - 1, fixed)
    else:
        taken = _simplify(options, allowed, asking, _upgrade(options, allowed, asking, fixed))
    return tuple(_choice(options, allowed, s, int(k)) for s, k in enumerate(taken))


def _options(
    b: FloatArray, a: FloatArray, rate: float, match: FloatArray, band: FloatArray, allowed: Allowed | None
) -> _Options:
    """Each section by each method; one that a method refuses does not exist."""
    f_hz = np.geomspace(band[0], band[1], 200) if allowed is None else allowed.f_hz
    sos = np.zeros((len(SIMPLEST_FIRST), len(b), 6))
    sos[..., [0, 3]] = 1.0
    exists = np.zeros(sos.shape[:2], dtype=np.bool_)
    for k, name in enumerate(SIMPLEST_FIRST):
        exists[k] = (match < 0.5 * rate) | (name not in EXACT_AT_MATCH)
        while np.any(exists[k]):
            rows = np.flatnonzero(exists[k])
            try:
                sos[k, rows] = METHODS[name](b[rows], a[rows], np.asarray(rate), match[rows], band)
                break
            except SectionRefused as refused:
                exists[k, rows[list(refused.rows)]] = False
    return _Options(sos, np.stack([_errors(b, a, row, rate, f_hz) for row in sos]), exists)


def _errors(b: FloatArray, a: FloatArray, sos: FloatArray, rate: float, f_hz: FloatArray) -> FloatArray:
    """Magnitude in dB, phase in degrees, group delay in µs, twin minus analog, shape [3, S, G]."""
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = digital.section_response(sos, f_hz, rate) / analog.section_response(b, a, f_hz)
        magnitude = 20.0 * np.log10(np.abs(ratio))
    late = digital.section_group_delay(sos, f_hz, rate) - analog.section_group_delay(b, a, f_hz)
    parts = np.stack([magnitude, np.degrees(np.angle(ratio)), 1e6 * late])
    return np.where(np.isfinite(parts), parts, 0.0)


def _share(options: _Options, allowed: Allowed, taken: FloatArray) -> float:
    """How much of what is allowed the whole chain takes with methods `taken` [S]; infinite where one does not exist."""
    rows = np.arange(len(taken))
    if not np.all(options.exists[taken, rows]):
        return float(np.inf)
    magnitude, phase, late = options.errors[taken, :, rows].sum(axis=0)
    return float(allowed.share(magnitude, phase, late))


def _upgrade(options: _Options, allowed: Allowed, asking: FloatArray, start: FloatArray) -> FloatArray:
    taken = np.where(asking, options.exists.argmax(axis=0), start)
    while (now := _share(options, allowed, taken)) > 1.0:
        tries = []
        for s in np.flatnonzero(asking):
            for k in range(int(taken[s]) + 1, len(SIMPLEST_FIRST)):
                changed = taken.copy()
                changed[s] = k
                tries.append((_share(options, allowed, changed), k, changed))
        if not tries or min(t[0] for t in tries) >= now:
            best = np.where(asking, len(SIMPLEST_FIRST) - 1, taken)
            return best if _share(options, allowed, best) < now else taken
        taken = min(tries, key=lambda t: (t[0], t[1]))[2]
    return taken


def _simplify(options: _Options, allowed: Allowed, asking: FloatArray, taken: FloatArray) -> FloatArray:
    if _share(options, allowed, taken) > 1.0:
        return taken
    for s in np.flatnonzero(asking):
        for k in range(int(taken[s])):
            changed = taken.copy()
            changed[s] = k
            if _share(options, allowed, changed) <= 1.0:
                taken = changed
                break
    return taken


def _choice(options: _Options, allowed: Allowed | None, s: int, k: int) -> Choice:
    """One section's choice with its own worst magnitude errors as the reason."""
    worst = np.abs(options.errors[:, 0, s]).max(axis=-1)
    parts = [
        f"{name} {worst[j]:.3g} dB" if options.exists[j, s] else f"{name} has no solution"
        for j, name in enumerate(SIMPLEST_FIRST[: k + 1])
    ]
    ground = "no limits stated, so the least error" if allowed is None else "the simplest that serves the whole chain"
    return Choice(SIMPLEST_FIRST[k], options.sos[k, s], f"{ground}: {', '.join(parts)}")
