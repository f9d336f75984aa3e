"""A cascade whose coefficients change while it plays: the structures' own equations, sample by sample.

How a change is made is a policy; what it does to the sound depends on the structure, because each remembers other
numbers: direct form I past samples, which mean the same to every set of coefficients, the others sums that were formed
with the old ones.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import TypeAlias

import numpy as np
from scipy import signal

from a2d import checks
from a2d.arrays import FloatArray
from a2d.errors import ParameterError
from a2d.wordlength.structures import values_of

Step: TypeAlias = Callable[[FloatArray, FloatArray, FloatArray], FloatArray]


@dataclass(frozen=True)
class Change:
    """How firmware takes new coefficients.

    Parameters
    ----------
    policy
        A name in `POLICIES`.
    block
        Samples between two looks at the control.
    ramp
        Samples that a ramp or a cross-fade takes, from 1 to `block`.
    """

    policy: str
    block: int
    ramp: int = 1

    def __post_init__(self) -> None:
        if self.policy not in POLICIES:
            raise ParameterError(f"there is no policy {self.policy!r} (allowed: {', '.join(POLICIES)})")
        checks.whole("block", self.block, 1, 2**24)
        checks.whole("ramp", self.ramp, 1, self.block)


def render_moving(sos: FloatArray, samples: FloatArray, structure: str, change: Change) -> FloatArray:
    """Samples through sections whose coefficients change from block to block.

    Parameters
    ----------
    sos
        Shape [B, S, 6]: the sections that belong to the control's setting at the start of each block; the last one
        holds to the end.
    samples
        Shape [N] or [N, channels].
    structure
        A name in `FORMS`.
    change
        Policy, block and ramp.

    Returns
    -------
    Shape of `samples`. In double precision: rounding is not part of this.

    Raises
    ------
    ParameterError
        Fewer samples than blocks need, or an unknown structure.
    """
    if structure not in FORMS:
        raise ParameterError(f"there is no structure {structure!r} (allowed: {', '.join(FORMS)})")
    channels = samples.reshape(len(samples), -1)
    if len(channels) <= (len(sos) - 1) * change.block:
        raise ParameterError(f"{len(sos)} blocks of {change.block} samples need more samples ({len(channels)})")
    for section in range(sos.shape[1]):
        channels = POLICIES[change.policy](sos[:, section], channels, structure, change)
    return channels.reshape(samples.shape)


def _blocks(sos: FloatArray, count: int, block: int) -> Iterator[tuple[slice, FloatArray, FloatArray]]:
    """(samples, coefficients before, coefficients of this block), the last block to the end."""
    for k in range(len(sos)):
        end = count if k == len(sos) - 1 else (k + 1) * block
        yield slice(k * block, end), sos[max(k - 1, 0)], sos[k]


def _hold(sos: FloatArray, samples: FloatArray, structure: str, change: Change) -> FloatArray:
    """New coefficients at once, what the section remembers kept."""
    return _gliding(sos, samples, structure, Change("ramp", change.block, 1), clear=False)


def _clear(sos: FloatArray, samples: FloatArray, structure: str, change: Change) -> FloatArray:
    """New coefficients at once, what the section remembers set to zero."""
    return _gliding(sos, samples, structure, Change("ramp", change.block, 1), clear=True)


def _ramp(sos: FloatArray, samples: FloatArray, structure: str, change: Change) -> FloatArray:
    """Equal steps from sample to sample over the ramp, what the section remembers kept."""
    return _gliding(sos, samples, structure, change, clear=False)


def _gliding(sos: FloatArray, samples: FloatArray, structure: str, change: Change, *, clear: bool) -> FloatArray:
    form = FORMS[structure]
    state = np.zeros((4, samples.shape[1]))
    out = np.empty_like(samples)
    for rows, before, after in _blocks(sos, len(samples), change.block):
        moves = bool(np.any(before != after))
        if clear and moves:
            state[:] = 0.0
        ramp = min(change.ramp - 1, rows.stop - rows.start) if moves else 0
        start, goal = (values_of(c[np.newaxis], structure)[0] for c in (before, after))
        for k in range(ramp):
            n = rows.start + k
            out[n] = form.step(start + (goal - start) * ((k + 1) / change.ramp), state, samples[n])
        steady = slice(rows.start + ramp, rows.stop)
        out[steady] = _steady(after, form, state, samples[steady])
    return out


def _steady(c: FloatArray, form: Form, state: FloatArray, x: FloatArray) -> FloatArray:
    """Constant coefficients `c` [6]: the same equation all at once, by the sums of transposed direct form II."""
    if not len(x):
        return x
    y, sums = signal.lfilter(c[:3], c[3:], x, axis=0, zi=form.to_sums(c, state))
    form.from_sums(state, sums, x, y)
    return np.asarray(y)


def _cross_fade(sos: FloatArray, samples: FloatArray, structure: str, change: Change) -> FloatArray:
    """The old section runs on while a new one, starting from silence, is faded in over the ramp.

    Both have constant coefficients, so the structure does not matter.
    """
    del structure
    out = np.empty_like(samples)
    state = np.zeros((2, samples.shape[1]))
    for rows, before, after in _blocks(sos, len(samples), change.block):
        x = samples[rows]
        if not np.any(before != after):
            out[rows], state = signal.lfilter(after[:3], after[3:], x, axis=0, zi=state)
            continue
        old, _ = signal.lfilter(before[:3], before[3:], x[: change.ramp], axis=0, zi=state)
        new, state = signal.lfilter(after[:3], after[3:], x, axis=0, zi=np.zeros_like(state))
        weight = ((np.arange(len(old)) + 1.0) / change.ramp)[:, np.newaxis]
        new[: len(old)] = old + (new[: len(old)] - old) * weight
        out[rows] = new
    return out


POLICIES: dict[str, Callable[[FloatArray, FloatArray, str, Change], FloatArray]] = {
    "hold": _hold,
    "ramp": _ramp,
    "cross_fade": _cross_fade,
    "clear": _clear,
}
"""What happens at a change, by name."""


def _direct_form_1(c: FloatArray, state: FloatArray, x: FloatArray) -> FloatArray:
    """y = b0·x + b1·x1 + b2·x2 - a1·y1 - a2·y2; state x1, x2, y1, y2."""
    y = c[0] * x + c[1] * state[0] + c[2] * state[1] - c[3] * state[2] - c[4] * state[3]
    state[1], state[3] = state[0], state[2]
    state[0], state[2] = x, y
    return np.asarray(y)


def _transposed_direct_form_2(c: FloatArray, state: FloatArray, x: FloatArray) -> FloatArray:
    """y = b0·x + s1; s1 = b1·x - a1·y + s2; s2 = b2·x - a2·y."""
    y = c[0] * x + state[0]
    state[0] = c[1] * x - c[3] * y + state[1]
    state[1] = c[2] * x - c[4] * y
    return np.asarray(y)


def _delta(c: FloatArray, state: FloatArray, x: FloatArray) -> FloatArray:
    """y = b0·x + v1; v1 += v2 + b1·x - a1·y; v2 += b2·x - a2·y, with the delta structure's own values."""
    y = c[0] * x + state[0]
    state[0] += state[1] + c[1] * x - c[3] * y
    state[1] += c[2] * x - c[4] * y
    return np.asarray(y)


def _sums_of_samples(c: FloatArray, state: FloatArray) -> FloatArray:
    x1, x2, y1, y2 = state
    return np.stack([c[1] * x1 + c[2] * x2 - c[4] * y1 - c[5] * y2, c[2] * x1 - c[5] * y1])


def _keep_samples(state: FloatArray, sums: FloatArray, x: FloatArray, y: FloatArray) -> None:
    for k, signals in ((0, x), (2, y)):
        state[k + 1] = signals[-2] if len(signals) > 1 else state[k]
        state[k] = signals[-1]


def _own_sums(c: FloatArray, state: FloatArray) -> FloatArray:
    return state[:2].copy()


def _keep_sums(state: FloatArray, sums: FloatArray, x: FloatArray, y: FloatArray) -> None:
    state[:2] = sums


def _sums_of_differences(c: FloatArray, state: FloatArray) -> FloatArray:
    """v1 = s1, v2 = s1 + s2: put y = b0·x + s1 into both structures' equations."""
    return np.stack([state[0], state[1] - state[0]])


def _keep_differences(state: FloatArray, sums: FloatArray, x: FloatArray, y: FloatArray) -> None:
    state[0], state[1] = sums[0], sums[0] + sums[1]


@dataclass(frozen=True)
class Form:
    """A structure.

    Attributes
    ----------
    step
        One sample: the section's own values [5], its state [4, channels] (changed), the input [channels].
    to_sums, from_sums
        The state as the two sums of transposed direct form II, for constant coefficients [6]; and back, with the
        input and output since.
    """

    step: Step
    to_sums: Callable[[FloatArray, FloatArray], FloatArray]
    from_sums: Callable[[FloatArray, FloatArray, FloatArray, FloatArray], None]


FORMS: dict[str, Form] = {
    "direct_form_1": Form(_direct_form_1, _sums_of_samples, _keep_samples),
    "transposed_direct_form_2": Form(_transposed_direct_form_2, _own_sums, _keep_sums),
    "delta": Form(_delta, _sums_of_differences, _keep_differences),
}
"""The structures by name."""
