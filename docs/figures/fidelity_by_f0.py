"""Largest magnitude error from 20 Hz to 20 kHz against f0, for every method: docs/figures/fidelity_by_f0.png.

python docs/figures/fidelity_by_f0.py
"""

from __future__ import annotations

from pathlib import Path

import matplotlib as mpl
import numpy as np
from matplotlib.figure import Figure

from a2d.analog.kinds.equalisers import high_shelf, peaking
from a2d.analog.kinds.filters import lowpass
from a2d.analog.response import section_response as analog_response
from a2d.digital.chain_fit import fit_chain
from a2d.digital.methods import METHODS
from a2d.digital.response import chain_response, section_response

BAND = np.array([20.0, 20_000.0])
F = np.unique(np.concatenate([np.geomspace(*BAND, 1500), np.linspace(*BAND, 1500)]))
F0 = np.geomspace(100.0, 19_900.0, 60)
RATES = (44_100.0, 48_000.0, 96_000.0)
COLOURS = {"bilinear": "#b2182b", "magnitude_matched": "#e08214", "minimax": "#2166ac", "one section more": "#1b7837"}
SMALLEST = 1e-7


def sections() -> dict[str, tuple[np.ndarray, np.ndarray]]:
    """b, a [60, 3] by name."""
    made = {
        "peaking, Q 1.4, +12 dB": peaking(F0, 1.4, 12.0),
        "high shelf, +12 dB": high_shelf(F0, 12.0, 0.7071),
        "low-pass, Q 0.7071": lowpass(F0, 0.7071),
    }
    return {name: (s.b.reshape(-1, 3), s.a.reshape(-1, 3)) for name, s in made.items()}


def errors(b: np.ndarray, a: np.ndarray, rate: float) -> dict[str, np.ndarray]:
    """The largest error in dB of each f0 by each method, [60]."""
    wanted = np.abs(analog_response(b, a, F))
    found = {}
    for name, method in METHODS.items():
        sos = method(b, a, np.asarray(rate), F0, BAND)
        found[name] = np.abs(20.0 * np.log10(np.abs(section_response(sos, F, rate)) / wanted)).max(axis=1)
    more = [fit_chain(b[[i]], a[[i]], rate, BAND, extra_sections=1).sos for i in range(0, len(F0), 3)]
    sizes = np.array([np.abs(chain_response(sos, F, rate)) for sos in more])
    found["one section more"] = np.abs(20.0 * np.log10(sizes / wanted[::3])).max(axis=1)
    return found


def draw(figure: Figure) -> None:
    """Kinds down, rates across."""
    every = sections()
    axes = figure.subplots(len(every), len(RATES), sharex=True, sharey=True)
    for row, (kind, (b, a)) in enumerate(every.items()):
        for column, rate in enumerate(RATES):
            panel = axes[row][column]
            for name, values in errors(b, a, rate).items():
                f0 = F0[::3] if len(values) < len(F0) else F0
                panel.loglog(f0, np.maximum(values, SMALLEST), color=COLOURS[name], label=name, linewidth=1.4)
            panel.set_title(f"{kind}, {rate / 1000.0:g} kHz", fontsize=9)
            panel.grid(True, which="major", color="#dddddd", linewidth=0.5)
            panel.set_ylim(SMALLEST, 60.0)
    for panel in axes[-1]:
        panel.set_xlabel("f0, Hz")
    for line in axes:
        line[0].set_ylabel("largest error, dB")
    axes[0][0].legend(fontsize=7, loc="upper left")


def main() -> None:
    mpl.use("Agg")
    figure = Figure(figsize=(11.0, 9.0), layout="constrained")
    draw(figure)
    target = Path(__file__).with_suffix(".png")
    figure.savefig(target, dpi=110, metadata={"Software": None})
    print(target.name)


if __name__ == "__main__":
    main()
