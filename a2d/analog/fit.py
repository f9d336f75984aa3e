"""A measured response to analog sections: order by order, until one section more explains nothing."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

import numpy as np

from a2d import checks
from a2d.analog.chain import AnalogChain
from a2d.analog.fit_search import Effort, with_one_more
from a2d.analog.fit_shapes import FREE, SHAPES
from a2d.analog.fit_solve import Model, Problem, empty_model, evaluate, misfit, solve
from a2d.analog.measured import MeasuredResponse
from a2d.arrays import FloatArray
from a2d.errors import AudioError

MOST_SECTIONS = 12
NEEDED_GAIN = 6.0  # of the information criterion: a section that explains less is noise
FLOOR_DB, FLOOR_DEG = 0.001, 0.005  # no measurement is better: below that, order by order fits rounding
NEPER_DB = 20.0 / math.log(10.0)
DELAY_SEARCH_SECONDS = 0.2
NO_CORNER = 1e-4
WHITE = 3.5  # standard deviations, 1/sqrt(n), of the correlation between neighbours of white noise
LARGEST_USUAL_GAIN_DB = 24.0
WIDE_STARTS, WIDE_KEPT = 9, 4  # of the search when the quick one leaves more than noise


@dataclass(frozen=True, eq=False)
class FittedSection:
    """One section of the device.

    Parameters
    ----------
    shape
        A name in `fit_shapes.SHAPES`.
    values
        f0 in Hz, q, gain in dB and so on, by name.
    """

    shape: str
    values: dict[str, float]


@dataclass(frozen=True)
class OrderTried:
    """One line of the order sweep: what was left with that many sections, and the information criterion."""

    sections: int
    rms_db: float
    rms_deg: float | None
    criterion: float


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
        Names in `fit_shapes.SHAPES`; all that the data can tell apart when absent.
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
        (_level_first, Effort(named)),
        (_all_at_once, Effort(named)),
        (_all_at_once, Effort(allowed, WIDE_STARTS, WIDE_KEPT)),
    ):  # the quick ones first; the wide one only when they leave more than noise
        found.append(search(problem, coupling, effort, most_sections))
        if _explained(problem, found[-1][0]) and _plausible(problem, found[-1][0]):
            break
    return _finished(problem, *min(found, key=lambda pair: _tried(problem, pair[0]).criterion))


def _all_at_once(problem: Problem, coupling: bool, effort: Effort, most: int) -> tuple[Model, list[OrderTried]]:
    """The order sweep on level and phase together."""
    return _order_sweep(problem, _first_model(problem, coupling), effort, most)


def _level_first(problem: Problem, coupling: bool, effort: Effort, most: int) -> tuple[Model, list[OrderTried]]:
    """The order sweep on the level alone; then delay and polarity from the phase that is left, and all together.

    A device without all-passes has the least phase that its level allows, so that what is left is the delay.
    """
    measured = problem.measured
    if measured.phase is None:
        return _all_at_once(problem, coupling, effort, most)
    shapes = tuple(name for name in effort.shapes if not SHAPES[name].needs_phase)
    silent = replace(problem, measured=replace(measured, phase=None))
    model, _ = _order_sweep(silent, _first_model(silent, coupling), replace(effort, shapes=shapes, kept=2), most)
    _, left = misfit(problem, evaluate(model, measured.f_hz)[0])
    delay, turn = _coarse_delay(replace(measured, phase=left), problem.weights)
    theta, free = model.theta.copy(), model.free.copy()
    theta[1], free[1] = 2.0 * np.pi * delay * measured.f_hz[-1], True
    model, _ = solve(problem, replace(model, theta=theta, free=free, inverted=turn < 0.0))
    return _order_sweep(problem, model, effort, most)


def _order_sweep(problem: Problem, first: Model, effort: Effort, most: int) -> tuple[Model, list[OrderTried]]:
    """One section after the other; the model of the best order, and every order tried."""
    models = [solve(problem, first)[0]]
    best, sweep = models[0], [_tried(problem, models[0])]
    best_criterion = sweep[0].criterion
    while len(models[0].shapes) < most and not _exact(sweep[-1]):
        models = with_one_more([_reweighted(problem, m) for m in models], models, effort)
        sweep.append(_tried(problem, models[0]))
        if sweep[-1].criterion < best_criterion - NEEDED_GAIN:
            best, best_criterion = models[0], sweep[-1].criterion
        elif len(models[0].shapes) >= len(best.shapes) + (1 if _explained(problem, best) else 2):
            break
    return _simplified(problem, best, tuple(n for n in effort.shapes if n != FREE)), sweep


def _explained(problem: Problem, model: Model) -> bool:
    """Whether what is left looks like noise: neighbours do not resemble each other."""
    if _exact(_tried(problem, model)):
        return True
    left = misfit(problem, evaluate(model, problem.measured.f_hz)[0])
    limit = WHITE / math.sqrt(problem.measured.f_hz.size)
    return all(r is None or float(r[1:] @ r[:-1]) < limit * float(r @ r) for r in left)


def _plausible(problem: Problem, model: Model) -> bool:
    """Whether bells and shelves stand within the data and their gains are such as equalisers have."""
    f = problem.measured.f_hz
    sections = [_section(s, v) for s, v in zip(model.shapes, model.vectors(), strict=True)]
    shaped = [s.values for s in sections if "gain" in s.values]
    return all(f[0] < v["f0"] < f[-1] and abs(v["gain"]) < LARGEST_USUAL_GAIN_DB for v in shaped)


def octave_weights(f_hz: FloatArray) -> FloatArray:
    """Half the distance of the neighbours in log frequency, mean 1: every octave weighs the same."""
    x = np.log(f_hz)
    edges = np.concatenate([[x[0] - (x[1] - x[0]) / 2], (x[1:] + x[:-1]) / 2, [x[-1] + (x[-1] - x[-2]) / 2]])
    widths = np.diff(edges)
    return np.asarray(widths / widths.mean())


def _allowed(measured: MeasuredResponse, shapes: Sequence[str] | None) -> tuple[str, ...]:
    named = tuple(SHAPES) if shapes is None else tuple(shapes)
    unknown = [name for name in named if name not in SHAPES]
    if unknown:
        raise AudioError(f"there is no shape {unknown[0]!r} (allowed: {', '.join(SHAPES)})")
    return tuple(n for n in named if measured.phase is not None or not SHAPES[n].needs_phase)


def _first_model(problem: Problem, coupling: bool) -> Model:
    """Nuisance terms alone, with the delay and polarity that the phase shows at first sight."""
    measured = problem.measured
    model = empty_model(measured.phase is not None)
    theta, free = model.theta.copy(), model.free.copy()
    theta[0] = float(np.average(measured.log_gain, weights=problem.weights))
    theta[2], free[2] = (0.01, True) if coupling else (0.0, False)
    inverted = False
    if measured.phase is not None:
        delay, turn = _coarse_delay(measured, problem.weights)
        theta[1] = 2.0 * np.pi * delay * measured.f_hz[-1]
        inverted = turn < 0.0
    return replace(model, theta=theta, free=free, inverted=inverted)


def _coarse_delay(measured: MeasuredResponse, weights: FloatArray) -> tuple[float, float]:
    """The delay at which Σ w·e^{j(φ + ωτ)} is largest, s, and the real part of its direction there.

    Points near the upper end tell the delay; weighting by frequency lets them.
    """
    assert measured.phase is not None
    f = measured.f_hz
    w = weights * f
    step = 0.4 / f[-1]
    spacing = float(np.max(np.diff(f)))
    span = min(DELAY_SEARCH_SECONDS, 0.5 / spacing * 20.0)
    delays = np.arange(-0.1 * span, span, step)
    unit = w * np.exp(1j * measured.phase)
    sums = np.concatenate([np.exp(2j * np.pi * part[:, np.newaxis] * f) @ unit for part in np.array_split(delays, 64)])
    best = int(np.argmax(np.abs(sums)))
    return float(delays[best]), float(sums[best].real)


def _variances(problem: Problem, model: Model) -> tuple[float, float | None]:
    """Weighted mean squares of the residual in neper² and radian², not below the floor."""
    level, phase = misfit(problem, evaluate(model, problem.measured.f_hz)[0])
    of_level = float(np.average(level**2, weights=problem.weights))
    if phase is None:
        return max(of_level, (FLOOR_DB / NEPER_DB) ** 2), None
    of_phase = float(np.average(phase**2, weights=problem.weights))
    return max(of_level, (FLOOR_DB / NEPER_DB) ** 2), max(of_phase, math.radians(FLOOR_DEG) ** 2)


def _reweighted(problem: Problem, model: Model) -> Problem:
    """The same data with the errors that the model leaves, which settles how level weighs against phase."""
    of_level, of_phase = _variances(problem, model)
    return replace(problem, sigma_level=math.sqrt(of_level), sigma_phase=math.sqrt(of_phase or 1.0))


def _tried(problem: Problem, model: Model) -> OrderTried:
    of_level, of_phase = _variances(problem, model)
    n = problem.measured.f_hz.size
    points = n if of_phase is None else 2 * n
    logs = n * math.log(of_level) + (0.0 if of_phase is None else n * math.log(of_phase))
    criterion = logs + np.count_nonzero(model.free) * math.log(points)
    degrees = None if of_phase is None else math.degrees(math.sqrt(of_phase))
    return OrderTried(len(model.shapes), NEPER_DB * math.sqrt(of_level), degrees, criterion)


def _exact(tried: OrderTried) -> bool:
    return tried.rms_db <= FLOOR_DB and (tried.rms_deg is None or tried.rms_deg <= FLOOR_DEG)


def _simplified(problem: Problem, model: Model, named: tuple[str, ...]) -> Model:
    """The least model that the final weights allow: no idle corner or section, a named shape for a free one."""
    for _ in range(2):
        model, _ = solve(_reweighted(problem, model), model)
    base = _tried(problem, model).criterion
    weighted = _reweighted(problem, model)
    for trial in _lesser(weighted, model, named):
        solved, _ = solve(weighted, trial)
        if _tried(problem, solved).criterion < base + NEEDED_GAIN / 2.0:
            return _simplified(problem, solved, named)
    return model


def _lesser(problem: Problem, model: Model, named: tuple[str, ...]) -> Iterator[Model]:
    """Models with fewer parameters than this one."""
    if model.free[2]:
        yield _without_corner(model)
    for i in range(len(model.shapes)):
        yield model.without_section(i)
    for i, shape in enumerate(model.shapes):
        if shape == FREE and named:
            yield with_one_more([problem], [model.without_section(i)], Effort(named, 3))[0]


def _without_corner(model: Model) -> Model:
    theta, free = model.theta.copy(), model.free.copy()
    theta[2], free[2] = 0.0, False
    return replace(model, theta=theta, free=free)


def _finished(problem: Problem, model: Model, sweep: Sequence[OrderTried]) -> Fit:
    f = problem.measured.f_hz
    level, phase = misfit(problem, evaluate(model, f)[0])
    corner = float(model.theta[2] * f[0])
    return Fit(
        sections=tuple(_section(s, v) for s, v in zip(model.shapes, model.vectors(), strict=True)),
        gain_db=float(model.theta[0] * NEPER_DB),
        inverted=model.inverted,
        delay_s=float(model.theta[1] / (2.0 * np.pi * f[-1])),
        corner_hz=corner if model.theta[2] > NO_CORNER else 0.0,
        measured=problem.measured,
        residual_db=level * NEPER_DB,
        residual_deg=None if phase is None else np.degrees(phase),
        sweep=tuple(sweep),
    )


def _section(shape: str, vector: FloatArray) -> FittedSection:
    names = SHAPES[shape].parameters
    return FittedSection(
        shape, {n: float(v if n == "gain" else math.exp(v)) for n, v in zip(names, vector, strict=True)}
    )
