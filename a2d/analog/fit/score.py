"""How good a model is: what it leaves, by which criterion, and whether that is noise."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np

from a2d.analog.fit.solve import Model, Problem, evaluate, misfit
from a2d.arrays import FloatArray

# Closer than any panel or part is known: what is left below that is not worth a section.
FLOOR_DB, FLOOR_DEG = 0.01, 0.1
NEPER_DB = 20.0 / math.log(10.0)
WHITE = 3.5  # standard deviations, 1/sqrt(n), of the correlation between neighbours of white noise
WIDEST_POINT = math.log(2.0) / 12.0  # what one point can speak for: it must not outweigh its error


@dataclass(frozen=True)
class OrderTried:
    """One line of the order sweep: what was left with that many sections, and the information criterion."""

    sections: int
    rms_db: float
    rms_deg: float | None
    criterion: float


def octave_weights(f_hz: FloatArray) -> FloatArray:
    """Half the distance of the neighbours in log frequency, mean 1: every octave with points enough weighs alike."""
    x = np.log(f_hz)
    edges = np.concatenate([[x[0] - (x[1] - x[0]) / 2], (x[1:] + x[:-1]) / 2, [x[-1] + (x[-1] - x[-2]) / 2]])
    widths = np.minimum(np.diff(edges), WIDEST_POINT)
    return np.asarray(widths / widths.mean())


def variances(problem: Problem, model: Model) -> tuple[float, float | None]:
    """Weighted mean squares of the residual in neper² and radian², not below the floor."""
    level, phase = misfit(problem, evaluate(model, problem.measured.f_hz)[0])
    of_level = float(np.average(level**2, weights=problem.weights))
    if phase is None:
        return max(of_level, (FLOOR_DB / NEPER_DB) ** 2), None
    of_phase = float(np.average(phase**2, weights=problem.weights))
    return max(of_level, (FLOOR_DB / NEPER_DB) ** 2), max(of_phase, math.radians(FLOOR_DEG) ** 2)


def reweighted(problem: Problem, model: Model) -> Problem:
    """The same data with the errors that the model leaves, which settles how level weighs against phase."""
    of_level, of_phase = variances(problem, model)
    return replace(problem, sigma_level=math.sqrt(of_level), sigma_phase=math.sqrt(of_phase or 1.0))


def tried(problem: Problem, model: Model) -> OrderTried:
    of_level, of_phase = variances(problem, model)
    n = float(problem.weights.sum() ** 2 / (problem.weights**2).sum())  # points that count, when few weigh most
    points = n if of_phase is None else 2.0 * n
    logs = n * math.log(of_level) + (0.0 if of_phase is None else n * math.log(of_phase))
    criterion = logs + np.count_nonzero(model.free) * math.log(points)
    degrees = None if of_phase is None else math.degrees(math.sqrt(of_phase))
    return OrderTried(len(model.shapes), NEPER_DB * math.sqrt(of_level), degrees, criterion)


def exact(tried: OrderTried) -> bool:
    return tried.rms_db <= FLOOR_DB and (tried.rms_deg is None or tried.rms_deg <= FLOOR_DEG)


def explained(problem: Problem, model: Model) -> bool:
    """Whether what is left looks like noise: neighbours do not resemble each other."""
    if exact(tried(problem, model)):
        return True
    left = misfit(problem, evaluate(model, problem.measured.f_hz)[0])
    limit = WHITE / math.sqrt(problem.measured.f_hz.size)
    return all(r is None or float(r[1:] @ r[:-1]) < limit * float(r @ r) for r in left)
