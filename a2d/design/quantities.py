"""Values with their units: `4k7`, `2R2`, `100n`, `4.7 kΩ`, `3.2 kHz`, `5 %` to floats in SI units.

Number, prefix and unit are read by quantiphy, letter-for-point codes (IEC 60062) by rkm-codes. Both guess at what they
do not know ("1meg" is 0.001 "eg" to the one, "-4k7" is -4 "k7"), so the shape of the text is checked before and the
unit after: what is left over is an error and never a value.
"""

from __future__ import annotations

import math
import re
from typing import ClassVar, TypeVar

from quantiphy import QuantiPhyError
from quantiphy import Quantity as QuantiphyQuantity
from rkm_codes import from_rkm

from a2d.errors import QuantityError

_NUMBER = re.compile(r"[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]{1,3})?")
_LETTER_CODE = re.compile(r"(?P<sign>[+-]?)(?P<code>[0-9]*(?P<letter>[RLKkMGTmuµnp])[0-9]*)")
_PREFIXES = frozenset("TGMkKmuµnp")
_LONGEST = 64
_LOUDEST_DB = 200.0


class Quantity(float):
    """A float in the SI unit of its class. Subclasses say which units and which range are allowed.

    Attributes
    ----------
    unit
        The SI unit as shown in messages.
    spellings
        The units that may follow the number; the empty one stands for the SI unit.
    letters
        Letters that may stand for the decimal point (IEC 60062); none where such codes are not used.
    low, high, above_low
        The allowed range; `above_low` leaves the lower end out.
    """

    unit: ClassVar[str] = ""
    spellings: ClassVar[tuple[str, ...]] = ("",)
    letters: ClassVar[str] = ""
    prefixed: ClassVar[bool] = True
    percent: ClassVar[bool] = False
    low: ClassVar[float] = -1e30
    high: ClassVar[float] = 1e30
    above_low: ClassVar[bool] = False

    @classmethod
    def allowed(cls) -> str:
        """The allowed range in words."""
        unit = f" {cls.unit}" if cls.unit else ""
        if cls.above_low:
            return f"allowed above {cls.low:g} up to {cls.high:g}{unit}"
        return f"allowed {cls.low:g} to {cls.high:g}{unit}"


Q_ = TypeVar("Q_", bound=Quantity)


class Number(Quantity):
    """A number without a unit."""

    prefixed = False


class Factor(Number):
    """A gain as a factor; negative inverts."""

    low, high = -1e6, 1e6


class Mix(Factor):
    """A weight in a sum: a factor, negative ones invert; or its level in dB."""

    spellings = ("", "dB")


class Coefficient(Number):
    """A coefficient of a power of s."""

    low, high = -1e280, 1e280


class Hertz(Quantity):
    """A frequency."""

    unit, spellings, letters = "Hz", ("", "Hz"), "kMG"
    low, high, above_low = 0.0, 1e10, True


class HertzOrZero(Hertz):
    """A frequency that may be zero."""

    above_low = False


class SampleRate(Hertz):
    """A sample rate."""

    low, high, above_low = 1e3, 1e8, False


class Ohm(Quantity):
    """A resistance."""

    unit, spellings, letters = "Ω", ("", "Ω", "ohm", "Ohm", "ohms", "R"), "RLKkMGTm"
    low, high, above_low = 0.0, 1e15, True


class OhmOrZero(Ohm):
    """A resistance that may be zero."""

    above_low = False


class Siemens(Quantity):
    """A transconductance; a negative one inverts."""

    unit, spellings = "S", ("", "S", "A/V")
    low, high = -1e6, 1e6


class Farad(Quantity):
    """A capacitance."""

    unit, spellings, letters = "F", ("", "F"), "munpµ"
    low, high, above_low = 0.0, 1.0, True


class FaradOrZero(Farad):
    """A capacitance that may be zero."""

    above_low = False


class Henry(Quantity):
    """An inductance."""

    unit, spellings, letters = "H", ("", "H"), "munµ"
    low, high, above_low = 0.0, 1e4, True


class Seconds(Quantity):
    """A time or a time constant."""

    unit, spellings, letters = "s", ("", "s"), "munpµ"
    low, high, above_low = 0.0, 1e4, True


class Decibel(Quantity):
    """A level or gain."""

    unit, spellings, prefixed = "dB", ("", "dB"), False
    low, high = -200.0, 200.0


class PositiveDecibel(Decibel):
    """A level difference above zero: a limit, a ripple."""

    low, above_low = 0.0, True


class Degree(Quantity):
    """An angle above zero."""

    unit, spellings, prefixed = "deg", ("", "deg", "°"), False
    low, high, above_low = 0.0, 36_000.0, True


class Octaves(Quantity):
    """A bandwidth in octaves."""

    unit, spellings, prefixed = "octaves", ("", "oct", "octave", "octaves"), False
    low, high, above_low = 0.0, 12.0, True


class QFactor(Quantity):
    """A quality factor."""

    prefixed = False
    low, high, above_low = 0.0, 1e4, True


class Weight(Quantity):
    """A factor of zero or above."""

    prefixed = False
    low, high = 0.0, 100.0


class Fraction(Quantity):
    """A fraction of a whole, 0 to 1, or a percentage."""

    spellings, prefixed, percent = ("", "%"), False, True
    low, high = 0.0, 1.0


def parse(value: object, kind: type[Q_]) -> Q_:
    """`value` as a `kind`, in its SI unit.

    Parameters
    ----------
    value
        A text, or a bare number in the SI unit.
    kind
        The class of the wanted quantity.

    Raises
    ------
    QuantityError
        Anything but a finite value of that unit within the allowed range; the message names the text and the range.

    Examples
    --------
    >>> float(parse("4k7", Ohm)), float(parse("3.2 kHz", Hertz)), float(parse("5 %", Fraction))
    (4700.0, 3200.0, 0.05)
    """
    if isinstance(value, str):
        number = _from_text(value, kind)
    elif isinstance(value, (int, float)) and not isinstance(value, bool):
        number = float(value) if abs(value) < 1e300 else math.inf
    else:
        raise QuantityError(f"is not a quantity ({value!r}, {_example(kind)})")
    if not math.isfinite(number):
        raise QuantityError(f"is not a finite number ({value!r}, {kind.allowed()})")
    if not kind.low <= number <= kind.high or (kind.above_low and number == kind.low):
        raise QuantityError(f"is out of range ({value!r}, {kind.allowed()})")
    return kind(number)


def _from_text(text: str, kind: type[Quantity]) -> float:
    plain = text.strip().replace("\u2126", "Ω").replace("\u03bc", "µ")
    if len(plain) > _LONGEST:
        raise QuantityError(f"is too long for a quantity ({plain[:20]!r}..., {_example(kind)})")
    if "," in plain:
        raise QuantityError(f"has a comma; write a decimal point ({text!r})")
    code = _LETTER_CODE.fullmatch(plain)
    if code and any(c.isdigit() for c in code["code"]) and code["letter"] in kind.letters:
        return _from_letter_code(text, code, kind)
    number = _NUMBER.match(plain)
    if not number:
        raise QuantityError(f"is not a quantity ({text!r}, {_example(kind)})")
    return _with_unit(text, plain, plain[number.end() :].strip(), kind)


def _from_letter_code(text: str, code: re.Match[str], kind: type[Quantity]) -> float:
    value = from_rkm(code["code"])
    if value is None or value.units not in ("", "Ω"):
        raise QuantityError(f"is not a quantity ({text!r}, {_example(kind)})")
    return -float(value) if code["sign"] == "-" else float(value)


def _with_unit(text: str, plain: str, suffix: str, kind: type[Quantity]) -> float:
    """The value of a number followed by `suffix`, which must be a prefix (where allowed) and a known unit."""
    unit = next((u for u in sorted(kind.spellings, key=len, reverse=True) if suffix.endswith(u)), None)
    prefix = suffix if unit is None else suffix[: len(suffix) - len(unit)]
    if unit is None or (prefix and not (kind.prefixed and prefix in _PREFIXES)):
        raise QuantityError(f"has {suffix!r} after the number ({text!r}, {_example(kind)})")
    bare = plain[: len(plain) - len(suffix)].strip()
    try:
        number = QuantiphyQuantity(bare + prefix.replace("K", "k"))
    except (QuantiPhyError, ValueError, OverflowError) as error:
        raise QuantityError(f"is not a quantity ({text!r}, {_example(kind)})") from error
    if number.units:  # what quantiphy did not take as a prefix: "1e5k" is 1e5 "k" to it
        raise QuantityError(f"has an exponent and a prefix; write one of them ({text!r})")
    if unit == "dB" and kind.unit != "dB":  # a factor given as a level
        return 10.0 ** (float(number) / 20.0) if number <= _LOUDEST_DB else math.inf
    return float(number) / 100.0 if unit == "%" else float(number)


def _example(kind: type[Quantity]) -> str:
    """What would have been right, for a message."""
    if not kind.unit:
        other = " or a percentage" if kind.percent else " or a level in dB" if "dB" in kind.spellings else ""
        return f"expected a number{other}"
    prefix = " with or without prefix" if kind.prefixed else ""
    return f"expected a value in {kind.unit}{prefix}"
