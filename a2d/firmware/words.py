"""What the terminal says of rounding, order, levels, noise and structure."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from a2d.digital.twin import Twin
from a2d.firmware.plan import Plan
from a2d.wordlength.arithmetic import Arithmetic
from a2d.wordlength.behaviour import measured_noise, quiet_noise, zero_input
from a2d.wordlength.choose import ACCEPTED_DB, Proof
from a2d.wordlength.noise import boundary_peaks, boundary_sums, noise_dbfs, noise_gains
from a2d.wordlength.structures import TITLES

_DECAY = 25.0  # time constants: a full-scale word of 28 bits falls below its last bit in 20
_SILENCE = (4_000, 60_000)  # samples, at least and at most
_MEASURED = 8_000  # samples of noise: a power good to 0.1 dB where it is white
FLAGGED_DB = 0.1  # rounding that moves the response by more is said to be too much


def lines(plan: Plan, proofs: tuple[Proof, ...], arithmetic: Arithmetic | None) -> tuple[str, ...]:
    """The terminal's lines on firmware."""
    found = [rounding_line(twin, proof) for twin, proof in zip(plan.twins, proofs, strict=True)]
    if plan.arrangements:
        found.append(_order_line(plan))
    if arithmetic is not None:
        found.extend(_level_line(t, p, plan, arithmetic.fraction) for t, p in zip(plan.twins, proofs, strict=True))
        found.append(_behaviour_line(plan.twins[0], proofs[0], arithmetic))
    found.extend(_advice_lines(plan))
    return tuple(found)


def rounding_line(twin: Twin, proof: Proof) -> str:
    """What rounding did at one rate."""
    rounded = proof.rounded
    loss = f", shift {rounded.shift} (fraction bits lost: {rounded.shift})" if rounded.shift else ""
    gain = f", output shift {rounded.output_shift}" if rounded.output_shift else ""
    alone = "" if proof.nearest_db == proof.error_db else f" ({proof.nearest_db:.2g} dB if each were rounded alone)"
    return (
        f"{twin.sample_rate_hz:g} Hz: {rounded.number}, {TITLES[rounded.structure]}{loss}{gain}: rounding moves the "
        f"level by at most {proof.error_db:.2g} dB{alone}; margin to the unit circle {proof.margin:.3g} "
        f"({proof.exact_margin:.3g} before rounding)"
    )


def _order_line(plan: Plan) -> str:
    chosen, designed = plan.arrangements[0], plan.designed[0]
    names = ", ".join(plan.twins[0].names)
    if chosen is designed:
        return f"order as designed: {names}; signal-to-noise ratio {designed.signal_to_noise_db:.1f} dB re one rounding"
    return (
        f"order searched: {names}; signal-to-noise ratio {chosen.signal_to_noise_db:.1f} dB re one rounding, "
        f"{designed.signal_to_noise_db:.1f} dB in the design's order without scaling"
    )


def _level_line(twin: Twin, proof: Proof, plan: Plan, sample_fraction: int) -> str:
    """Levels and noise of the rounded numbers at one rate."""
    sections, shift = proof.rounded.sections, proof.rounded.output_shift
    noise = noise_dbfs(noise_gains(sections, plan.structure, plan.error_feedback), sample_fraction, shift)
    sine, total = (20.0 * np.log10(levels) for levels in (boundary_peaks(sections), boundary_sums(sections)))
    shown = ", ".join(f"{s:+.1f}/{t:+.1f}" for s, t in zip(sine, total, strict=True))
    return (
        f"{twin.sample_rate_hz:g} Hz: peak after each section in dB, sine/any signal: {shown}; "
        f"headroom for any signal at full scale {max(0.0, float(np.max(total))):.1f} dB; "
        f"round-off noise {noise:.0f} dBFS"
    )


def _behaviour_line(twin: Twin, proof: Proof, arithmetic: Arithmetic) -> str:
    """What a simulation found at the first rate: rest after a burst, bias and noise."""
    silence = int(np.clip(_DECAY / proof.margin, *_SILENCE))
    rest = zero_input(proof.rounded, arithmetic, silence)
    noise = measured_noise(proof.rounded, arithmetic, quiet_noise(_MEASURED, arithmetic))
    return (
        f"{twin.sample_rate_hz:g} Hz, simulated: after a full-scale burst and {silence} samples of silence it "
        f"{rest.in_words} ({sum(rest.overflows)} samples limited in the burst); noise {noise.dbfs:.0f} dBFS, "
        f"bias {noise.bias:.2f} of the last bit"
    )


def _advice_lines(plan: Plan) -> Iterator[str]:
    asked = [c for c in plan.candidates if (c.structure, c.error_feedback) == (plan.structure, plan.error_feedback)]
    if asked and asked[0] != plan.advice:
        yield f"recommended: {plan.advice.figures}; now {asked[0].figures}"
    else:
        yield f"structure as recommended: {plan.advice.figures}"


def warning(twin: Twin, proof: Proof, plan: Plan) -> str | None:
    """What should be changed where rounding moves the response too far; None where it does not."""
    if proof.error_db <= FLAGGED_DB:
        return None
    rounded = proof.rounded
    helps = plan.advice.error_db <= ACCEPTED_DB
    advice = f'; structure = "{plan.advice.structure}" leaves {plan.advice.error_db:.2g} dB' if helps else ""
    return (
        f"rounding to {rounded.number} in {TITLES[rounded.structure]} moves the response by {proof.error_db:.2g} dB at "
        f"{twin.sample_rate_hz:g} Hz (flagged above {FLAGGED_DB:g} dB){advice}"
    )
