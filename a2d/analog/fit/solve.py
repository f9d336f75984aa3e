"""Least squares on the logarithm of a response: level and phase at once, poles always left of the axis.

ln H = ln g + jπ·[inverted] - jω·τ - ln(1 + wc/s) + Σ ln H_i(s). Gain g, delay τ and a coupling corner wc below the band
belong to the measurement; the H_i are the device.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import lru_cache

import numpy as np

from a2d.analog.fit.measured import MeasuredResponse
from a2d.analog.fit.shapes import SHAPES, limits
from a2d.analog.response import section_response
from a2d.arrays import BoolArray, ComplexArray, FloatArray

NUISANCE = 3  # ln g, delay in units of 1/(2π·highest frequency), coupling corner over the lowest frequency
STEP = 1e-4  # of the central differences: errors of 1e-8 against slopes of order one
TINY = 1e-12  # stands for the zero of a notch on a measured frequency: its logarithm must be a number
LARGEST_CORNER = 1.0  # over the lowest frequency: beyond that it is a section of the device


@dataclass(frozen=True, eq=False)
class Problem:
    """The data with their weights.

    Parameters
    ----------
    measured
        The response.
    weights
        Shape [F], mean 1: how much each frequency counts.
    sigma_level, sigma_phase
        Errors to expect, in neper and radians; their ratio weighs level against phase.
    """

    measured: MeasuredResponse
    weights: FloatArray
    sigma_level: float = 0.01
    sigma_phase: float = 0.01


@dataclass(frozen=True, eq=False)
class Model:
    """A candidate: which shapes, and all parameters in one vector.

    Parameters
    ----------
    shapes
        Names in `SHAPES`, one a section.
    theta
        Shape [3 + ΣP]: nuisance terms, then each section's vector.
    free
        Shape [3 + ΣP]: which entries may move.
    inverted
        Whether the device turns the polarity.
    """

    shapes: tuple[str, ...]
    theta: FloatArray
    free: BoolArray
    inverted: bool = False

    def vectors(self) -> list[FloatArray]:
        """Each section's own vector."""
        cuts = np.cumsum([NUISANCE, *(len(SHAPES[s].parameters) for s in self.shapes)])
        return np.split(self.theta, cuts)[1:-1]

    def with_section(self, shape: str, vector: FloatArray) -> Model:
        """This model and one section more, all of it free."""
        return replace(
            self,
            shapes=(*self.shapes, shape),
            theta=np.concatenate([self.theta, vector]),
            free=np.concatenate([self.free, np.ones(len(vector), dtype=bool)]),
        )

    def without_section(self, index: int) -> Model:
        """This model without the section at `index`."""
        start = NUISANCE + sum(len(SHAPES[s].parameters) for s in self.shapes[:index])
        span = np.s_[start : start + len(SHAPES[self.shapes[index]].parameters)]
        shapes = self.shapes[:index] + self.shapes[index + 1 :]
        return replace(self, shapes=shapes, theta=np.delete(self.theta, span), free=np.delete(self.free, span))


def empty_model(has_phase: bool) -> Model:
    """Nothing but the nuisance terms."""
    return Model((), np.zeros(NUISANCE), np.array([True, has_phase, True]))


def bounds(model: Model, f_hz: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Lowest and highest value of each entry."""
    pairs = [limits(SHAPES[s], f_hz) for s in model.shapes]
    low = np.concatenate([[-30.0, -np.inf, 0.0], *(p[0] for p in pairs)])
    high = np.concatenate([[30.0, np.inf, LARGEST_CORNER], *(p[1] for p in pairs)])
    return low, high


def evaluate(model: Model, f_hz: FloatArray) -> tuple[ComplexArray, ComplexArray]:
    """H [F] and the slopes d ln H/dθ [F, 3 + ΣP]."""
    scaled = f_hz / f_hz[-1]
    ratio = -1j * model.theta[2] * f_hz[0] / f_hz  # wc/s
    total = np.exp(model.theta[0] - 1j * model.theta[1] * scaled) / (1.0 + ratio)
    columns = [np.ones(f_hz.size, dtype=np.complex128), -1j * scaled, 1j * (f_hz[0] / f_hz) / (1.0 + ratio)]
    vectors = model.vectors()
    slopes: dict[int, ComplexArray] = {}
    for name in dict.fromkeys(model.shapes):  # sections of one shape together: the arrays are small, the calls are not
        rows = [i for i, shape in enumerate(model.shapes) if shape == name]
        h, own = _sections(name, np.stack([vectors[i] for i in rows]), f_hz)
        total = total * np.prod(h, axis=0)
        for i, slope in zip(rows, own, strict=True):
            slopes[i] = slope
    columns += [column for i in range(len(vectors)) for column in slopes[i]]
    return -total if model.inverted else total, np.stack(columns, axis=-1)


def _sections(name: str, vectors: FloatArray, f_hz: FloatArray) -> tuple[ComplexArray, ComplexArray]:
    """H [K, F] of sections [K, P] of one shape and their logarithmic slopes [K, P, F], by central differences."""
    p = vectors.shape[-1]
    built = SHAPES[name].build(vectors[:, np.newaxis] + _moves(p))
    h = section_response(built.b[..., 0, :], built.a[..., 0, :], f_hz)
    h = np.where(h == 0.0, TINY, h)
    return h[:, 0], (h[:, 1 : p + 1] - h[:, p + 1 :]) / (2.0 * STEP * h[:, :1])


@lru_cache
def _moves(p: int) -> FloatArray:
    return np.concatenate([np.zeros((1, p)), STEP * np.eye(p), -STEP * np.eye(p)])


def misfit(problem: Problem, h: ComplexArray) -> tuple[FloatArray, FloatArray | None]:
    """Measured minus model: ln|H| and, where measured, the phase within half a turn."""
    level = problem.measured.log_gain - np.log(np.abs(h))
    if problem.measured.phase is None:
        return level, None
    return level, np.angle(np.exp(1j * problem.measured.phase) * np.conj(h))


def _rows(problem: Problem, h: ComplexArray) -> FloatArray:
    root = np.sqrt(problem.weights)
    level, phase = misfit(problem, h)
    first = root * level / problem.sigma_level
    return first if phase is None else np.concatenate([first, root * phase / problem.sigma_phase])


def _jacobian(problem: Problem, slopes: ComplexArray) -> FloatArray:
    root = np.sqrt(problem.weights)[:, np.newaxis]
    first = root * slopes.real / problem.sigma_level
    if problem.measured.phase is None:
        return first
    return np.concatenate([first, root * slopes.imag / problem.sigma_phase])


def solve(problem: Problem, model: Model, iterations: int = 60) -> tuple[Model, float]:
    """Levenberg-Marquardt from `model`; the model that fits best and its sum of squares.

    The damping is D. W. Marquardt's (An algorithm for least-squares estimation of nonlinear parameters, SIAM J. 11,
    1963), scaled by the diagonal; a step that leaves the allowed range ends on its border.
    """
    f = problem.measured.f_hz
    low, high = bounds(model, f)
    damping = 1e-2
    h, slopes = evaluate(model, f)
    rows = _rows(problem, h)
    cost = float(rows @ rows)
    for _ in range(iterations):
        step = _step(_jacobian(problem, slopes), rows, model.free, damping)
        trial = replace(model, theta=np.clip(model.theta + step, low, high))
        new_h, new_slopes = evaluate(trial, f)
        new_rows = _rows(problem, new_h)
        new_cost = float(new_rows @ new_rows)
        if not new_cost < cost:
            damping *= 8.0
            if damping > 1e8:
                break
            continue
        gained = cost - new_cost
        model, slopes, rows, cost = trial, new_slopes, new_rows, new_cost
        damping = max(damping * 0.2, 1e-9)
        if gained < 1e-7 * cost + 1e-12:
            break
    return model, cost


def _step(jacobian: FloatArray, rows: FloatArray, free: BoolArray, damping: float) -> FloatArray:
    j = jacobian[:, free]
    normal = j.T @ j
    diagonal = np.diag(normal)
    normal = normal + np.diag(damping * diagonal + 1e-12 * (1.0 + diagonal.max(initial=0.0)))
    step = np.zeros(free.size)
    step[free] = np.linalg.solve(normal, j.T @ rows)
    return step
