"""Where the methods on the report page come from."""

from __future__ import annotations

METHOD_SOURCES: dict[str, str] = {
    "bilinear": "Bilinear transform with prewarping: A. V. Oppenheim, R. W. Schafer, Discrete-Time Signal Processing, "
    "3rd ed., section 7.2.2. Exact at one frequency a section; everything above it is squeezed below half the rate.",
    "magnitude_matched": "Poles mapped by e^(s/fs), zeros from the squared magnitude: M. Vicanek, Matched Second Order "
    "Digital Filters (2016), carried over to any numerator in docs/fidelity.md.",
    "minimax": "Least worst error in dB over the band, with a proved lower bound: rational Chebyshev approximation of "
    "the squared magnitude, docs/fidelity.md with its sources.",
    "auto": "The simplest of the methods that keeps the stated limits: docs/fidelity.md.",
}

OTHER_SOURCES: tuple[str, ...] = (
    "Straight-line asymptotes: H. W. Bode, Network Analysis and Feedback Amplifier Design, 1945, chapter XV.",
    "H(s) of peaking and shelving sections, unless the file says otherwise: W3C Group Note, Audio EQ Cookbook, "
    "8 June 2021.",
    "Errors: twin minus analog, maximised between grid points over the stated band. What lies more than 80 dB below "
    "the analog maximum counts as lying there, and its phase and delay are not judged.",
)

CAUTIONS: tuple[str, ...] = (
    "Test signals and equalised programme can be far louder than expected. Start with the monitor level down and keep "
    "it low: loud signals damage hearing and loudspeakers. Long listening at high level tires ears and judgement.",
    "Mains-powered equipment holds dangerous voltages, also after it is switched off. Opening or measuring inside it "
    "is work for qualified people under the local electrical code.",
    "The analog response is that of a linear circuit with the values in the design file. Saturation, noise, loading "
    "between sections and parts that have drifted are not in it.",
    "The figures hold for the coefficients as computed in double precision unless a section below says otherwise. "
    "Check the shipped header with “a2d check” after every change to design or firmware.",
)
