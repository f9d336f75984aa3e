"""NAME_vectors.h and NAME_check.c: an input, the output to expect, and a program that compares."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from a2d.arrays import FloatArray
from a2d.firmware.header import word_type
from a2d.firmware.kernel import piece
from a2d.firmware.literals import float32_text, float64_text, integer_text
from a2d.firmware.model import Header
from a2d.wordlength.arithmetic import Arithmetic
from a2d.wordlength.formats import Number
from a2d.wordlength.noise import noise_gains
from a2d.wordlength.rounding import Rounded
from a2d.wordlength.simulate_fixed import simulate_fixed
from a2d.wordlength.simulate_float import simulate_float

LENGTH = 448
_NOISE = slice(32, 224)
_STEP = slice(224, 416)
_LEVEL = 0.5  # of full scale, for impulse, noise and step
_FULL_SCALE_TOLERANCE = {"float32": 1e-6, "float64": 1e-13}
# Another order of additions, or a contracted a·b + c, rounds elsewhere, and a constant signal lets its errors add up.
_ROUNDING_FACTOR = 16.0
_PER_LINE = 8


@dataclass(frozen=True, eq=False)
class Vectors:
    """Test vectors as numbers.

    Parameters
    ----------
    samples
        Shape [N]: the input; whole numbers for fixed point.
    outputs
        Shape [R, N]: a row a sample rate.
    tolerances
        Shape [R]: how far an output may be off; 0 for fixed point.
    """

    samples: FloatArray
    outputs: FloatArray
    tolerances: FloatArray


def make_vectors(tables: tuple[Rounded, ...], arithmetic: Arithmetic | None) -> Vectors:
    """Run the input through each rate's cascade, exactly as the kernels compute it.

    Parameters
    ----------
    tables
        A rounded cascade a sample rate.
    arithmetic
        The signal path; needed for fixed point.
    """
    if arithmetic is not None:
        words = np.rint(np.ldexp(stimulus(), arithmetic.fraction)).clip(-arithmetic.highest - 1, arithmetic.highest)
        samples = [int(w) for w in words]
        runs = [simulate_fixed(rounded, arithmetic, samples).output for rounded in tables]
        return Vectors(words, np.array(runs, dtype=np.float64), np.zeros(len(tables)))
    kind = tables[0].number.kind
    outputs = np.stack([simulate_float(rounded, stimulus()) for rounded in tables]).astype(np.float64)
    return Vectors(
        stimulus(), outputs, np.array([_tolerance(r, o, kind) for r, o in zip(tables, outputs, strict=True)])
    )


def stimulus() -> FloatArray:
    """Impulse, pause, noise, step, silence; full scale is 1. Every value is a multiple of 2^-16.

    The step shows a section whose f0 is so low that impulse and noise hardly move it.
    The noise is the upper half of the linear congruential generator x -> 1664525·x + 1013904223 mod 2^32 (Knuth, The
    Art of Computer Programming, vol. 2, section 3.3.4).
    """
    samples, state = np.zeros(LENGTH), 1
    samples[0] = _LEVEL
    for n in range(_NOISE.start, _NOISE.stop):
        state = (1664525 * state + 1013904223) & 0xFFFFFFFF
        samples[n] = _LEVEL * ((state >> 16) - 32768) / 32768.0
    samples[_STEP] = _LEVEL
    return samples


def _tolerance(rounded: Rounded, output: FloatArray, kind: str) -> float:
    """The format's tolerance at full scale, or more where rounding itself is larger: a low f0 in a direct form."""
    scale = max(1.0, float(np.max(np.abs(output))))
    tolerance = max(_FULL_SCALE_TOLERANCE[kind] * scale, _ROUNDING_FACTOR * _ROUNDING[kind](rounded, output))
    return float(np.float32(tolerance)) if kind == "float32" else tolerance


def _float32_rounding(rounded: Rounded, output: FloatArray) -> float:
    """What rounding makes in float32: the distance from the same numbers computed in double precision."""
    finest = replace(rounded, number=Number("float64"))
    return float(np.max(np.abs(simulate_float(finest, stimulus()) - output)))


def _float64_rounding(rounded: Rounded, output: FloatArray) -> float:
    """The same in float64 by the noise formula: the root of the power that ten roundings a sample make."""
    step = 2.0**-52 * float(np.max(np.abs(output)))
    return step * float(np.sqrt(10.0 * np.sum(noise_gains(rounded.sections)) / 12.0))


_ROUNDING = {"float32": _float32_rounding, "float64": _float64_rounding}


def write_vectors(header: Header, vectors: Vectors) -> str:
    """The text of NAME_vectors.h."""
    literal = {"float32": float32_text, "float64": float64_text, "fixed": integer_text}[header.number.kind]
    fixed = header.number.kind == "fixed"
    rows = ["    {\n" + _lines([literal(v) for v in row], 8) + "\n    }" for row in vectors.outputs.tolist()]
    words = _words(header) | {
        "design": f"0x{header.sha256[:8]}u",
        "length": str(len(vectors.samples)),
        "input": _lines([literal(v) for v in vectors.samples.tolist()], 4),
        "outputs": ",\n".join(rows),
        "tolerances": ", ".join(literal(v) for v in vectors.tolerances.tolist()),
        "tolerance_reason": "Fixed point leaves no choice." if fixed else "Compilers may round in another order.",
    }
    return _filled(piece("vectors"), words)


def write_check(header: Header) -> str:
    """The text of NAME_check.c."""
    return _filled(piece("check.c"), _words(header))


def _words(header: Header) -> dict[str, str]:
    sample = "int32_t" if header.number.kind == "fixed" else word_type(header)
    return {"name": header.name, "NAME": header.name.upper(), "sample": sample}


def _filled(text: str, words: dict[str, str]) -> str:
    for word, value in words.items():
        text = text.replace(f"@{word}@", value)
    return text


def _lines(literals: list[str], indent: int) -> str:
    rows = [literals[i : i + _PER_LINE] for i in range(0, len(literals), _PER_LINE)]
    return ",\n".join(" " * indent + ", ".join(row) for row in rows)
