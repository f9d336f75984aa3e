"""The digital twin: second-order sections at one sample rate, and how they came about."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from a2d import checks
from a2d.analog.chain import AnalogChain
from a2d.arrays import ArrayLike, ComplexArray, FloatArray
from a2d.digital.allowed import Allowed
from a2d.digital.choose import AUTO
from a2d.digital.methods import EXACT_AT_MATCH, METHODS
from a2d.digital.response import chain_response
from a2d.digital.scopes import SCOPES, Order
from a2d.errors import ConversionError, ParameterError

WIDEST_BAND_HZ = (20.0, 20_000.0)
HIGHEST_BAND_FRACTION = 0.4535  # of the sample rate: 20 kHz at 44.1 kHz, the design's upper end at lower rates
MOST_EXTRA = 8
_MATCH_REMEDY = 'give the section a `match` inside the band, take a higher rate, or method = "minimax"'


@dataclass(frozen=True, eq=False)
class Twin:
    """A cascade of second-order sections at one sample rate.

    Parameters
    ----------
    names, methods
        One a section, S of them.
    sos
        Shape [S, 6]: b0, b1, b2, 1, a1, a2, as `scipy.signal.sosfilt` takes them.
    sample_rate_hz
        Hz.
    match_hz
        Shape [S], Hz: where each section's response is exact by its method.
    why
        One a section where a method was chosen or sections were fitted together, and the reason; else empty.
    """

    names: tuple[str, ...]
    methods: tuple[str, ...]
    sos: FloatArray
    sample_rate_hz: float
    match_hz: FloatArray
    why: tuple[str, ...] = ()

    @classmethod
    def from_sos(cls, sos: ArrayLike, sample_rate_hz: float, names: Sequence[str] | None = None) -> Twin:
        """A twin from second-order sections made elsewhere, [S, 6] in scipy's order, to be compared or emitted.

        Raises
        ------
        ParameterError
            Another shape, a0 of zero, or numbers that are not finite.
        """
        rows = np.atleast_2d(checks.finite("sos", sos))
        if rows.ndim != 2 or rows.shape[-1] != 6 or np.any(rows[:, 3] == 0.0):
            raise ParameterError(f"sos must have the shape [S, 6] with a0 other than zero ({list(rows.shape)})")
        own = tuple(names) if names is not None else tuple(f"section.{i + 1}" for i in range(len(rows)))
        rate = float(checks.positive("sample rate", sample_rate_hz, "Hz"))
        return cls(own, ("given",) * len(rows), rows / rows[:, 3:4], rate, np.full(len(rows), np.nan))

    def response(self, f_hz: ArrayLike) -> ComplexArray:
        """H(e^{j2πf/fs}) of the whole twin at `f_hz` [F] (Hz); complex, shape [F]."""
        f = np.atleast_1d(np.asarray(f_hz, dtype=np.float64))
        return chain_response(self.sos, f, self.sample_rate_hz)

    def __len__(self) -> int:
        return len(self.names)


def default_band_hz(sample_rate_hz: ArrayLike) -> FloatArray:
    """20 Hz to 20 kHz, or to 0.4535 of the sample rate where that is lower; shape [..., 2]."""
    rate = np.asarray(sample_rate_hz, dtype=np.float64)
    top = np.minimum(WIDEST_BAND_HZ[1], np.round(HIGHEST_BAND_FRACTION * rate, 3))
    return np.stack([np.broadcast_to(WIDEST_BAND_HZ[0], top.shape), top], axis=-1)


def make_twin(
    chain: AnalogChain,
    sample_rate_hz: float,
    *,
    method: str | Sequence[str] = "bilinear",
    match_hz: ArrayLike | None = None,
    band_hz: tuple[float, float] | None = None,
    scope: str = "section",
    extra_sections: int = 0,
    weight_phase: float = 0.0,
    allowed: Allowed | None = None,
) -> Twin:
    """The digital twin of an analog chain.

    Parameters
    ----------
    chain
        The analog sections.
    sample_rate_hz
        Hz.
    method
        A name in `a2d.METHODS` or `auto`, or one a section.
    match_hz
        Hz, one or one a section: where the response is exact. The sections' f0 when absent.
    band_hz
        Hz, the band that matters to methods that minimise an error; `default_band_hz` when absent.
    scope
        `section`: a twin section for each of the chain's. `chain`: the same sections, fitted together so that their
        errors compensate (method minimax). `fewest`: as few sections as keep `allowed` (method minimax).
    extra_sections
        With scope `chain`: sections more than the chain has.
    weight_phase
        For minimax: 0 fits magnitude alone; 1 the modulus of ln(twin/analog), its angle the phase error in radians.
    allowed
        The limits that `auto` and scope `fewest` work to, and that weigh the fit of a chain.

    Raises
    ------
    ParameterError
        A match frequency at or above half the sample rate; an unknown method or scope; a mixture that makes no sense.
    ConversionError
        A section has more zeros than poles or is unstable, or the method has no solution for it.

    Examples
    --------
    >>> chain = AnalogChain.of(["rc"], b=[[0, 0, 1]], a=[[0, 1e-3, 1]])
    >>> twin = make_twin(chain, 48_000.0)
    >>> [round(float(v), 6) for v in twin.sos[0]]
    [0.01031, 0.01031, 0.0, 1.0, -0.979381, 0.0]
    """
    rate = float(checks.positive("sample rate", sample_rate_hz, "Hz"))
    match = chain.f0_hz if match_hz is None else checks.positive("match_hz", match_hz, "Hz")
    if match.shape not in ((), (1,), (len(chain),)):
        raise ParameterError(f"match_hz must be one number or one a section ({match.shape} for {len(chain)} sections)")
    match = np.broadcast_to(match, len(chain))
    _refuse_unfit(chain)
    methods = (method,) * len(chain) if isinstance(method, str) else tuple(method)
    if len(methods) != len(chain):
        raise ParameterError(f"method must be one name or one a section ({len(methods)} for {len(chain)} sections)")
    _check_methods(chain.names, methods, match, rate)
    if scope not in SCOPES:
        raise ParameterError(f"there is no scope {scope!r} (allowed: {', '.join(SCOPES)})")
    checks.whole("extra_sections", extra_sections, 0, MOST_EXTRA)
    checks.between("weight_phase", weight_phase, 0.0, 100.0)
    band = default_band_hz(rate) if band_hz is None else np.asarray(band_hz, dtype=np.float64)
    order = Order(
        chain.names, chain.b, chain.a, rate, match, band, methods, extra_sections, float(weight_phase), allowed
    )
    made = SCOPES[scope](order)
    return Twin(made.names, made.methods, made.sos, rate, made.match_hz, made.why)


def _check_methods(names: Sequence[str], methods: Sequence[str], match: FloatArray, rate: float) -> None:
    """Refuse unknown methods, and match frequencies that a method cannot be exact at."""
    for name, method, f in zip(names, methods, match, strict=True):
        if method not in METHODS and method != AUTO:
            raise ParameterError(f"there is no method {method!r} (allowed: {', '.join((*METHODS, AUTO))})")
        if method in EXACT_AT_MATCH:
            checks.below_half_rate(f'the match frequency of section "{name}"', f, rate, _MATCH_REMEDY)


def _refuse_unfit(chain: AnalogChain) -> None:
    """Refuse sections that rise without end (their twin would have a pole at half the rate) and unstable ones."""
    for name, b, a in zip(chain.names, chain.b, chain.a, strict=True):
        order = np.flatnonzero(a)[0]
        if np.flatnonzero(b)[:1] < order:
            raise ConversionError(
                f'section "{name}" has more zeros than poles: it rises without end and has no stable twin; '
                "add the pole that the hardware has"
            )
        # A polynomial of first or second order has its roots on the left when its coefficients have one sign.
        if not (np.all(a[order:] > 0.0) or np.all(a[order:] < 0.0)):
            raise ConversionError(
                f'section "{name}" is unstable: a pole on the imaginary axis or right of it '
                f"(a = {a.tolist()}, allowed coefficients of one sign)"
            )
