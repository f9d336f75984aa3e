"""How a chain is converted: each section for itself, all of them together, or as few as keep the limits."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from a2d.arrays import FloatArray, IntArray
from a2d.digital.allowed import Allowed
from a2d.digital.chain_fit import ChainFit, fit_chain
from a2d.digital.choose import AUTO, choose
from a2d.digital.methods import METHODS
from a2d.digital.minimax import weighted_minimax
from a2d.digital.reduce import fewest_sections
from a2d.digital.refusal import SectionRefused
from a2d.errors import ConversionError, ParameterError

FITTED = "minimax"


@dataclass(frozen=True, eq=False)
class Order:
    """A chain to convert at one rate; fields as the parameters of `make_twin`, one of each a section."""

    names: tuple[str, ...]
    b: FloatArray
    a: FloatArray
    rate: float
    match_hz: FloatArray
    band_hz: FloatArray
    methods: tuple[str, ...]
    extra_sections: int
    weight_phase: float
    allowed: Allowed | None


@dataclass(frozen=True, eq=False)
class Made:
    """The sections that an order gave, T of them, and why each is as it is."""

    names: tuple[str, ...]
    methods: tuple[str, ...]
    sos: FloatArray
    match_hz: FloatArray
    why: tuple[str, ...]


def each_section(order: Order) -> Made:
    """One section for each of the chain's, by its own method."""
    if order.extra_sections:
        raise ParameterError(f'extra_sections needs scope = "chain" ({order.extra_sections}, allowed 0)')
    sos, methods, why = np.empty((len(order.names), 6)), list(order.methods), [""] * len(order.names)
    if AUTO in methods:
        chosen = choose(order.b, order.a, order.rate, order.match_hz, order.band_hz, methods, order.allowed)
        for s in np.flatnonzero([m == AUTO for m in methods]):
            methods[s], why[s] = chosen[s].method, chosen[s].why
    for name in dict.fromkeys(methods):
        rows = np.flatnonzero([m == name for m in methods]).astype(np.int64)
        sos[rows] = _by_method(order, name, rows)
    return Made(order.names, tuple(methods), sos, order.match_hz.copy(), tuple(why))


def _by_method(order: Order, name: str, rows: IntArray) -> FloatArray:
    """The sections `rows` by one method, those of a fit whose phase counts one by one."""
    b, a = order.b[rows], order.a[rows]
    try:
        if name == FITTED:
            return _fitted_alone(order, b, a)
        return METHODS[name](b, a, np.asarray(order.rate), order.match_hz[rows], order.band_hz)
    except SectionRefused as error:
        refused = ", ".join(f'"{order.names[rows[r]]}"' for r in error.rows)
        raise ConversionError(f"{error.reason} (section {refused} at {order.rate:g} Hz)") from error


def _fitted_alone(order: Order, b: FloatArray, a: FloatArray) -> FloatArray:
    """Minimax fits, weighed by the room that the limits leave; one by one where the phase counts."""
    weight = None if order.allowed is None else order.allowed.weight
    if not order.weight_phase:
        return weighted_minimax(b, a, np.asarray(order.rate), order.band_hz, weight)
    fits = [
        fit_chain(b[[i]], a[[i]], order.rate, order.band_hz, weight_phase=order.weight_phase, weight=weight)
        for i in range(len(b))
    ]
    return np.concatenate([fit.sos for fit in fits])


def whole_chain(order: Order) -> Made:
    """The chain's sections, and `extra_sections` more, fitted together."""
    _needs_fit(order, "chain")
    weight = None if order.allowed is None else order.allowed.weight
    fit = _fitted(
        order,
        lambda: fit_chain(
            order.b,
            order.a,
            order.rate,
            order.band_hz,
            extra_sections=order.extra_sections,
            weight_phase=order.weight_phase,
            weight=weight,
        ),
    )
    return _made(order, fit, order.names)


def fewest(order: Order) -> Made:
    """As few sections as keep the magnitude limit."""
    _needs_fit(order, "fewest")
    if order.allowed is None or not np.isfinite(order.allowed.tightest_db):
        raise ParameterError('scope = "fewest" needs a magnitude limit that it can keep ([limits] magnitude)')
    if order.extra_sections:
        raise ParameterError('extra_sections needs scope = "chain"; scope = "fewest" counts its sections itself')
    allowed = order.allowed
    fit = _fitted(
        order,
        lambda: fewest_sections(
            order.b,
            order.a,
            order.rate,
            order.band_hz,
            allowed.tightest_db,
            weight_phase=order.weight_phase,
            weight=allowed.weight,
        ),
    )
    kept = len(fit.sos) - fit.added
    return _made(order, fit, tuple(f"fit.{i + 1}" for i in range(kept)))


SCOPES: dict[str, Callable[[Order], Made]] = {"section": each_section, "chain": whole_chain, "fewest": fewest}


def _needs_fit(order: Order, scope: str) -> None:
    """A fit of the whole chain has no other method than its own."""
    other = sorted(set(order.methods) - {FITTED, AUTO})
    if other:
        raise ParameterError(
            f'scope = "{scope}" is a fit: its method is "{FITTED}" (section methods: {", ".join(other)})'
        )


def _fitted(order: Order, fit: Callable[[], ChainFit]) -> ChainFit:
    try:
        return fit()
    except SectionRefused as error:
        refused = ", ".join(f'"{order.names[r]}"' for r in error.rows)
        raise ConversionError(f"{error.reason} (section {refused} at {order.rate:g} Hz)") from error


def _made(order: Order, fit: ChainFit, names: tuple[str, ...]) -> Made:
    """A fit with names: `added.1`, ... for sections without an original."""
    every = (*names, *(f"added.{i + 1}" for i in range(fit.added)))
    proof = f"; no {len(every)} such sections get below {fit.bound:.3g} dB" if fit.bound > 0.0 else ""
    steps = ", ".join(f"{count} sections {error:.3g} dB" for count, error in fit.by_count)
    why = f"fitted together: {steps}{proof}"
    match = np.array([natural_frequency_hz(row, order.rate) for row in fit.sos])
    if names == order.names:
        match[: len(names)] = order.match_hz
    return Made(every, (FITTED,) * len(every), fit.sos, match, (why,) * len(every))


def natural_frequency_hz(row: FloatArray, rate: float) -> float:
    """|ln p|·fs/2π of the slowest pole of a section [6], Hz; a quarter of the rate where it has none."""
    roots = np.roots(row[3:])
    roots = roots[np.abs(roots) > 1e-12]
    return float(np.min(np.abs(np.log(roots.astype(complex)))) * rate / (2.0 * np.pi)) if len(roots) else 0.25 * rate
