"""How loud a change of coefficients is heard as a click, for every policy and structure, and what to do about it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy import signal

from a2d import checks
from a2d.arrays import FloatArray
from a2d.listening.moving import FORMS, POLICIES, Change, render_moving

ABOVE_HZ = 2000.0  # the tone and what the sections do to it lie below, a click reaches beyond
PHASES = 8  # moments of the tone's period at which the change is tried
QUIET_DBFS = -100.0  # below the noise of 16 bits (AES17: -98 dBFS) whatever the ear makes of it
TRIED_MS = (1.0, 2.0, 5.0, 10.0, 20.0, 50.0)
_STOP_DB = 160.0
_BEFORE_SECONDS, _AFTER_SECONDS = 0.3, 0.1
_SPLIT_FRACTION = 0.3  # of ABOVE_HZ: the width of the high-pass filter's transition


@dataclass(frozen=True)
class ClickTest:
    """A change of coefficients under a steady tone.

    Parameters
    ----------
    sample_rate_hz
        Hz.
    tone_hz
        Hz, well below `ABOVE_HZ`.
    level_dbfs
        Peak of the tone, dBFS.
    ramp_seconds
        Of ramp and cross-fade.
    """

    sample_rate_hz: float
    tone_hz: float = 100.0
    level_dbfs: float = -12.0
    ramp_seconds: float = 0.01

    def __post_init__(self) -> None:
        checks.positive("sample rate", self.sample_rate_hz, "Hz")
        checks.between("tone", self.tone_hz, 20.0, 0.5 * ABOVE_HZ, "Hz")
        checks.between("level", self.level_dbfs, -140.0, 0.0, "dBFS")
        checks.between("ramp", self.ramp_seconds, 1.0 / self.sample_rate_hz, 1.0, "s")

    @property
    def ramp(self) -> int:
        """The ramp in samples."""
        return max(1, round(self.ramp_seconds * self.sample_rate_hz))


@dataclass(frozen=True)
class Click:
    """The loudest click of a policy in a structure: peak level above 2 kHz in dBFS."""

    policy: str
    structure: str
    dbfs: float


def click_levels(before: FloatArray, after: FloatArray, test: ClickTest) -> list[Click]:
    """Every policy in every structure, from sections `before` to `after` [S, 6], loudest moment of the period."""
    return [
        Click(policy, structure, float(np.max(click_dbfs(before, after, test, policy, structure))))
        for policy in POLICIES
        for structure in FORMS
    ]


def click_dbfs(before: FloatArray, after: FloatArray, test: ClickTest, policy: str, structure: str) -> FloatArray:
    """Peak level above 2 kHz, dBFS, for changes at `PHASES` moments of the tone's period from its zero on; [PHASES].

    The tone has been playing long enough for the sections to have settled; what is above 2 kHz is taken by a
    linear-phase high-pass filter of 160 dB, and its peak is what counts.
    """
    rate = test.sample_rate_hz
    taps = high_pass_taps(rate)
    settle = round(_BEFORE_SECONDS * rate)
    block = max(settle, test.ramp)
    n = np.arange(block + max(round(_AFTER_SECONDS * rate), test.ramp) + taps.size)
    starts = 2.0 * np.pi * np.arange(PHASES) / PHASES
    tone = np.sin(2.0 * np.pi * test.tone_hz * (n - block)[:, np.newaxis] / rate + starts)
    fade = np.minimum(n / (0.2 * settle), 1.0)[:, np.newaxis]
    samples = 10.0 ** (test.level_dbfs / 20.0) * tone * (0.5 - 0.5 * np.cos(np.pi * fade))
    out = render_moving(np.stack([before, after]), samples, structure, Change(policy, block, test.ramp))
    heard = signal.oaconvolve(out, taps[:, np.newaxis], mode="valid", axes=0)
    return np.asarray(20.0 * np.log10(np.maximum(np.abs(heard[block - taps.size :]).max(axis=0), 1e-15)))


def high_pass_taps(sample_rate_hz: float) -> FloatArray:
    """A linear-phase high-pass filter at `ABOVE_HZ`, Kaiser window (Oppenheim and Schafer, section 7.6.1)."""
    width = _SPLIT_FRACTION * ABOVE_HZ / (0.5 * sample_rate_hz)
    count, beta = signal.kaiserord(_STOP_DB, width)
    return np.asarray(signal.firwin(count | 1, ABOVE_HZ, window=("kaiser", beta), pass_zero=False, fs=sample_rate_hz))


def ramp_needed_ms(before: FloatArray, after: FloatArray, test: ClickTest, structure: str) -> float | None:
    """The shortest of `TRIED_MS` whose ramp stays below `QUIET_DBFS`; None when none does."""
    for ms in TRIED_MS:
        longer = ClickTest(test.sample_rate_hz, test.tone_hz, test.level_dbfs, ms / 1000.0)
        if np.max(click_dbfs(before, after, longer, "ramp", structure)) < QUIET_DBFS:
            return ms
    return None


def advice(before: FloatArray, after: FloatArray, test: ClickTest, clicks: list[Click], structure: str) -> str:
    """What to do with the structure that the design has, in a sentence or two."""
    own = {click.policy: click.dbfs for click in clicks if click.structure == structure}
    best = min(own, key=lambda policy: own[policy])
    if own["hold"] < QUIET_DBFS:
        return f"take new coefficients at once: the click stays at {own['hold']:.0f} dBFS"
    needed = ramp_needed_ms(before, after, test, structure)
    never = f"never clear the state ({own['clear']:.0f} dBFS)"
    first = "ramp over 50 ms or more, or compute the moving sections in direct form I, whose memory keeps its meaning"
    if needed is not None:
        first = f"ramp the coefficients over {needed:g} ms"
    return f"{first} ({best.replace('_', '-')} over {1000 * test.ramp_seconds:g} ms: {own[best]:.0f} dBFS); {never}"
