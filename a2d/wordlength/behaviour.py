"""What a fixed-point cascade does beside filtering: overflow, limit cycles, d.c. bias and noise."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from a2d.arrays import FloatArray
from a2d.wordlength.arithmetic import Arithmetic
from a2d.wordlength.formats import Number
from a2d.wordlength.rounding import Rounded
from a2d.wordlength.simulate_fixed import simulate_fixed
from a2d.wordlength.simulate_float import simulate_float

BURST = 256  # samples at full scale before the silence
SETTLE = 2048
_STILL_FALLING = 0.97  # a limit cycle repeats itself


@dataclass(frozen=True)
class Noise:
    """The error of a fixed-point cascade against the same numbers without rounding of samples.

    Parameters
    ----------
    dbfs
        Its power without the mean, dB re full scale.
    bias
        Its mean in steps of the last bit.
    """

    dbfs: float
    bias: float


@dataclass(frozen=True)
class ZeroInput:
    """What is left after a full-scale burst, in silence.

    Parameters
    ----------
    amplitude
        The largest |sample| in the last quarter of the silence, in steps of the last bit; 0 when the cascade came
        to rest.
    before
        The same in the quarter before.
    overflows
        How often each section, and the output's shift, overflowed during the burst.
    """

    amplitude: int
    before: int
    overflows: tuple[int, ...]

    @property
    def in_words(self) -> str:
        """Whether the cascade rests, is still on its way, or rings on."""
        if self.amplitude == 0:
            return "comes to rest"
        if self.amplitude < _STILL_FALLING * self.before:
            return f"is still decaying, at {self.amplitude} times the last bit"
        return f"rings on at {self.amplitude} times the last bit"


def exactly(rounded: Rounded) -> Rounded:
    """The same numbers for computation in double precision, the output's shift included."""
    return replace(rounded, number=Number("float64"), words=rounded.values, fractions=np.zeros_like(rounded.fractions))


def measured_noise(rounded: Rounded, arithmetic: Arithmetic, samples: FloatArray) -> Noise:
    """Simulate `samples` (whole words, shape [N]) and measure what rounding adds.

    The reference runs in double precision, 2^-53 of a sample, whose own rounding is some 150 dB below that of 28-bit
    samples. The first `SETTLE` samples are left out.
    """
    fixed = np.array(simulate_fixed(rounded, arithmetic, [int(v) for v in samples]).output, dtype=np.float64)
    exact = simulate_float(exactly(rounded), samples) * 2.0**rounded.output_shift
    error = (fixed - exact)[SETTLE:]
    power = float(np.var(error)) * 4.0**-arithmetic.fraction
    return Noise(10.0 * float(np.log10(max(power, 1e-300))), float(np.mean(error)))


def zero_input(rounded: Rounded, arithmetic: Arithmetic, silence: int = 20_000) -> ZeroInput:
    """A full-scale burst of alternating steps, then `silence` samples of zero."""
    top = arithmetic.highest
    burst = [top if n // 16 % 2 == 0 else -top - 1 for n in range(BURST)]
    run = simulate_fixed(rounded, arithmetic, burst + [0] * silence)
    quarter = silence // 4
    last, before = run.output[-quarter:], run.output[-2 * quarter : -quarter]
    return ZeroInput(max(map(abs, last)), max(map(abs, before)), run.overflows)


def quiet_noise(count: int, arithmetic: Arithmetic, seed: int = 1) -> FloatArray:
    """White noise 24 dB below full scale as sample words, shape [N]: loud enough to spread rounding errors evenly."""
    generator = np.random.default_rng(seed)
    return np.asarray(np.rint(generator.standard_normal(count) * 2.0 ** (arithmetic.fraction - 4)))
