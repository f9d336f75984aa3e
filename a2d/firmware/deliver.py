"""Everything that firmware takes from a design: files, what to say of them, and the rounded numbers' errors."""

from __future__ import annotations

from dataclasses import dataclass

from a2d.analog.chain import AnalogChain
from a2d.compare.errors import Comparison, compare
from a2d.compare.verdict import Breach, judge
from a2d.design.firmware import Firmware, FixedNumber
from a2d.design.model import Design
from a2d.digital.twin import Twin
from a2d.firmware.header import write_header
from a2d.firmware.model import Header, ProvedError, Table
from a2d.wordlength.choose import Proof, prove
from a2d.wordlength.formats import Number
from a2d.wordlength.structures import TITLES

FLAGGED_DB = 0.1  # rounding that moves the response by more is said to be too much


@dataclass(frozen=True, eq=False)
class Delivery:
    """What `deliver` made.

    Attributes
    ----------
    files
        File name to text.
    lines
        For the terminal.
    warnings
        What the user should change, with what would help.
    header
        The header's values.
    twins, comparisons, breaches
        A rate each: the twin of the rounded numbers, its errors against the analog chain, the limits that it breaks.
    """

    files: dict[str, str]
    lines: tuple[str, ...]
    warnings: tuple[str, ...]
    header: Header
    twins: tuple[Twin, ...]
    comparisons: tuple[Comparison, ...]
    breaches: tuple[tuple[Breach, ...], ...]


def deliver(
    design: Design, sha256: str, chain: AnalogChain, twins: tuple[Twin, ...], bands_hz: tuple[tuple[float, float], ...]
) -> Delivery:
    """The firmware files of a design.

    Parameters
    ----------
    design, sha256
        The design and the hash of its file.
    chain, twins
        The analog original and its unrounded twins, one a sample rate.
    bands_hz
        The band that each twin is judged in, Hz.

    Raises
    ------
    RoundingError
        The number format cannot carry the coefficients at one of the rates.
    """
    number, structure = number_of(design.firmware), _structure(design.firmware)
    together = design.firmware.rounding == "together"
    proofs = [
        prove(twin, number, structure, together=together, band_hz=band)
        for twin, band in zip(twins, bands_hz, strict=True)
    ]
    rounded = tuple(rounded_twin(twin, proof) for twin, proof in zip(twins, proofs, strict=True))
    comparisons = tuple(compare(chain, twin, band) for twin, band in zip(rounded, bands_hz, strict=True))
    header = _header(design, sha256, number, structure, rounded, proofs, comparisons)
    return Delivery(
        files={f"{design.design.name}.h": write_header(header)},
        lines=tuple(_line(twin, proof) for twin, proof in zip(twins, proofs, strict=True)),
        warnings=tuple(_warning(t, p) for t, p in zip(twins, proofs, strict=True) if p.error_db > FLAGGED_DB),
        header=header,
        twins=rounded,
        comparisons=comparisons,
        breaches=tuple(judge(comparison, design.limits) for comparison in comparisons),
    )


def number_of(firmware: Firmware) -> Number:
    """The number format that a design asks for."""
    if isinstance(firmware.number, FixedNumber):
        return Number("fixed", firmware.number.bits, firmware.number.fraction_bits)
    return Number(firmware.number)


def _structure(firmware: Firmware) -> str:
    return firmware.chosen_structure


def rounded_twin(twin: Twin, proof: Proof) -> Twin:
    """The twin that the rounded numbers are."""
    return Twin(twin.names, twin.methods, proof.rounded.sos, twin.sample_rate_hz, twin.match_hz)


def _header(
    design: Design,
    sha256: str,
    number: Number,
    structure: str,
    twins: tuple[Twin, ...],
    proofs: list[Proof],
    comparisons: tuple[Comparison, ...],
) -> Header:
    firmware, fixed = design.firmware, number.kind == "fixed"
    return Header(
        name=design.design.name,
        title=design.design.title,
        sha256=sha256,
        section_names=twins[0].names,
        f0_hz=tuple(float(f) for f in twins[0].match_hz),
        number=number,
        tables=tuple(_table(t, p, c) for t, p, c in zip(twins, proofs, comparisons, strict=True)),
        structure=structure,
        error_feedback=firmware.error_feedback,
        order=firmware.order,
        feedback=firmware.feedback,
        sample_bits=firmware.sample_word.bits if fixed else 0,
        sample_fraction=firmware.sample_word.fraction_bits if fixed else 0,
    )


def _table(twin: Twin, proof: Proof, comparison: Comparison) -> Table:
    rounded, fixed = proof.rounded, proof.rounded.number.kind == "fixed"
    words = rounded.words.tolist()
    return Table(
        sample_rate_hz=float(twin.sample_rate_hz),
        values=tuple(tuple(int(w) if fixed else w for w in row) for row in words),
        fractions=tuple(tuple(row) for row in rounded.fractions.tolist()) if fixed else (),
        output_shift=rounded.output_shift,
        band_hz=comparison.band_hz,
        proof=proved_errors(comparison),
    )


def proved_errors(comparison: Comparison) -> tuple[ProvedError, ...]:
    """A comparison's worst errors as the header states them."""
    found = (
        ("magnitude", "dB", comparison.magnitude_db),
        ("phase", "deg", comparison.phase_deg),
        ("group_delay", "us", comparison.group_delay_us),
    )
    return tuple(ProvedError(quantity, unit, float(w.worst), float(w.at_hz)) for quantity, unit, w in found)


def _line(twin: Twin, proof: Proof) -> str:
    rounded = proof.rounded
    loss = f", shift {rounded.shift} ({rounded.shift} bits lost)" if rounded.shift else ""
    gain = f", output shift {rounded.output_shift}" if rounded.output_shift else ""
    return (
        f"{twin.sample_rate_hz:g} Hz: {rounded.number}, {TITLES[rounded.structure]}{loss}{gain}: "
        f"rounding moves the level by at most {proof.error_db:.2g} dB ({proof.nearest_db:.2g} dB each alone), "
        f"margin to the unit circle {proof.margin:.3g} ({proof.exact_margin:.3g} before)"
    )


def _warning(twin: Twin, proof: Proof) -> str:
    rounded = proof.rounded
    return (
        f"rounding to {rounded.number} in {TITLES[rounded.structure]} moves the response by {proof.error_db:.2g} dB at "
        f"{twin.sample_rate_hz:g} Hz (allowed {FLAGGED_DB:g} dB)"
    )
