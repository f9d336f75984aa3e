"""A fit as a design file that converts at once."""

from __future__ import annotations

import json
from collections.abc import Callable, Sequence

from a2d.analog.fit.fit import Fit, FittedSection
from a2d.analog.fit.shapes import SHAPES


def design_text(
    fit: Fit,
    name: str,
    sample_rates_hz: Sequence[float],
    *,
    title: str = "",
    names: Sequence[str] = (),
    with_gain: bool = False,
) -> str:
    """The TOML text of a design whose sections are those of `fit`.

    Parameters
    ----------
    fit
        What was fitted.
    name
        A C identifier.
    sample_rates_hz
        Hz.
    title
        Of the design.
    names
        Of the sections; `s1_peaking` and so on when absent.
    with_gain
        Whether the measurement's gain and polarity belong to the device; they stand in a comment otherwise.
    """
    labels = list(names) or [f"s{i + 1}_{SHAPES[s.shape].kind}" for i, s in enumerate(fit.sections)]
    parts = [_comment(fit), _head(name, title, sample_rates_hz)]
    parts += [_section(label, section) for label, section in zip(labels, fit.sections, strict=True)]
    if with_gain or not fit.sections:
        factor = "factor = -1.0\n" if fit.inverted else ""
        parts.append(f'[[section]]\nname = "gain"\nkind = "gain"\ngain = {_number(fit.gain_db)}\n{factor}')
    return "\n".join(parts)


def _comment(fit: Fit) -> str:
    rms = (fit.residual_db @ fit.residual_db / fit.residual_db.size) ** 0.5
    lines = [
        f"Fitted to {fit.measured.f_hz.size} points from {fit.measured.f_hz[0]:.6g} to {fit.measured.f_hz[-1]:.6g} Hz; "
        f"left: {rms:.3g} dB rms.",
        f"Taken out as the measurement's own: gain {fit.gain_db:.4g} dB, "
        f"polarity {'inverted' if fit.inverted else 'kept'}, delay {fit.delay_s * 1e6:.6g} us, "
        f"coupling corner {fit.corner_hz:.3g} Hz.",
        "Q of peaking sections and shelves is that of the W3C note (Audio EQ Cookbook).",
    ]
    return "".join(f"# {line}\n" for line in lines)


def _head(name: str, title: str, sample_rates_hz: Sequence[float]) -> str:
    rates = ", ".join(_number(rate) for rate in sample_rates_hz)
    return f"[design]\nname = {json.dumps(name)}\ntitle = {json.dumps(title)}\nsample_rates = [{rates}]\n"


def _section(label: str, section: FittedSection) -> str:
    kind = SHAPES[section.shape].kind
    body = WRITERS.get(kind, _plain)(section)
    return f'[[section]]\nname = {json.dumps(label)}\nkind = "{kind}"\n{body}'


def _plain(section: FittedSection) -> str:
    values = "".join(f"{name} = {_number(value)}\n" for name, value in section.values.items())
    return values + ("order = 1\n" if SHAPES[section.shape].order == 1 else "")


def _pole_zero(section: FittedSection) -> str:
    v = section.values
    return f"poles = [{_roots(v['f0'], v['q'])}]\nzeros = [{_roots(v['zero_f0'], v['zero_q'])}]\n"


def _roots(f0: float, q: float) -> str:
    """A pair, or two real roots: f0·(1/(2Q) ± sqrt(1/(4Q²) - 1))."""
    if q >= 0.5:
        return f"{{ f0 = {_number(f0)}, q = {_number(q)} }}"
    half = 0.5 / q
    larger = half + (half**2 - 1.0) ** 0.5
    return f"{{ f0 = {_number(f0 / larger)} }}, {{ f0 = {_number(f0 * larger)} }}"


WRITERS: dict[str, Callable[[FittedSection], str]] = {"pole_zero": _pole_zero}


def _number(value: float) -> str:
    """Seven digits: more than any measurement has."""
    text = f"{value:.7g}"
    return text if any(c in text for c in ".e") else f"{text}.0"
