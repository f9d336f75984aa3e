"""The pencil G + s·C of a network or a bank, and what becomes of it when the reactances are pulled out.

C = U·diag(c)·Vᵀ has one column a reactance, and its sum is never formed: with s = σ + t

    det(G + s·C) = det(G + σ·C) · det(I + t·K),    K = diag(c)·Vᵀ·(G + σ·C)⁻¹·U

(Sylvester's determinant identity), so that all unknowns without dynamics are gone, without a rank decision, and the
generalised eigenvalues of (G, C) are those of a matrix as small as the order. The zeros are those of the pencil
bordered with source and output; its K is K - p·qᵀ/H(σ), with p, q below.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from a2d.arrays import BoolArray, ComplexArray, FloatArray


@dataclass(frozen=True, eq=False)
class Pencil:
    """(G + s·U·diag(c)·Vᵀ)·x = e, H = outᵀ·x.

    Parameters
    ----------
    g
        Shape [..., n, n].
    u, v
        Shape [n, m]: where the reactances act and what they see.
    c
        Shape [..., m]: their values; s in rad/s.
    e, out
        Shape [n].
    entries
        (rows, columns, values) of g before they were summed, for exact arithmetic; one network only.
    """

    g: FloatArray
    u: FloatArray
    v: FloatArray
    c: FloatArray
    e: FloatArray
    out: FloatArray
    entries: tuple[list[int], list[int], list[float]] = ((), (), ())  # type: ignore[assignment]

    def susceptance(self) -> FloatArray:
        """C, shape [..., n, n]."""
        return np.asarray((self.u * self.c[..., np.newaxis, :]) @ self.v.T)


@dataclass(frozen=True, eq=False)
class Reduced:
    """A pencil seen from shifts σ: H(σ), and the matrices whose eigenvalues are -1/(root - σ).

    Parameters
    ----------
    h
        Shape [...]: H(σ).
    poles
        Shape [..., m, m]: K.
    p, q
        Shape [..., m]: what the reactances see of the source, and the output of them.
    """

    h: FloatArray
    poles: FloatArray
    p: FloatArray
    q: FloatArray

    def zeros(self, lift: FloatArray | float = 0.0) -> FloatArray:
        """K of the bordered pencil, [..., m, m], for the zeros of H + lift; not finite where H(σ) + lift = 0."""
        with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
            scaled = self.q / (self.h + lift)[..., np.newaxis]
            return np.asarray(self.poles - self.p[..., :, np.newaxis] * scaled[..., np.newaxis, :])

    def __getitem__(self, chosen: BoolArray) -> Reduced:
        """Some of the shifts."""
        return Reduced(self.h[chosen], self.poles[chosen], self.p[chosen], self.q[chosen])


def reduce(pencil: Pencil, shift: FloatArray) -> Reduced:
    """The pencil seen from real shifts σ [...] in rad/s, which broadcast with its own leading axes."""
    at_shift = pencil.g + np.asarray(shift)[..., np.newaxis, np.newaxis] * pencil.susceptance()
    x = _solve(at_shift, np.concatenate([pencil.u, pencil.e[:, np.newaxis]], axis=1))
    seen = pencil.c[..., :, np.newaxis] * (pencil.v.T @ x)
    q_h = np.asarray(pencil.out @ x)
    return Reduced(q_h[..., -1], seen[..., :-1], seen[..., -1], q_h[..., :-1])


def _solve(a: Any, sides: FloatArray) -> Any:
    """a⁻¹·sides for a [..., n, n], sides [n, k], every equation first scaled to a largest coefficient of 1.

    One step of refinement makes small unknowns beside large ones as accurate as those (R. D. Skeel, Math. Comp. 35
    (1980) 817-832): a response far below its largest value keeps its digits.
    """
    largest = np.abs(a).max(axis=-1, keepdims=True)
    scaled, wanted = a / largest, sides / largest
    x = np.linalg.solve(scaled, wanted)
    return x + np.linalg.solve(scaled, wanted - scaled @ x)


def direct_response(pencil: Pencil, f_hz: FloatArray) -> ComplexArray:
    """H(j2πf) by solving the pencil itself at each frequency [F] (one network)."""
    a = pencil.g + (2j * np.pi * f_hz)[:, np.newaxis, np.newaxis] * pencil.susceptance()
    x = _solve(a, pencil.e[:, np.newaxis])
    return np.asarray(x[..., 0] @ pencil.out)
