"""The section kinds: each turns what a design file says into analog sections.

`KINDS` maps the word after `kind =` to a function of the design's section; the formulas are in the modules here.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, NamedTuple

import numpy as np

from a2d.analog.kinds import equalisers, filters, given, prototypes
from a2d.analog.polynomials import polynomial_sections
from a2d.analog.sections import Sections, amplitude
from a2d.arrays import ComplexArray
from a2d.design import kinds as design
from a2d.design.section import Section


class Kind(NamedTuple):
    """How a kind is built, and the function whose docstring says its H(s).

    Attributes
    ----------
    build
        From the class of the same name in `a2d.design.kinds` to sections.
    formula
        The function that holds the equation.
    """

    build: Callable[[Any], Sections]
    formula: Callable[..., Any]

    @property
    def equation(self) -> str:
        """The formula's docstring up to the first empty line, on one line."""
        return " ".join((self.formula.__doc__ or "").partition("\n\n")[0].split())


def peaking_w3c_q(p: design.Peaking) -> float:
    """The W3C Q of a peaking section, whichever way the file gave it."""
    if p.bandwidth is not None:
        return float(equalisers.w3c_q_of_bandwidth(p.bandwidth, p.gain, p.bandwidth_at))
    return float(equalisers.W3C_Q[p.q_meaning](np.asarray(p.q, dtype=np.float64), amplitude(p.gain)))


def _shelf_q(p: design.LowShelf | design.HighShelf) -> float | None:
    return p.q if p.slope is None else float(equalisers.shelf_q_of_slope(p.slope, p.gain))


def _prototype(p: design.Butterworth | design.Bessel | design.Chebyshev, poles: ComplexArray, gain: float) -> Sections:
    if p.response == "bandpass" and p.band is not None:
        return prototypes.bandpass_of(poles, p.band, gain)
    of = {"lowpass": prototypes.lowpass_of, "highpass": prototypes.highpass_of}[p.response]
    return of(poles, float(p.f0 or 0.0), gain)


def _constant_skirt(p: design.BandpassConstantSkirt) -> Sections:
    return filters.bandpass_constant_skirt(p.f0, p.q, p.gain)


def _butterworth(p: design.Butterworth) -> Sections:
    return _prototype(p, prototypes.butterworth_poles(p.order), p.gain)


def _bessel(p: design.Bessel) -> Sections:
    return _prototype(p, prototypes.bessel_poles(p.order, p.normalisation), p.gain)


def _chebyshev(p: design.Chebyshev) -> Sections:
    poles = prototypes.chebyshev_poles(p.order, p.ripple, p.edge)
    return _prototype(p, poles, p.gain + prototypes.chebyshev_floor_db(p.order, p.ripple))


def _roots(roots: tuple[design.Root, ...]) -> ComplexArray:
    empty = np.empty(0, dtype=np.complex128)
    return np.concatenate([empty, *(given.root_pair(r.f0, r.q, axis=r.axis, right=r.right) for r in roots)])


def _time_constants(p: design.TimeConstants) -> Sections:
    return given.time_constants(p.poles, p.zeros, p.highpass, p.gain, p.reference)


def _pole_zero(p: design.PoleZero) -> Sections:
    return given.pole_zero(_roots(p.poles), _roots(p.zeros), p.gain, p.reference or 0.0)


def _polynomial(p: design.Polynomial) -> Sections:
    sections = polynomial_sections(p.b, p.a)
    return sections if p.f0 is None else sections._replace(f0_hz=np.full_like(sections.f0_hz, p.f0))


KINDS: dict[str, Kind] = {
    "gain": Kind(lambda p: filters.gain(p.gain), filters.gain),
    "lowpass": Kind(lambda p: filters.lowpass(p.f0, p.q, p.gain), filters.lowpass),
    "highpass": Kind(lambda p: filters.highpass(p.f0, p.q, p.gain), filters.highpass),
    "allpass": Kind(lambda p: filters.allpass(p.f0, p.q, p.gain), filters.allpass),
    "bandpass": Kind(lambda p: filters.bandpass(p.f0, p.q, p.gain), filters.bandpass),
    "bandpass_constant_skirt": Kind(_constant_skirt, filters.bandpass_constant_skirt),
    "notch": Kind(lambda p: filters.notch(p.f0, p.q, p.gain), filters.notch),
    "peaking": Kind(lambda p: equalisers.peaking(p.f0, peaking_w3c_q(p), p.gain), equalisers.peaking),
    "low_shelf": Kind(lambda p: equalisers.low_shelf(p.f0, p.gain, _shelf_q(p)), equalisers.low_shelf),
    "high_shelf": Kind(lambda p: equalisers.high_shelf(p.f0, p.gain, _shelf_q(p)), equalisers.high_shelf),
    "butterworth": Kind(_butterworth, prototypes.butterworth_poles),
    "bessel": Kind(_bessel, prototypes.bessel_poles),
    "chebyshev": Kind(_chebyshev, prototypes.chebyshev_poles),
    "time_constants": Kind(_time_constants, given.time_constants),
    "pole_zero": Kind(_pole_zero, given.pole_zero),
    "polynomial": Kind(_polynomial, polynomial_sections),
}


def sections_of(section: Section) -> Sections:
    """The analog sections of a design's section with a `kind`, without its factor."""
    kind: str = getattr(section, "kind")  # noqa: B009 - every class in Section.by_kind has it
    return KINDS[kind].build(section)
