"""What can go wrong, as one tree.

A2dError                    everything this package raises on purpose
├── QuantityError           a text is not a value of the wanted unit          (ValueError)
├── ParameterError          a number is outside its allowed range             (ValueError)
├── DesignError             a design file has faults; it carries all of them  (ValueError)
├── NetworkError            a network of parts cannot be solved               (ValueError)
├── ConversionError         an analog section has no such digital twin        (ValueError)
├── RoundingError           a number format cannot carry the coefficients     (ValueError)
├── HeaderError             a C header does not hold what it should           (ValueError)
├── AudioError              audio data or a measurement cannot be used        (ValueError)
└── FileError               a file cannot be read or written                  (OSError)
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass


class A2dError(Exception):
    """Root of every error that a2d raises on purpose."""


class QuantityError(A2dError, ValueError):
    """A text is not a value of the wanted unit."""


class ParameterError(A2dError, ValueError):
    """A number is outside its allowed range."""


class NetworkError(A2dError, ValueError):
    """A network of parts cannot be solved as drawn."""


class ConversionError(A2dError, ValueError):
    """An analog section has no digital twin by the method asked for."""


class RoundingError(A2dError, ValueError):
    """A number format or structure cannot carry the coefficients."""


class HeaderError(A2dError, ValueError):
    """A C header does not hold what it should."""


class AudioError(A2dError, ValueError):
    """Audio data or a measurement cannot be used."""


class FileError(A2dError, OSError):
    """A file cannot be read or written."""


@dataclass(frozen=True)
class Fault:
    """One thing that is wrong in an input, and where.

    Parameters
    ----------
    what
        What is wrong, with the value and what is allowed.
    place
        Where: `harbour.toml: section "presence".q`.
    """

    what: str
    place: str

    def __str__(self) -> str:
        return f"{self.what} @ {self.place}"


class DesignError(A2dError, ValueError):
    """A design file has faults; `faults` holds all of them, in the file's order."""

    def __init__(self, faults: Sequence[Fault]):
        self.faults = tuple(faults)
        super().__init__("\n".join(str(fault) for fault in self.faults))
