"""A measured response to analog sections: recognised ones where they explain it, poles and zeros where not."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import combinations

import numpy as np

from a2d import checks
from a2d.analog.chain import AnalogChain
from a2d.analog.fit.measured import MeasuredResponse
from a2d.analog.fit.order import FIRST_ORDER, all_at_once, level_first
from a2d.analog.fit.score import NEPER_DB, OrderTried, explained, octave_weights, tried
from a2d.analog.fit.search import Effort
from a2d.analog.fit.shapes import FREE, SEARCHED, SHAPES, TWINS
from a2d.analog.fit.solve import Model, Problem, evaluate, misfit
from a2d.arrays import FloatArray
from a2d.errors import AudioError

MOST_SECTIONS = 12
NO_CORNER = 1e-4
LARGEST_USUAL_GAIN_DB = 24.0
WIDE_STARTS, WIDE_KEPT = 9, 4  # of the search when the quick ones leave more than noise
TURN_DB = 0.5


@dataclass(frozen=True, eq=False)
class FittedSection:
    """One section of the device.

    Parameters
    ----------
    shape
        A name in `a2d.analog.fit.shapes.SHAPES`.
    values
        f0 in Hz, q, gain in dB and so on, by name.
    """

    shape: str
    values: dict[str, float]


@dataclass(frozen=True, eq=False)
class Fit:
    """A fitted response.

    Parameters
    ----------
    sections
        The device, by falling influence.
    gain_db, inverted, delay_s, corner_hz
        What belongs to the measurement: gain, polarity, delay (0 without phase), a coupling corner below the band (0
        where there is none).
    measured
        The data.
    residual_db, residual_deg
        Measured minus fitted, [F]; no phase where none was measured.
    sweep
        Each order tried.
    """

    sections: tuple[FittedSection, ...]
    gain_db: float
    inverted: bool
    delay_s: float
    corner_hz: float
    measured: MeasuredResponse
    residual_db: FloatArray
    residual_deg: FloatArray | None
    sweep: tuple[OrderTried, ...]

    def chain(self) -> AnalogChain:
        """The device's sections; stable by construction."""
        return chain_of(self.sections)


def chain_of(sections: Sequence[FittedSection]) -> AnalogChain:
    """The sections as an analog chain, named s1, s2, ..."""
    built = [SHAPES[s.shape].build(vector_of(s)) for s in sections]
    names = [f"s{i + 1}" for i in range(len(built))]
    return AnalogChain.of(
        names,
        np.reshape([b.b for b in built], (-1, 3)),
        np.reshape([b.a for b in built], (-1, 3)),
        np.reshape([b.f0_hz for b in built], -1),
    )


def vector_of(section: FittedSection) -> FloatArray:
    """A section's values as the vector that its shape is built from."""
    return np.array([v if n == "gain" else math.log(v) for n, v in section.values.items()])


def fit_response(
    measured: MeasuredResponse,
    *,
    most_sections: int = MOST_SECTIONS,
    shapes: Sequence[str] | None = None,
    coupling: bool = True,
) -> Fit:
    """Analog sections whose response is the measured one.

    Parameters
    ----------
    measured
        Level, and phase where there is one. Each octave counts the same, however many points it has.
    most_sections
        Where the order sweep ends at the latest.
    shapes
        Names in `a2d.analog.fit.shapes.SHAPES`; all that the data can tell apart when absent.
    coupling
        Whether a coupling corner below the band is a nuisance term.

    Returns
    -------
    The fit of the order at which the Bayesian information criterion n·ln(variance) + parameters·ln(n) (G. Schwarz,
    Estimating the dimension of a model, Annals of Statistics 6, 1978) is smallest.

    Examples
    --------
    >>> f = np.geomspace(20, 20_000, 60)
    >>> fit = fit_response(MeasuredResponse.of(f, 1 / (1 + 1j * f / 500.0)))
    >>> [(s.shape, round(s.values["f0"], 3)) for s in fit.sections]
    [('lowpass_1', 500.0)]
    """
    checks.whole("most sections", most_sections, 0, MOST_SECTIONS)
    allowed = _allowed(measured, shapes)
    problem = Problem(measured, octave_weights(measured.f_hz))
    named = tuple(name for name in allowed if name != FREE)
    found: list[tuple[Model, list[OrderTried]]] = []
    for search, effort in (
        (level_first, Effort(named)),
        (all_at_once, Effort(named)),
        (level_first, Effort(tuple(name for name in named if name in FIRST_ORDER))),
        (all_at_once, Effort(allowed, WIDE_STARTS, WIDE_KEPT)),
    ):  # the quick ones first; the wide one only when they leave more than noise
        if not effort.shapes:
            continue
        found.append(search(problem, coupling, effort, most_sections))
        if explained(problem, found[-1][0]) and _plausible(problem, found[-1][0]):
            break
    return finished(problem, *min(found, key=lambda pair: tried(problem, pair[0]).criterion))


def _allowed(measured: MeasuredResponse, shapes: Sequence[str] | None) -> tuple[str, ...]:
    named = SEARCHED if shapes is None else tuple(shapes)
    unknown = [name for name in named if name not in SEARCHED]
    if unknown:
        raise AudioError(f"there is no shape {unknown[0]!r} (allowed: {', '.join(SEARCHED)})")
    return tuple(n for n in named if measured.phase is not None or not SHAPES[n].needs_phase)


def _plausible(problem: Problem, model: Model) -> bool:
    """Whether bells and shelves stand within the data and their gains are such as equalisers have."""
    f = problem.measured.f_hz
    sections = [_section(s, v) for s, v in zip(model.shapes, model.vectors(), strict=True)]
    shaped = [s.values for s in sections if "gain" in s.values]
    return all(f[0] < v["f0"] < f[-1] and abs(v["gain"]) < LARGEST_USUAL_GAIN_DB for v in shaped)


def finished(problem: Problem, model: Model, sweep: Sequence[OrderTried], *, turn: bool = True) -> Fit:
    """The fit that a solved model stands for; with `turn` shelves become low or high ones as suits the gain."""
    f = problem.measured.f_hz
    level, phase = misfit(problem, evaluate(model, f)[0])
    corner = float(model.theta[2] * f[0])
    sections = tuple(_section(s, v) for s, v in zip(model.shapes, model.vectors(), strict=True))
    gain_db = float(model.theta[0] * NEPER_DB)
    if turn:
        sections, gain_db = _least_gain(list(sections), gain_db)
    return Fit(
        sections=sections,
        gain_db=gain_db,
        inverted=model.inverted,
        delay_s=float(model.theta[1] / (2.0 * np.pi * f[-1])),
        corner_hz=corner if model.theta[2] > NO_CORNER else 0.0,
        measured=problem.measured,
        residual_db=level * NEPER_DB,
        residual_deg=None if phase is None else np.degrees(phase),
        sweep=tuple(sweep),
    )


def _least_gain(sections: list[FittedSection], gain_db: float) -> tuple[tuple[FittedSection, ...], float]:
    """Shelves as low or high ones, whichever way leaves the least plain gain; a clear gain is needed to turn one."""
    shelves = [i for i, s in enumerate(sections) if s.shape in TWINS]
    best: tuple[float, tuple[int, ...]] = (abs(gain_db), ())
    for count in range(1, len(shelves) + 1):
        for turned in combinations(shelves, count):
            left = abs(gain_db + sum(sections[i].values["gain"] for i in turned))
            if left < best[0] - TURN_DB:
                best = (left, turned)
    for i in best[1]:
        shape, values = sections[i].shape, sections[i].values
        gain_db += values["gain"]
        sections[i] = FittedSection(TWINS[shape], values | {"gain": -values["gain"]})
    return tuple(sections), gain_db


def _section(shape: str, vector: FloatArray) -> FittedSection:
    names = SHAPES[shape].parameters
    return FittedSection(
        shape, {n: float(v if n == "gain" else math.exp(v)) for n, v in zip(names, vector, strict=True)}
    )
