"""The analog side: a cascade of first- and second-order sections in s."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from a2d import checks
from a2d.analog.response import chain_response
from a2d.arrays import ArrayLike, ComplexArray, FloatArray
from a2d.errors import ParameterError


@dataclass(frozen=True, eq=False)
class AnalogChain:
    """Analog sections in cascade; the response is the product of theirs.

    Parameters
    ----------
    names
        One name a section, S of them. Sections that one entry of a design file gave rise to are `name.1`, `name.2`.
    b, a
        Shape [S, 3]: coefficients of s², s, 1 of numerator and denominator, s in rad/s. First-order sections have
        b2 = a2 = 0, a plain gain has b = [0, 0, g], a = [0, 0, 1].
    f0_hz
        Shape [S], Hz: where each section is matched unless told otherwise.
    owners
        The entry of the design file that each section belongs to, as an index; 0 to S - 1 without a design file.

    Examples
    --------
    >>> chain = AnalogChain.of(["rc"], b=[[0, 0, 1]], a=[[0, 1e-3, 1]])
    >>> round(float(abs(chain.response(159.155)[0])), 4)
    0.7071
    """

    names: tuple[str, ...]
    b: FloatArray
    a: FloatArray
    f0_hz: FloatArray
    owners: tuple[int, ...]

    @classmethod
    def of(
        cls,
        names: Sequence[str],
        b: ArrayLike,
        a: ArrayLike,
        f0_hz: ArrayLike | None = None,
        owners: Sequence[int] | None = None,
    ) -> AnalogChain:
        """Check and build a chain; a missing `f0_hz` is taken from the poles (`natural_frequency_hz`)."""
        b_array, a_array = checks.finite("b", b), checks.finite("a", a)
        if b_array.shape != a_array.shape or b_array.shape != (len(names), 3):
            raise ParameterError(
                f"b and a must have the shape [{len(names)}, 3], a row a name ({b_array.shape}, {a_array.shape})"
            )
        if np.any(np.all(a_array == 0.0, axis=-1)):
            raise ParameterError("a section's denominator is zero (a = [0, 0, 0], allowed any other)")
        f0 = natural_frequency_hz(b_array, a_array) if f0_hz is None else checks.positive("f0_hz", f0_hz, "Hz")
        f0_rows = np.broadcast_to(f0, (len(names),)).astype(np.float64)
        own = range(len(names)) if owners is None else owners
        return cls(tuple(names), b_array, a_array, f0_rows, tuple(own))

    def response(self, f_hz: ArrayLike) -> ComplexArray:
        """H(j2πf) of the whole chain at `f_hz` [F] (Hz); complex, shape [F]."""
        return chain_response(self.b, self.a, np.atleast_1d(np.asarray(f_hz, dtype=np.float64)))

    def __len__(self) -> int:
        return len(self.names)


def natural_frequency_hz(b: FloatArray, a: FloatArray) -> FloatArray:
    """The characteristic frequency of each section `b`, `a` [..., 3], in Hz, shape [...].

    |p| of the poles: sqrt(a0/a2) for two, a0/a1 for one; where the poles say nothing (a plain gain), that of the
    zeros; where neither does, 1 kHz.
    """

    def modulus(c: FloatArray) -> FloatArray:
        with np.errstate(divide="ignore", invalid="ignore"):
            two = np.sqrt(np.abs(c[..., 2] / c[..., 0]))
            one = np.abs(c[..., 2] / c[..., 1])
        return np.where(c[..., 0] != 0.0, two, np.where(c[..., 1] != 0.0, one, 0.0))

    poles, zeros = modulus(a), modulus(b)
    rad_s = np.where(poles > 0.0, poles, np.where(zeros > 0.0, zeros, 2.0 * np.pi * 1000.0))
    return np.asarray(rad_s / (2.0 * np.pi))
