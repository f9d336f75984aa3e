"""All-pass sections, fitted in phase: their magnitude is right whatever their poles are."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from a2d.analog.response import polynomial
from a2d.arrays import FloatArray
from a2d.digital import warped
from a2d.digital.rational.lawson import State, lawson
from a2d.digital.rational.polish import polish
from a2d.digital.rational.setting import Setting, frequencies
from a2d.digital.rational.steps import NYQUIST_MARGIN
from a2d.digital.shapes import Shape, gain_at_zero

STEPS, ROUNDS = 25, 12
FINER = 4
"""Times as many points for the last rounds."""
HIGHEST_START = 0.8
"""Of the band's end: where the bilinear start is exact for sections above it."""


def fit_allpass(shape: Shape, rate: FloatArray, band: FloatArray) -> FloatArray:
    """All-pass sections whose largest phase error over the band is the least there is.

    Parameters
    ----------
    shape
        N all-pass sections, of the first and the second order.
    rate, band
        Shape [N] and [N, 2], Hz.

    Returns
    -------
    Shape [N, 6]: numerators are the denominators reversed, times the sign of H(0).
    """
    sos = np.empty((len(rate), 6))
    for poles in (1, 2):
        rows = np.flatnonzero(shape.second_order == (poles == 2))
        if len(rows):
            part = Setting(Shape(shape.b[rows], shape.a[rows]), rate[rows], band[rows], poles, poles)
            a = warped.to_z(_denominator(part), np.full(len(rows), poles == 1))
            a = a / a[:, :1]
            mirrored = a[:, ::-1] if poles == 2 else a[:, [1, 0, 2]]
            gain = gain_at_zero(shape.b[rows], shape.a[rows])[:, np.newaxis]
            sos[rows] = np.concatenate([gain * mirrored, a], axis=-1)
    return sos


def _denominator(setting: Setting) -> FloatArray:
    """The denominator in v, shape [N, 3]."""
    f_hz, start = frequencies(setting), _bilinear(setting)
    model = _phase_model(setting, f_hz)
    near, _, _ = polish(model, lawson(model, State(start, start), STEPS), setting.poles + 1, ROUNDS)
    part = np.arange(FINER) / FINER
    between = f_hz[:, :-1, np.newaxis] + np.diff(f_hz, axis=1)[..., np.newaxis] * part
    finer = np.concatenate([between.reshape(len(f_hz), -1), f_hz[:, -1:]], axis=1)
    best, _, _ = polish(_phase_model(setting, finer), near, setting.poles + 1, ROUNDS)
    return best.a


def _bilinear(setting: Setting) -> FloatArray:
    """The prewarped bilinear denominator with the coefficient of v made 1, shape [N, 3]."""
    a = setting.shape.a
    two = setting.poles == 2
    own = np.sqrt(a[:, 2] / a[:, 0]) if two else a[:, 2] / a[:, 1]
    w = np.minimum(own, 2.0 * np.pi * HIGHEST_START * setting.band[:, 1])
    k = w / np.tan(0.5 * w / setting.rate)
    scaled = a * np.stack([k * k, k, np.ones_like(k)], axis=-1)
    return np.asarray(scaled / scaled[:, 1:2])


@dataclass(frozen=True, eq=False)
class PhaseModel:
    """The phase error of all-pass sections at tan(w/2) = `omega` [N, G] against the `target` [N, G] of arg A(jw)."""

    omega: FloatArray
    target: FloatArray
    poles: int

    def error(self, state: State) -> FloatArray:
        """2·(arg A - target), shape [N, 1, G], radians."""
        return 2.0 * (np.angle(polynomial(state.a, self.omega)) - self.target)[:, np.newaxis]

    def slopes(self, state: State) -> tuple[FloatArray, object]:
        """d error over the logarithms of the coefficients of 1 and v², shape [N, 1, G, poles]."""
        value = polynomial(state.a, self.omega)
        along = 2.0 * value.imag / (value.real**2 + value.imag**2)
        parts = [-along * state.a[:, 2:3], along * self.omega**2 * state.a[:, :1]][: self.poles]
        return np.stack(parts, axis=-1)[:, np.newaxis], None

    def move(self, state: State, ways: object, step: FloatArray) -> State:
        """Coefficients stay positive: the section stays stable."""
        del ways
        factor = np.exp(np.clip(step, -1.0, 1.0))
        a = state.a.copy()
        a[:, 2] *= factor[:, 0]
        if self.poles == 2:
            a[:, 0] = np.maximum(a[:, 0] * factor[:, 1], NYQUIST_MARGIN * a[:, 1])
        return State(a, a)


def _phase_model(setting: Setting, f_hz: FloatArray) -> PhaseModel:
    target = np.angle(polynomial(setting.shape.a, 2.0 * np.pi * f_hz))
    return PhaseModel(np.tan(setting.half_angle * f_hz), target, setting.poles)
