"""The ready circuits: which parts each takes. The networks are in `a2d.analog.circuits`, under the same names.

The drawings are in docs/circuits.md; a part's number is the drawing's.
"""

from __future__ import annotations

from a2d.design.quantities import Farad, Fraction, Henry, Ohm, OhmOrZero
from a2d.design.structs import DesignStruct

MOST_BANDS = 40


class CircuitParts(DesignStruct, frozen=True, kw_only=True):
    """The component values of a ready circuit."""


class OneRC(CircuitParts, frozen=True, kw_only=True):
    """One resistor, one capacitor."""

    R1: Ohm
    C1: Farad


class OneRL(CircuitParts, frozen=True, kw_only=True):
    """One resistor, one inductor with its winding resistance."""

    R1: Ohm
    L1: Henry
    L1_resistance: OhmOrZero = OhmOrZero(0.0)


class ShelvingParts(CircuitParts, frozen=True, kw_only=True):
    """An inverting stage with one resistor bridged by a resistor and a capacitor in series."""

    R1: Ohm
    R2: Ohm
    R3: Ohm
    C1: Farad


class TwoRC(CircuitParts, frozen=True, kw_only=True):
    """Two resistors, one capacitor."""

    R1: Ohm
    R2: Ohm
    C1: Farad


class TwoRTwoC(CircuitParts, frozen=True, kw_only=True):
    """Two resistors, two capacitors."""

    R1: Ohm
    R2: Ohm
    C1: Farad
    C2: Farad


class AllpassParts(CircuitParts, frozen=True, kw_only=True):
    """A first-order all-pass: R1 and R2 set the gain of -1, R3 and C1 the frequency."""

    R1: Ohm
    R2: Ohm
    R3: Ohm
    C1: Farad


class ThreeRTwoC(CircuitParts, frozen=True, kw_only=True):
    """Three resistors, two capacitors."""

    R1: Ohm
    R2: Ohm
    R3: Ohm
    C1: Farad
    C2: Farad


class TwoRThreeC(CircuitParts, frozen=True, kw_only=True):
    """Two resistors, three capacitors."""

    R1: Ohm
    R2: Ohm
    C1: Farad
    C2: Farad
    C3: Farad


class _Amplified(CircuitParts, frozen=True, kw_only=True):
    """RA to ground and RB to the output set the amplifier's gain, 1 + RB/RA; without RA it is 1."""

    RA: Ohm | None = None
    RB: OhmOrZero = OhmOrZero(0.0)

    def __post_init__(self) -> None:
        if self.RA is None and self.RB > 0.0:
            raise ValueError(f"RB ({self.RB:g} Ω) has no effect without RA (leave RB out or give RA)")

    @property
    def gain(self) -> float:
        """The amplifier's gain."""
        return 1.0 if self.RA is None else 1.0 + self.RB / self.RA


class SallenKeyParts(_Amplified, frozen=True, kw_only=True):
    """Sallen-Key low- and high-pass."""

    R1: Ohm
    R2: Ohm
    C1: Farad
    C2: Farad


class SallenKeyBandpassParts(_Amplified, frozen=True, kw_only=True):
    """Sallen-Key band-pass."""

    R1: Ohm
    R2: Ohm
    R3: Ohm
    C1: Farad
    C2: Farad


class StateVariableParts(CircuitParts, frozen=True, kw_only=True):
    """State-variable filter: summing amplifier R1 to R3, damping R4 and R5, integrators R6 C1 and R7 C2."""

    R1: Ohm
    R2: Ohm
    R3: Ohm
    R4: Ohm
    R5: Ohm
    R6: Ohm
    R7: Ohm
    C1: Farad
    C2: Farad


class TowThomasParts(CircuitParts, frozen=True, kw_only=True):
    """Tow-Thomas filter: input R1, damping R2, loop R3, integrator R4, inverter R5 and R6."""

    R1: Ohm
    R2: Ohm
    R3: Ohm
    R4: Ohm
    R5: Ohm
    R6: Ohm
    C1: Farad
    C2: Farad


class TwinTParts(CircuitParts, frozen=True, kw_only=True):
    """Twin-T: R1 and R2 in series with C3 at their middle, C1 and C2 in series with R3 at theirs."""

    R1: Ohm
    R2: Ohm
    R3: Ohm
    C1: Farad
    C2: Farad
    C3: Farad


class BootstrappedTwinTParts(TwinTParts, frozen=True, kw_only=True):
    """A twin-T with an amplifier of gain 1 + RB/RA, whose output drives C3."""

    RA: Ohm
    RB: Ohm


class FliegeNotchParts(CircuitParts, frozen=True, kw_only=True):
    """Fliege's notch: R1, R2 set Q; R3, R4, C1, C2 the frequency; R5, R6 its depth."""

    R1: Ohm
    R2: Ohm
    R3: Ohm
    R4: Ohm
    R5: Ohm
    R6: Ohm
    C1: Farad
    C2: Farad


class ActiveToneParts(CircuitParts, frozen=True, kw_only=True):
    """Baxandall's tone control; R1, R2 and C1 are there twice, on either side. Positions: 0 cut, 1 boost."""

    R1: Ohm
    R2: Ohm
    R3: Ohm
    C1: Farad
    C2: Farad
    P1: Ohm
    P2: Ohm
    bass: Fraction = Fraction(0.5)
    treble: Fraction = Fraction(0.5)


class PassiveToneParts(CircuitParts, frozen=True, kw_only=True):
    """The passive tone control. Positions: 0 cut, 1 boost."""

    R1: Ohm
    R2: Ohm
    R3: Ohm
    C1: Farad
    C2: Farad
    C3: Farad
    C4: Farad
    P1: Ohm
    P2: Ohm
    bass: Fraction = Fraction(0.5)
    treble: Fraction = Fraction(0.5)


class SeriesResonantBand(DesignStruct, frozen=True, kw_only=True):
    """A potentiometer (0 cut, 1 boost) and a series resonant circuit from its wiper to ground."""

    P1: Ohm
    C1: Farad
    L1: Henry
    R1: OhmOrZero = OhmOrZero(0.0)
    position: Fraction = Fraction(0.5)


class SimulatedInductorBand(DesignStruct, frozen=True, kw_only=True):
    """The same with the inductor made from R1, R2, C2 and a follower: L = R1·R2·C2 nearly, R1 in series."""

    P1: Ohm
    C1: Farad
    R1: Ohm
    R2: Ohm
    C2: Farad
    position: Fraction = Fraction(0.5)


class SeriesResonantParts(CircuitParts, frozen=True, kw_only=True):
    """Bands between an op-amp's inputs: R1 from the input, R2 from the output."""

    R1: Ohm
    R2: Ohm
    band: tuple[SeriesResonantBand, ...]

    def __post_init__(self) -> None:
        _check_bands(len(self.band))


class SimulatedInductorParts(CircuitParts, frozen=True, kw_only=True):
    """Bands between an op-amp's inputs: R1 from the input, R2 from the output."""

    R1: Ohm
    R2: Ohm
    band: tuple[SimulatedInductorBand, ...]

    def __post_init__(self) -> None:
        _check_bands(len(self.band))


def _check_bands(count: int) -> None:
    if not 1 <= count <= MOST_BANDS:
        raise ValueError(f"band has {count} tables (allowed 1 to {MOST_BANDS})")


class ActiveDiscParts(CircuitParts, frozen=True, kw_only=True):
    """Disc replay by feedback: R1 and C1 to ground, R2 ∥ C2 and R3 ∥ C3 in series to the output."""

    R1: Ohm
    R2: Ohm
    R3: Ohm
    C1: Farad
    C2: Farad
    C3: Farad


class CrossoverParts(CircuitParts, frozen=True, kw_only=True):
    """L1 and C1 before a driver R2, L2 whose impedance R3 and C2 correct."""

    L1: Henry
    C1: Farad
    R2: Ohm
    L2: Henry
    R3: Ohm
    C2: Farad
    L1_resistance: OhmOrZero = OhmOrZero(0.0)


PARTS_OF: dict[str, type[CircuitParts]] = {
    "rc_lowpass": OneRC,
    "rc_highpass": OneRC,
    "rl_lowpass": OneRL,
    "rl_highpass": OneRL,
    "inverting_high_shelf": ShelvingParts,
    "inverting_low_shelf": ShelvingParts,
    "lead": TwoRC,
    "lag": TwoRC,
    "lead_lag": TwoRTwoC,
    "allpass_first_order": AllpassParts,
    "multiple_feedback_lowpass": ThreeRTwoC,
    "multiple_feedback_highpass": TwoRThreeC,
    "multiple_feedback_bandpass": ThreeRTwoC,
    "sallen_key_lowpass": SallenKeyParts,
    "sallen_key_highpass": SallenKeyParts,
    "sallen_key_bandpass": SallenKeyBandpassParts,
    "state_variable_lowpass": StateVariableParts,
    "state_variable_bandpass": StateVariableParts,
    "state_variable_highpass": StateVariableParts,
    "tow_thomas_bandpass": TowThomasParts,
    "tow_thomas_lowpass": TowThomasParts,
    "tow_thomas_lowpass_inverted": TowThomasParts,
    "twin_t": TwinTParts,
    "twin_t_bootstrapped": BootstrappedTwinTParts,
    "fliege_notch": FliegeNotchParts,
    "bridged_t": TwoRTwoC,
    "wien_band": TwoRTwoC,
    "baxandall": ActiveToneParts,
    "passive_tone": PassiveToneParts,
    "series_resonant_bands": SeriesResonantParts,
    "simulated_inductor_bands": SimulatedInductorParts,
    "disc_replay_active": ActiveDiscParts,
    "disc_replay_passive": TwoRTwoC,
    "crossover_lowpass": CrossoverParts,
    "crossover_highpass": CrossoverParts,
}
