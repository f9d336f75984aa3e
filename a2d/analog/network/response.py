"""The response of one network for many sets of component values at once."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from a2d import checks
from a2d.analog.network.faults import faults
from a2d.analog.network.layout import Layout
from a2d.analog.network.parts import lay_out
from a2d.analog.network.pencil import Pencil, direct_response, reduce
from a2d.arrays import ArrayLike, ComplexArray, FloatArray
from a2d.design.network import Network
from a2d.errors import NetworkError, ParameterError

_BLOCK_BYTES = 1 << 20  # of responses at a time: what stays in a processor's cache
_DECADES = 1.5  # of frequency that one shift serves
_AGREEMENT = 1e-10  # when the fast way is further off, its roots span too many decades: all sets are solved directly
_WEAK = 1e-3  # a response below this at the shift is lifted by 1, lest a division by it lose digits


def value_names(network: Network) -> tuple[str, ...]:
    """What a set of component values consists of: `R1`, `P1`, `P1.position`, `L1.resistance`, `source`, ..."""
    return tuple(lay_out(network).value_names)


def nominal_values(network: Network) -> FloatArray:
    """The network's own values in the order of `value_names`, SI units; shape [V]."""
    return np.array(lay_out(network).nominal)


def network_response(network: Network, values: ArrayLike, f_hz: ArrayLike) -> ComplexArray:
    """H(j2πf) of a network for many sets of component values.

    Parameters
    ----------
    network
        Which parts there are and how they are connected; its own values are not used.
    values
        Shape [..., V]: sets of values in the order of `value_names`, SI units.
    f_hz
        Shape [F], Hz.

    Returns
    -------
    Complex, shape [..., F]. The error is below 1e-10 of the largest response in the range of `f_hz`, and usually 1e-14.

    Raises
    ------
    NetworkError
        A fault of the drawing, or a set whose equations have no unique solution.

    Notes
    -----
    A set costs two eigenvalue problems of the network's order for each 1.5 decades; each frequency then costs the
    products of H(s) = H(σ)·Π(1 + (s - σ)·μz)/Π(1 + (s - σ)·μp), see `pencil`. Work goes in blocks of some megabytes.
    """
    layout = _sound_layout(network)
    sets = checks.finite("values", values)
    f = np.atleast_1d(checks.finite("f_hz", f_hz))
    count = sets.shape[-1] if sets.ndim else 0
    if count != len(layout.nominal):
        names = ", ".join(layout.value_names)
        raise ParameterError(f"a set has {count} values (allowed {len(layout.nominal)}: {names})")
    try:
        out = _in_blocks(layout, sets.reshape(-1, count), f)
    except np.linalg.LinAlgError as error:
        raise NetworkError("a set of component values leaves the network without a unique solution") from error
    return out.reshape(*sets.shape[:-1], len(f))


def _in_blocks(layout: Layout, flat: FloatArray, f_hz: FloatArray) -> ComplexArray:
    """[N, F] for sets [N, V]."""
    out = np.empty((len(flat), len(f_hz)), dtype=np.complex128)
    respond = _block_response if _precise(layout, flat, f_hz) else _direct_block
    step = max(1, _BLOCK_BYTES // (16 * max(len(f_hz), len(layout.unknowns) ** 2)))
    for start in range(0, len(flat), step):
        block = slice(start, start + step)
        out[block] = respond(layout.pencil(flat[block]), f_hz)
    return out


def _sound_layout(network: Network) -> Layout:
    found = faults(network)
    if found:
        raise NetworkError("; ".join(found))
    return lay_out(network)


def _precise(layout: Layout, flat: FloatArray, f_hz: FloatArray) -> bool:
    """Whether the fast way agrees with direct solutions for the first and last set, to `_AGREEMENT` of the largest."""
    if not len(flat) or not len(f_hz):
        return True
    some = f_hz[:: max(1, len(f_hz) // 8)]
    pencil = layout.pencil(flat[[0, -1]])
    fast, direct = _block_response(pencil, some), _direct_block(pencil, some)
    scale = np.abs(direct).max(axis=-1, keepdims=True)
    return bool(np.all(np.abs(fast - direct) <= _AGREEMENT * scale))


def _direct_block(pencil: Pencil, f_hz: FloatArray) -> ComplexArray:
    """[B, F] by solving at each set and frequency."""
    rows = [replace(pencil, g=g, c=c) for g, c in zip(pencil.g, pencil.c, strict=True)]
    return np.array([direct_response(row, f_hz) for row in rows])


def _block_response(pencil: Pencil, f_hz: FloatArray) -> ComplexArray:
    """[B, F] for a pencil of B sets, some decades of frequency at a time, each from a shift in its middle."""
    w = 2.0 * np.pi * np.abs(f_hz)
    audible = w[w > 0.0]
    low, high = (audible.min(), audible.max()) if len(audible) else (1e3, 1e3)
    pieces = max(1, round(np.log10(high / low) / _DECADES))
    edges = np.geomspace(low, high, pieces + 1)
    which = np.clip(np.searchsorted(edges, w, side="right") - 1, 0, pieces - 1)
    out = np.empty((*pencil.g.shape[:1], len(w)), dtype=np.complex128)
    for piece in np.unique(which):
        here = which == piece
        shift = float(np.sqrt(edges[piece] * edges[piece + 1]))
        out[:, here] = _from_shift(pencil, shift, 2j * np.pi * f_hz[here])
    return out


def _from_shift(pencil: Pencil, shift: float, s: ComplexArray) -> ComplexArray:
    seen = reduce(pencil, np.asarray(shift))
    lift = np.where(np.abs(seen.h) < _WEAK, 1.0, 0.0)
    h = _product(_eigenvalues(seen.zeros(lift)), s - shift)
    h /= _product(_eigenvalues(seen.poles), s - shift)
    h *= (seen.h + lift)[:, np.newaxis]
    h -= lift[:, np.newaxis]
    return h


def _eigenvalues(matrices: FloatArray) -> ComplexArray:
    return np.linalg.eigvals(matrices).astype(np.complex128)


def _product(eigenvalues: ComplexArray, t: ComplexArray) -> ComplexArray:
    """Π(1 + t·μ) over the last axis of `eigenvalues` [B, m], at t [F]: [B, F]."""
    product = np.ones((len(eigenvalues), len(t)), dtype=np.complex128)
    factor = np.empty_like(product)
    for mu in np.moveaxis(eigenvalues, -1, 0):
        np.multiply(mu[:, np.newaxis], t, out=factor)
        factor += 1.0
        product *= factor
    return product
