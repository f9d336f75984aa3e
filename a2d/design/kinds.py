"""The section kinds: which parameters a `[[section]]` with `kind = ...` takes.

What H(s) they stand for is in `a2d.analog.kinds`, in a function of the same name.
"""

from __future__ import annotations

from typing import Literal, TypeAlias

from a2d.design.quantities import (
    Coefficient,
    Decibel,
    Hertz,
    HertzOrZero,
    Number,
    Octaves,
    PositiveDecibel,
    QFactor,
    Seconds,
)
from a2d.design.section import Section
from a2d.design.structs import DesignStruct

Order: TypeAlias = Literal[1, 2]
Response: TypeAlias = Literal["lowpass", "highpass", "bandpass"]
QMeaning: TypeAlias = Literal["w3c", "pole", "constant_mirrored", "constant_unmirrored"]
HIGHEST_ORDER = 20


class Gain(Section, frozen=True, kw_only=True):
    """A plain gain, without any frequency response."""

    kind: Literal["gain"]
    gain: Decibel = Decibel(0.0)


class _FirstOrSecond(Section, frozen=True, kw_only=True):
    """A filter of first order (no q) or second order (q needed)."""

    f0: Hertz
    order: Order = 2
    q: QFactor | None = None
    gain: Decibel = Decibel(0.0)

    def __post_init__(self) -> None:
        super().__post_init__()
        if self.order == 2 and self.q is None:
            raise ValueError("q is missing (needed for order 2, allowed above 0; or set order = 1)")
        if self.order == 1 and self.q is not None:
            raise ValueError(f"q has no meaning for order 1 ({self.q:g}; leave it out or set order = 2)")


class Lowpass(_FirstOrSecond, frozen=True, kw_only=True):
    """Low-pass of first or second order."""

    kind: Literal["lowpass"]


class Highpass(_FirstOrSecond, frozen=True, kw_only=True):
    """High-pass of first or second order."""

    kind: Literal["highpass"]


class Allpass(_FirstOrSecond, frozen=True, kw_only=True):
    """All-pass of first or second order."""

    kind: Literal["allpass"]


class _SecondOrder(Section, frozen=True, kw_only=True):
    """A filter of second order."""

    f0: Hertz
    q: QFactor
    gain: Decibel = Decibel(0.0)


class Bandpass(_SecondOrder, frozen=True, kw_only=True):
    """Band-pass whose peak is `gain` at any q."""

    kind: Literal["bandpass"]


class BandpassConstantSkirt(_SecondOrder, frozen=True, kw_only=True):
    """Band-pass whose skirts stay in place as q changes; the peak is q."""

    kind: Literal["bandpass_constant_skirt"]


class Notch(_SecondOrder, frozen=True, kw_only=True):
    """Notch: a zero pair on the axis at f0."""

    kind: Literal["notch"]


class Peaking(Section, frozen=True, kw_only=True):
    """Bell: boost or cut around f0. Give `q` (and what it means) or `bandwidth` (and where it is measured)."""

    kind: Literal["peaking"]
    f0: Hertz
    gain: Decibel
    q: QFactor | None = None
    q_meaning: QMeaning = "w3c"
    bandwidth: Octaves | None = None
    bandwidth_at: Literal["half_gain", "-3 dB"] = "half_gain"

    def __post_init__(self) -> None:
        super().__post_init__()
        if (self.q is None) == (self.bandwidth is None):
            raise ValueError("a peaking section has either q or bandwidth (one of them, not both and not none)")
        if self.bandwidth is None and self.bandwidth_at != "half_gain":
            raise ValueError("bandwidth_at has no meaning without bandwidth (leave it out or give bandwidth)")
        if self.q is None and self.q_meaning != "w3c":
            raise ValueError("q_meaning has no meaning without q (leave it out or give q)")
        if self.bandwidth_at == "-3 dB" and abs(self.gain) <= 3.0103:
            raise ValueError(f"bandwidth at -3 dB needs a gain beyond 3.01 dB either way ({self.gain:g} dB)")


class _Shelf(Section, frozen=True, kw_only=True):
    """A shelf of first order (no q, no slope) or second order (one of them)."""

    f0: Hertz
    gain: Decibel
    order: Order = 2
    q: QFactor | None = None
    slope: Number | None = None

    def __post_init__(self) -> None:
        super().__post_init__()
        given = [name for name in ("q", "slope") if getattr(self, name) is not None]
        if self.order == 1 and given:
            raise ValueError(f"{given[0]} has no meaning for order 1 (leave it out or set order = 2)")
        if self.order == 2 and len(given) != 1:
            raise ValueError("a shelf of order 2 has either q or slope (slope 1 is the steepest without overshoot)")
        if self.slope is not None:
            self._check_slope(float(self.slope))

    def _check_slope(self, slope: float) -> None:
        """1/Q² = (A + 1/A)(1/S - 1) + 2 must be above zero (W3C note)."""
        a = 10.0 ** (self.gain / 40.0)
        inverse_of_steepest = 1.0 - 2.0 / (a + 1.0 / a)
        if slope <= 0.0 or slope * inverse_of_steepest >= 1.0:
            below = f" and below {1.0 / inverse_of_steepest:.4g} at this gain" if inverse_of_steepest > 0.0 else ""
            raise ValueError(f"slope is out of range ({slope:g}, allowed above 0{below})")


class LowShelf(_Shelf, frozen=True, kw_only=True):
    """Low shelf; f0 is where half the gain in dB is reached."""

    kind: Literal["low_shelf"]


class HighShelf(_Shelf, frozen=True, kw_only=True):
    """High shelf; f0 is where half the gain in dB is reached."""

    kind: Literal["high_shelf"]


class _Prototype(Section, frozen=True, kw_only=True):
    """A filter of order n from a tabulated prototype: `f0` for low- and high-pass, `band` for band-pass."""

    response: Response
    order: int
    f0: Hertz | None = None
    band: tuple[Hertz, Hertz] | None = None
    gain: Decibel = Decibel(0.0)

    def __post_init__(self) -> None:
        super().__post_init__()
        if not 1 <= self.order <= HIGHEST_ORDER:
            raise ValueError(f"order is out of range ({self.order}, allowed 1 to {HIGHEST_ORDER})")
        wanted, other = ("band", "f0") if self.response == "bandpass" else ("f0", "band")
        if getattr(self, wanted) is None or getattr(self, other) is not None:
            raise ValueError(f"a {self.response} takes {wanted} and not {other}")
        if self.band is not None and not self.band[0] < self.band[1]:
            raise ValueError(f"band must rise ({self.band[0]:g} Hz to {self.band[1]:g} Hz)")


class Butterworth(_Prototype, frozen=True, kw_only=True):
    """Butterworth of order n: maximally flat, f0 (or the band's ends) at -3.01 dB."""

    kind: Literal["butterworth"]


class Bessel(_Prototype, frozen=True, kw_only=True):
    """Bessel of order n; f0 is at -3.01 dB (magnitude), or where the asymptotes meet (phase), or 1/(2π·delay)."""

    kind: Literal["bessel"]
    normalisation: Literal["magnitude", "phase", "delay"] = "magnitude"


class Chebyshev(_Prototype, frozen=True, kw_only=True):
    """Chebyshev (type I) of order n with `ripple`; f0 is the ripple band's edge or 3.01 dB below the peak."""

    kind: Literal["chebyshev"]
    ripple: PositiveDecibel
    edge: Literal["ripple", "-3 dB"] = "ripple"

    def __post_init__(self) -> None:
        super().__post_init__()
        if self.edge == "-3 dB" and self.ripple >= 3.0103:
            raise ValueError(f"an edge at -3 dB needs a ripple below 3.01 dB ({self.ripple:g} dB)")


class TimeConstants(Section, frozen=True, kw_only=True):
    """Poles and zeros given as time constants: Π(1 + s·zero) / Π(1 + s·pole) · Π(s·t/(1 + s·t)) for `highpass`."""

    kind: Literal["time_constants"]
    poles: tuple[Seconds, ...] = ()
    zeros: tuple[Seconds, ...] = ()
    highpass: tuple[Seconds, ...] = ()
    gain: Decibel = Decibel(0.0)
    reference: Hertz | None = None

    def __post_init__(self) -> None:
        super().__post_init__()
        if not self.poles and not self.highpass:
            raise ValueError("poles is empty (give at least one time constant in poles or highpass)")
        if len(self.zeros) > len(self.poles):
            raise ValueError(
                f"more zeros than poles ({len(self.zeros)} and {len(self.poles)}): the response would rise without end "
                "and has no stable twin; add the pole that the hardware has"
            )


class Root(DesignStruct, frozen=True, kw_only=True):
    """A pole or zero: real at f0 without q, a conjugate pair with q, on the axis with `axis`, at zero with f0 = 0."""

    f0: HertzOrZero
    q: QFactor | None = None
    axis: bool = False
    right: bool = False

    def __post_init__(self) -> None:
        if self.q is not None and self.q < 0.5:
            raise ValueError(f"a pair has q of 0.5 or more ({self.q:g}); write two real ones instead")
        if self.axis and self.q is not None:
            raise ValueError("q has no meaning on the axis (leave out q or axis)")
        if self.f0 == 0.0 and (self.q is not None or self.axis or self.right):
            raise ValueError("a root at 0 Hz is real (leave out q, axis and right)")
        if self.axis and self.right:
            raise ValueError("a pair on the axis lies in neither half-plane (leave out axis or right)")

    @property
    def count(self) -> int:
        """1 for a real root, 2 for a pair."""
        return 2 if self.q is not None or self.axis else 1


class PoleZero(Section, frozen=True, kw_only=True):
    """Poles and zeros in Hz and Q; `gain` at `reference` (at 0 Hz when absent)."""

    kind: Literal["pole_zero"]
    poles: tuple[Root, ...]
    zeros: tuple[Root, ...] = ()
    gain: Decibel = Decibel(0.0)
    reference: Hertz | None = None

    def __post_init__(self) -> None:
        super().__post_init__()
        if any(p.axis or p.right or p.f0 == 0.0 for p in self.poles):
            raise ValueError("a pole lies in the left half-plane (allowed: f0 above 0, neither axis nor right)")
        if sum(z.count for z in self.zeros) > sum(p.count for p in self.poles):
            raise ValueError("more zeros than poles: the response would rise without end; add the hardware's poles")
        on_axis = [z.f0 for z in self.zeros if z.axis or z.f0 == 0.0]
        if (self.reference or 0.0) in on_axis:
            raise ValueError("gain is stated where a zero lies (give reference, a frequency without a zero)")


class Polynomial(Section, frozen=True, kw_only=True):
    """b and a, coefficients of falling powers of s (rad/s), any order up to 20."""

    kind: Literal["polynomial"]
    b: tuple[Coefficient, ...]
    a: tuple[Coefficient, ...]
    f0: Hertz | None = None

    def __post_init__(self) -> None:
        super().__post_init__()
        for name, c in (("b", self.b), ("a", self.a)):
            if not any(c):
                raise ValueError(f"{name} is all zero (allowed: at least one coefficient that is not)")
        if max(len(self.a), len(self.b)) > HIGHEST_ORDER + 1:
            raise ValueError(f"order is above {HIGHEST_ORDER} (split it into sections)")
        if _order(self.b) > _order(self.a):
            raise ValueError(f"b is of higher order than a ({_order(self.b)} and {_order(self.a)}): no stable twin")


def _order(c: tuple[Coefficient, ...]) -> int:
    return len(c) - 1 - next(i for i, v in enumerate(c) if v)


Section.by_kind.update(
    {
        "gain": Gain,
        "lowpass": Lowpass,
        "highpass": Highpass,
        "allpass": Allpass,
        "bandpass": Bandpass,
        "bandpass_constant_skirt": BandpassConstantSkirt,
        "notch": Notch,
        "peaking": Peaking,
        "low_shelf": LowShelf,
        "high_shelf": HighShelf,
        "butterworth": Butterworth,
        "bessel": Bessel,
        "chebyshev": Chebyshev,
        "time_constants": TimeConstants,
        "pole_zero": PoleZero,
        "polynomial": Polynomial,
    }
)


def kinds_by_name() -> dict[str, type[Section]]:
    """Every word after `kind =` with its class."""
    return dict(Section.by_kind)
