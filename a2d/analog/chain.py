"""The analog side: a cascade of first- and second-order sections in s."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from a2d import checks
from a2d.analog.polynomials import polynomial_sections
from a2d.analog.response import chain_response
from a2d.analog.roots import sections_of_roots
from a2d.analog.sections import Sections, natural_frequency_hz
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

    @classmethod
    def from_zpk(cls, zeros: ArrayLike, poles: ArrayLike, gain: float, name: str = "section") -> AnalogChain:
        """The chain of gain·Π(s - z)/Π(s - p), roots in rad/s, as scipy's analog designs give them (output "zpk").

        Examples
        --------
        >>> chain = AnalogChain.from_zpk([], [-1000 + 1000j, -1000 - 1000j], 2e6)
        >>> round(float(abs(chain.response(0.001)[0])), 6)
        1.0
        """
        z, p = (np.atleast_1d(np.asarray(roots, dtype=np.complex128)) for roots in (zeros, poles))
        return cls._named(name, sections_of_roots(z, p, float(checks.finite("gain", gain))))

    @classmethod
    def from_ba(cls, b: ArrayLike, a: ArrayLike, name: str = "section") -> AnalogChain:
        """The chain of Σ b·s^k/Σ a·s^k, falling powers of s in rad/s (scipy's output "ba"), factored and checked.

        Examples
        --------
        >>> len(AnalogChain.from_ba([1.0], [1e-9, 3e-6, 3e-3, 1.0]))
        2
        """
        return cls._named(name, polynomial_sections(b, a))

    @classmethod
    def from_sos(cls, sos: ArrayLike, names: Sequence[str] | None = None) -> AnalogChain:
        """The chain of analog second-order sections [S, 6]: b2, b1, b0, a2, a1, a0 of s (scipy's output "sos")."""
        rows = np.atleast_2d(checks.finite("sos", sos))
        if rows.shape[-1] != 6:
            raise ParameterError(f"sos must have the shape [S, 6] ({list(rows.shape)})")
        own = [f"section.{i + 1}" for i in range(len(rows))] if names is None else names
        return cls.of(own, rows[:, :3], rows[:, 3:])

    @classmethod
    def _named(cls, name: str, sections: Sections) -> AnalogChain:
        return cls.of(numbered(name, len(sections.f0_hz)), sections.b, sections.a, sections.f0_hz)

    def response(self, f_hz: ArrayLike) -> ComplexArray:
        """H(j2πf) of the whole chain at `f_hz` [F] (Hz); complex, shape [F]."""
        return chain_response(self.b, self.a, np.atleast_1d(np.asarray(f_hz, dtype=np.float64)))

    def __len__(self) -> int:
        return len(self.names)


def numbered(name: str, count: int) -> list[str]:
    """Names of the sections that one entry gave rise to: `name`, or `name.1`, `name.2`."""
    return [name] if count == 1 else [f"{name}.{i + 1}" for i in range(count)]
