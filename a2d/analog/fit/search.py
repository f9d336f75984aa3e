"""Which section helps most next: a coarse net of starting points, then least squares from the best of them."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from a2d.analog.fit.shapes import SHAPES, atoms
from a2d.analog.fit.solve import TINY, Model, Problem, evaluate, misfit, solve
from a2d.analog.response import section_response
from a2d.arrays import ComplexArray, FloatArray

SHORT, LONGER = 6, 14  # steps of a first try and of the best ones; the last steps to the very bottom come at the end


@dataclass(frozen=True)
class Effort:
    """How wide the search is.

    Parameters
    ----------
    shapes
        Names in `SHAPES` that may be added.
    starts
        How many shapes are tried by least squares, each from its best point of the net.
    kept
        How many models of each order are gone on from: the best section to add first need not be one of the best two.
    """

    shapes: tuple[str, ...]
    starts: int = 5
    kept: int = 1


def with_one_more(problems: Sequence[Problem], models: Sequence[Model], effort: Effort) -> list[Model]:
    """The best models with one section more, the best first; each of `models` has a problem with its own weights."""
    tried = [
        (solve(problem, start, SHORT)[0], problem)
        for problem, model in zip(problems, models, strict=True)
        for start in starts(problem, model, effort.shapes)[: effort.starts]
    ]
    common = problems[0]
    tried.sort(key=lambda pair: loss_of(common, pair[0]))
    finished = [solve(problem, candidate, LONGER)[0] for candidate, problem in tried[: effort.kept + 1]]
    finished.sort(key=lambda model: loss_of(common, model))
    return finished[: effort.kept]


def loss_of(problem: Problem, model: Model) -> float:
    """The sum of squares by a problem's weights."""
    h, _ = evaluate(model, problem.measured.f_hz)
    level, phase = misfit(problem, h)
    loss = float(problem.weights @ level**2) / problem.sigma_level**2
    return loss if phase is None else loss + float(problem.weights @ phase**2) / problem.sigma_phase**2


def starts(problem: Problem, model: Model, shapes: tuple[str, ...]) -> list[Model]:
    """For each shape the model with its best point of the net, the most promising shape first."""
    h, _ = evaluate(model, problem.measured.f_hz)
    scored = []
    for name in shapes:
        vectors, responses = _net(name, problem.measured.f_hz.tobytes())
        loss = _loss(problem, h * responses)
        best = int(np.argmin(loss))
        scored.append((float(loss[best]), model.with_section(name, vectors[best])))
    scored.sort(key=lambda pair: pair[0])
    return [start for _, start in scored]


@lru_cache(maxsize=32)
def _net(name: str, f_bytes: bytes) -> tuple[FloatArray, ComplexArray]:
    """A shape's starting vectors [A, P] and their responses [A, F]."""
    f_hz = np.frombuffer(f_bytes)
    vectors = atoms(SHAPES[name], f_hz)
    sections = SHAPES[name].build(vectors)
    return vectors, section_response(sections.b[:, 0], sections.a[:, 0], f_hz)


def _loss(problem: Problem, h: ComplexArray) -> FloatArray:
    """Sum of squares of each response [A, F] when gain and delay are refitted, the phase within half a turn."""
    level, phase = misfit(problem, np.where(h == 0.0, TINY, h))
    w = problem.weights
    level = level - (level @ w)[:, np.newaxis] / w.sum()
    loss = (level**2 @ w) / problem.sigma_level**2
    if phase is not None:
        scaled = problem.measured.f_hz / problem.measured.f_hz[-1]
        slope = (phase @ (w * scaled)) / (scaled**2 @ w)
        loss = loss + ((phase - slope[:, np.newaxis] * scaled) ** 2 @ w) / problem.sigma_phase**2
    return np.asarray(loss)
