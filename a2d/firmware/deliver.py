"""Everything that firmware takes from a design: files, what to say of them, and the rounded numbers' errors."""

from __future__ import annotations

from dataclasses import dataclass

from a2d.analog.chain import AnalogChain
from a2d.compare.advice import verdict
from a2d.compare.errors import Comparison, compare
from a2d.compare.verdict import Breach
from a2d.design.firmware import Firmware
from a2d.design.model import Design
from a2d.digital.twin import Twin
from a2d.firmware import words
from a2d.firmware.header import write_header
from a2d.firmware.kernel import arithmetic_of, write_kernel
from a2d.firmware.model import Header, ProvedError, Table
from a2d.firmware.plan import Plan, make_plan
from a2d.firmware.vectors import make_vectors, write_check, write_vectors
from a2d.wordlength.arithmetic import Arithmetic
from a2d.wordlength.choose import Proof, prove


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
    firmware = design.firmware
    plan = make_plan(firmware, twins, bands_hz)
    together = firmware.rounding == "together"
    proofs = tuple(
        prove(twin, plan.number, plan.structure, together=together, band_hz=band)
        for twin, band in zip(plan.twins, bands_hz, strict=True)
    )
    rounded = tuple(rounded_twin(twin, proof) for twin, proof in zip(plan.twins, proofs, strict=True))
    comparisons = tuple(compare(chain, twin, band) for twin, band in zip(rounded, bands_hz, strict=True))
    header = _header(design, sha256, plan, natural_frequencies(chain, rounded[0]), rounded, proofs, comparisons)
    arithmetic = arithmetic_of(header, firmware.overflow, firmware.sample_rounding)
    warnings = (words.warning(twin, proof, plan) for twin, proof in zip(plan.twins, proofs, strict=True))
    return Delivery(
        files=_files(firmware, header, proofs, arithmetic),
        lines=words.lines(plan, proofs, arithmetic),
        warnings=tuple(warning for warning in warnings if warning is not None),
        header=header,
        twins=rounded,
        comparisons=comparisons,
        breaches=tuple(
            verdict(chain, twin, comparison, design.limits)
            for twin, comparison in zip(rounded, comparisons, strict=True)
        ),
    )


def _files(
    firmware: Firmware, header: Header, proofs: tuple[Proof, ...], arithmetic: Arithmetic | None
) -> dict[str, str]:
    files = {f"{header.name}.h": write_header(header)}
    if firmware.kernel:
        files[f"{header.name}_kernel.h"] = write_kernel(header, arithmetic)
    if firmware.test_vectors:
        vectors = make_vectors(tuple(proof.rounded for proof in proofs), arithmetic)
        files[f"{header.name}_vectors.h"] = write_vectors(header, vectors)
    if firmware.kernel and firmware.test_vectors:
        files[f"{header.name}_check.c"] = write_check(header)
    return files


def rounded_twin(twin: Twin, proof: Proof) -> Twin:
    """The twin that the rounded numbers are."""
    return Twin(twin.names, twin.methods, proof.rounded.sos, twin.sample_rate_hz, twin.match_hz)


def _header(
    design: Design,
    sha256: str,
    plan: Plan,
    f0_hz: tuple[float, ...],
    twins: tuple[Twin, ...],
    proofs: tuple[Proof, ...],
    comparisons: tuple[Comparison, ...],
) -> Header:
    firmware, fixed = design.firmware, plan.number.kind == "fixed"
    return Header(
        name=design.design.name,
        title=design.design.title,
        sha256=sha256,
        section_names=twins[0].names,
        f0_hz=f0_hz,
        number=plan.number,
        tables=tuple(_table(t, p, c) for t, p, c in zip(twins, proofs, comparisons, strict=True)),
        structure=plan.structure,
        error_feedback=plan.error_feedback,
        order=firmware.order,
        feedback=firmware.feedback,
        sample_bits=firmware.sample_word.bits if fixed else 0,
        sample_fraction=firmware.sample_word.fraction_bits if fixed else 0,
    )


def natural_frequencies(chain: AnalogChain, twin: Twin) -> tuple[float, ...]:
    """Each section's f0 in Hz: that of its analog original, or its own where it has none (fitted sections).

    The match frequency will not do: a section may be exact elsewhere than at its f0.
    """
    return tuple(
        _natural_frequency(chain, name, float(own)) for name, own in zip(twin.names, twin.match_hz, strict=True)
    )


def _natural_frequency(chain: AnalogChain, name: str, own_hz: float) -> float:
    for original, f0 in zip(chain.names, chain.f0_hz, strict=True):
        if name == original or name.startswith(f"poles of {original}, zeros of "):
            return float(f0)
    return own_hz


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
