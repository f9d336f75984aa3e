"""The ready circuits by name: each a function from its parts to a network, so that the solver is the one truth."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, NamedTuple

from a2d.analog.circuits import (
    bands,
    biquads,
    crossovers,
    disc_replay,
    first_order,
    multiple_feedback,
    notches,
    sallen_key,
    tone,
)
from a2d.analog.circuits.textbook import Textbook
from a2d.design.circuits import PARTS_OF, CircuitParts
from a2d.design.network import Network


class Circuit(NamedTuple):
    """A ready circuit.

    Attributes
    ----------
    build
        From the circuit's parts (`parts`) to its network.
    textbook
        From the parts to f0, Q and gain in closed form, where there is one.
    parts
        The class of its parts.
    """

    build: Callable[[Any], Network]
    textbook: Callable[[Any], Textbook] | None
    parts: type[CircuitParts]

    @property
    def equation(self) -> str:
        """H(s) in words and symbols: the builder's docstring up to the first empty line."""
        return _first_paragraph(self.build)

    @property
    def formulas(self) -> str:
        """f0, Q and gain in closed form; empty where there is none."""
        return "" if self.textbook is None else _first_paragraph(self.textbook)


def _first_paragraph(function: Callable[..., Any]) -> str:
    return " ".join((function.__doc__ or "").partition("\n\n")[0].split())


_FUNCTIONS: dict[str, tuple[Callable[[Any], Network], Callable[[Any], Textbook] | None]] = {
    "rc_lowpass": (first_order.rc_lowpass, first_order.rc_textbook),
    "rc_highpass": (first_order.rc_highpass, first_order.rc_textbook),
    "rl_lowpass": (first_order.rl_lowpass, first_order.rl_lowpass_textbook),
    "rl_highpass": (first_order.rl_highpass, first_order.rl_highpass_textbook),
    "inverting_high_shelf": (first_order.inverting_high_shelf, first_order.inverting_high_shelf_textbook),
    "inverting_low_shelf": (first_order.inverting_low_shelf, first_order.inverting_low_shelf_textbook),
    "lead": (first_order.lead, first_order.lead_textbook),
    "lag": (first_order.lag, first_order.lag_textbook),
    "lead_lag": (first_order.lead_lag, first_order.lead_lag_textbook),
    "allpass_first_order": (first_order.allpass_first_order, first_order.allpass_textbook),
    "multiple_feedback_lowpass": (
        multiple_feedback.multiple_feedback_lowpass,
        multiple_feedback.multiple_feedback_lowpass_textbook,
    ),
    "multiple_feedback_highpass": (
        multiple_feedback.multiple_feedback_highpass,
        multiple_feedback.multiple_feedback_highpass_textbook,
    ),
    "multiple_feedback_bandpass": (
        multiple_feedback.multiple_feedback_bandpass,
        multiple_feedback.multiple_feedback_bandpass_textbook,
    ),
    "sallen_key_lowpass": (sallen_key.sallen_key_lowpass, sallen_key.sallen_key_lowpass_textbook),
    "sallen_key_highpass": (sallen_key.sallen_key_highpass, sallen_key.sallen_key_highpass_textbook),
    "sallen_key_bandpass": (sallen_key.sallen_key_bandpass, sallen_key.sallen_key_bandpass_textbook),
    "state_variable_lowpass": (biquads.state_variable_lowpass, biquads.state_variable_lowpass_textbook),
    "state_variable_bandpass": (biquads.state_variable_bandpass, biquads.state_variable_bandpass_textbook),
    "state_variable_highpass": (biquads.state_variable_highpass, biquads.state_variable_highpass_textbook),
    "tow_thomas_bandpass": (biquads.tow_thomas_bandpass, biquads.tow_thomas_bandpass_textbook),
    "tow_thomas_lowpass": (biquads.tow_thomas_lowpass, biquads.tow_thomas_lowpass_textbook),
    "tow_thomas_lowpass_inverted": (
        biquads.tow_thomas_lowpass_inverted,
        biquads.tow_thomas_lowpass_inverted_textbook,
    ),
    "twin_t": (notches.twin_t, notches.twin_t_textbook),
    "twin_t_bootstrapped": (notches.twin_t_bootstrapped, notches.twin_t_bootstrapped_textbook),
    "fliege_notch": (notches.fliege_notch, notches.fliege_notch_textbook),
    "bridged_t": (notches.bridged_t, notches.bridged_t_textbook),
    "wien_band": (notches.wien_band, notches.wien_band_textbook),
    "baxandall": (tone.baxandall, None),
    "passive_tone": (tone.passive_tone, None),
    "series_resonant_bands": (bands.series_resonant_bands, None),
    "simulated_inductor_bands": (bands.simulated_inductor_bands, None),
    "disc_replay_active": (disc_replay.disc_replay_active, None),
    "disc_replay_passive": (disc_replay.disc_replay_passive, disc_replay.disc_replay_passive_textbook),
    "crossover_lowpass": (crossovers.crossover_lowpass, crossovers.crossover_textbook),
    "crossover_highpass": (crossovers.crossover_highpass, crossovers.crossover_textbook),
}

CIRCUITS: dict[str, Circuit] = {
    name: Circuit(build, textbook, PARTS_OF[name]) for name, (build, textbook) in _FUNCTIONS.items()
}
