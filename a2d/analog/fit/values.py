"""Known sections with unknown values: the panel says f0 and gain, the measurement says Q."""

from __future__ import annotations

import math
from collections.abc import Collection, Sequence
from dataclasses import replace

import numpy as np

from a2d.analog.chain import AnalogChain
from a2d.analog.fit.fit import Fit, FittedSection, finished, vector_of
from a2d.analog.fit.measured import MeasuredResponse
from a2d.analog.fit.order import first_model
from a2d.analog.fit.score import octave_weights, reweighted, tried
from a2d.analog.fit.shapes import SHAPES
from a2d.analog.fit.solve import NUISANCE, Model, Problem, bounds, solve
from a2d.analog.kinds import peaking_w3c_q
from a2d.arrays import FloatArray
from a2d.design import kinds
from a2d.design.section import Section
from a2d.errors import AudioError

TRIES = (1.0, 0.3, 0.55, 1.8, 3.3)  # factors on unknown frequencies and Q to start from


def fit_values(
    measured: MeasuredResponse,
    sections: Sequence[FittedSection],
    free: Collection[tuple[int, str]],
    *,
    coupling: bool = True,
) -> Fit:
    """The values in `free` at which the sections' response is the measured one; all others are held.

    Parameters
    ----------
    measured
        Level, and phase where there is one.
    sections
        The device, with first guesses for the free values.
    free
        Pairs of section index and name of a value.
    coupling
        Whether a coupling corner below the band is a nuisance term; plain gain, polarity and delay always are.

    Examples
    --------
    >>> from a2d.analog.kinds.equalisers import peaking
    >>> f = np.geomspace(20, 20_000, 60)
    >>> one = peaking(1_000.0, 2.5, 6.0)
    >>> h = AnalogChain.of(["p"], one.b, one.a).response(f)
    >>> guess = FittedSection("peaking", {"f0": 1_000.0, "q": 1.0, "gain": 6.0})
    >>> round(fit_values(MeasuredResponse.of(f, h), [guess], [(0, "q")]).sections[0].values["q"], 6)
    2.5
    """
    problem = Problem(measured, octave_weights(measured.f_hz))
    start = first_model(problem, coupling)
    names = [(i, name) for i, s in enumerate(sections) for name in SHAPES[s.shape].parameters]
    missing = [pair for pair in free if pair not in names]
    if missing or not free:
        raise AudioError(f"there is no such value to fit ({missing or 'none given'}, allowed: {names})")
    model = Model(
        tuple(s.shape for s in sections),
        np.concatenate([start.theta, *(vector_of(s) for s in sections)]),
        np.concatenate([start.free, [pair in free for pair in names]]),
        start.inverted,
    )
    logs = np.array([name != "gain" and (i, name) in free for i, name in names])
    best, _ = min((_solved(problem, _scaled(model, logs, k), inv) for k in TRIES for inv in _polarities(measured)),
                  key=lambda pair: pair[1])  # fmt: skip
    best, _ = solve(reweighted(problem, best), best)
    return finished(problem, best, [tried(problem, best)], turn=False)


def _polarities(measured: MeasuredResponse) -> tuple[bool, ...]:
    return (False,) if measured.phase is None else (False, True)


def _solved(problem: Problem, model: Model, inverted: bool) -> tuple[Model, float]:
    return solve(problem, replace(model, inverted=inverted))


def _scaled(model: Model, logs: np.ndarray, factor: float) -> Model:
    theta = model.theta.copy()
    theta[NUISANCE:] += np.where(logs, math.log(factor), 0.0)
    low, high = bounds(model, np.array([1e-3, 1e9]))
    return replace(model, theta=np.where(model.free, np.clip(theta, low, high), theta))


def as_fitted(section: Section) -> FittedSection:
    """A design's section as one that can be fitted.

    Raises
    ------
    AudioError
        Its kind has no values that a fit knows.
    """
    kind, order = getattr(section, "kind", None), getattr(section, "order", 2)
    shape = next((n for n, s in SHAPES.items() if s.kind == kind and s.order == order and kind != "pole_zero"), None)
    if shape is None:
        raise AudioError(
            f'section "{section.name}" has no values that can be fitted '
            f"({kind or type(section).__name__}; allowed: {', '.join(sorted({s.kind for s in SHAPES.values()}))})"
        )
    values = {name: _value(section, name) for name in SHAPES[shape].parameters}
    return FittedSection(shape, values)


def _value(section: Section, name: str) -> float:
    if name == "q" and isinstance(section, kinds.Peaking):
        return peaking_w3c_q(section)
    value = getattr(section, name)
    if value is None:
        raise AudioError(f'section "{section.name}" does not state {name}, which the fit starts from (give it)')
    return float(value)


def without(measured: MeasuredResponse, chain: AnalogChain) -> MeasuredResponse:
    """The measured response with that of known sections taken out."""
    h = chain.response(measured.f_hz)
    phase: FloatArray | None = None if measured.phase is None else measured.phase - np.angle(h)
    return MeasuredResponse(measured.f_hz, measured.log_gain - np.log(np.abs(h)), phase)
