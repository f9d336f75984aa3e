"""The response of one network for many sets of component values at once."""

from __future__ import annotations

import numpy as np

from a2d import checks
from a2d.analog.network.faults import faults
from a2d.analog.network.layout import Layout
from a2d.analog.network.parts import lay_out
from a2d.analog.network.pencil import Pencil, reduce
from a2d.arrays import ArrayLike, ComplexArray, FloatArray
from a2d.design.network import Network
from a2d.errors import NetworkError, ParameterError

_BLOCK_BYTES = 1 << 20  # of responses at a time: what stays in a processor's cache
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
    Complex, shape [..., F]. The error is some 1e-13 of the largest response in the range of `f_hz`.

    Raises
    ------
    NetworkError
        A fault of the drawing, or a set whose equations have no unique solution.

    Notes
    -----
    A set costs two eigenvalue problems of the network's order; each frequency then costs the products of
    H(s) = H(σ)·Π(1 + (s - σ)·μz)/Π(1 + (s - σ)·μp), see `pencil`. Work goes in blocks of some megabytes.
    """
    layout = _sound_layout(network)
    sets = checks.finite("values", values)
    f = np.atleast_1d(checks.finite("f_hz", f_hz))
    if sets.shape[-1:] != (len(layout.nominal),):
        names = ", ".join(layout.value_names)
        raise ParameterError(f"a set of values has {sets.shape[-1:]} values (allowed {len(layout.nominal)}: {names})")
    flat = sets.reshape(-1, sets.shape[-1])
    out = np.empty((len(flat), len(f)), dtype=np.complex128)
    step = max(1, _BLOCK_BYTES // (16 * max(len(f), len(layout.unknowns) ** 2)))
    for start in range(0, len(flat), step):
        block = slice(start, start + step)
        out[block] = _block_response(layout.pencil(flat[block]), f)
    return out.reshape(*sets.shape[:-1], len(f))


def _sound_layout(network: Network) -> Layout:
    found = faults(network)
    if found:
        raise NetworkError("; ".join(found))
    return lay_out(network)


def _block_response(pencil: Pencil, f_hz: FloatArray) -> ComplexArray:
    """[B, F] for a pencil of B sets."""
    w = 2.0 * np.pi * f_hz
    audible = w[w > 0.0]
    shift = float(np.exp(np.mean(np.log([audible.min(), audible.max()])))) if len(audible) else 1e3
    try:
        plain, lifted = reduce(pencil, np.asarray(shift)), reduce(pencil, np.asarray(shift), lift=1.0)
    except np.linalg.LinAlgError as error:
        raise NetworkError("a set of component values leaves the network without a unique solution") from error
    weak = np.abs(plain.h) < _WEAK
    lift = np.where(weak, 1.0, 0.0)
    zeros = np.where(weak[:, np.newaxis, np.newaxis], lifted.zeros, plain.zeros)
    t: ComplexArray = (1j * w - shift).astype(np.complex128)
    h = _product(_eigenvalues(zeros), t)
    h /= _product(_eigenvalues(plain.poles), t)
    h *= (plain.h + lift)[:, np.newaxis]
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
