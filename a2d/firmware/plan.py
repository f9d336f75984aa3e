"""What will be computed: the same sections at every rate, their order and scaling, and the structure."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from a2d.design.firmware import Firmware, FixedNumber
from a2d.digital.twin import Twin
from a2d.wordlength.arrange import Arrangement, as_it_is, best_arrangement, nearest_zeros, scaled
from a2d.wordlength.choose import refuse_unstable_twin
from a2d.wordlength.formats import Number
from a2d.wordlength.recommend import Candidate, candidates, recommended

_PASS_THROUGH = (1.0, 0.0, 0.0, 1.0, 0.0, 0.0)


@dataclass(frozen=True, eq=False)
class Plan:
    """The decisions before rounding.

    Parameters
    ----------
    number, structure, error_feedback
        What the kernels compute with.
    twins
        In order and scaling, one a sample rate; all with the same names.
    arrangements
        Levels and noise of each; empty for floating point in the design's order.
    designed
        The same sections in the design's order, unscaled.
    candidates, advice
        Every structure's figures at the highest rate, and the one to take.
    """

    number: Number
    structure: str
    error_feedback: int
    twins: tuple[Twin, ...]
    arrangements: tuple[Arrangement, ...]
    designed: tuple[Arrangement, ...]
    candidates: tuple[Candidate, ...]
    advice: Candidate


def make_plan(firmware: Firmware, twins: tuple[Twin, ...], bands_hz: tuple[tuple[float, float], ...]) -> Plan:
    """Decide structure, order and scaling for the twins of a design (unrounded, one a sample rate)."""
    number = number_of(firmware)
    same = same_sections(twins)
    for twin in same:
        refuse_unstable_twin(twin)
    if firmware.pairing == "nearest":
        zeros_of = nearest_zeros(same[0].sos)
        same = tuple(paired(twin, zeros_of) for twin in same)
    hardest = max(range(len(same)), key=lambda i: same[i].sample_rate_hz)
    choices = candidates(same[hardest], number, firmware.sample_word.fraction_bits, bands_hz[hardest])
    advice = recommended(choices)
    structure, error_feedback = firmware.chosen_structure, int(firmware.error_feedback)
    if structure == "recommended":
        structure, error_feedback = advice.structure, advice.error_feedback
    arrangements: tuple[Arrangement, ...] = ()
    designed: tuple[Arrangement, ...] = ()
    if number.kind == "fixed" or firmware.searches_order:
        designed = tuple(as_it_is(t.sos, None, structure, error_feedback) for t in same)
        arrangements = designed
    if firmware.searches_order:
        order = best_arrangement(same[0].sos, structure, error_feedback).order
        arrangements = tuple(scaled(t.sos, order, structure, error_feedback) for t in same)
        same = tuple(rearranged(t, a) for t, a in zip(same, arrangements, strict=True))
    return Plan(number, structure, error_feedback, same, arrangements, designed, choices, advice)


def number_of(firmware: Firmware) -> Number:
    """The number format that a design asks for."""
    if isinstance(firmware.number, FixedNumber):
        return Number("fixed", firmware.number.bits, firmware.number.fraction_bits)
    return Number(firmware.number)


def same_sections(twins: tuple[Twin, ...]) -> tuple[Twin, ...]:
    """Twins that all have the sections of the longest one; what a rate does not need passes the signal through."""
    longest = max(twins, key=len)
    return tuple(_filled_up(twin, longest) for twin in twins)


def _filled_up(twin: Twin, longest: Twin) -> Twin:
    missing = [i for i, name in enumerate(longest.names) if name not in twin.names]
    if not missing:
        return twin
    own = [twin.names.index(name) if name in twin.names else None for name in longest.names]
    sos = np.array([_PASS_THROUGH if i is None else twin.sos[i] for i in own])
    methods = tuple("none" if i is None else twin.methods[i] for i in own)
    match = np.array([longest.match_hz[j] if i is None else twin.match_hz[i] for j, i in enumerate(own)])
    return Twin(longest.names, methods, sos, twin.sample_rate_hz, match)


def paired(twin: Twin, zeros_of: tuple[int, ...]) -> Twin:
    """The twin with the numerator of section `zeros_of[k]` in section k, which its name then says."""
    sos = twin.sos.copy()
    sos[:, :3] = twin.sos[list(zeros_of), :3]
    names = tuple(
        name if other == k else f"poles of {name}, zeros of {twin.names[other]}"
        for k, (name, other) in enumerate(zip(twin.names, zeros_of, strict=True))
    )
    return replace(twin, names=names, sos=sos)


def rearranged(twin: Twin, arrangement: Arrangement) -> Twin:
    """The twin in an arrangement's order and scaling."""
    order = list(arrangement.order)
    return replace(
        twin,
        names=tuple(twin.names[i] for i in order),
        methods=tuple(twin.methods[i] for i in order),
        sos=arrangement.sos,
        match_hz=twin.match_hz[order],
    )
