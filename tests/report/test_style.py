"""The frequency axis is labelled as the trade does, and the colours stay apart for everybody."""

from __future__ import annotations

import itertools
import re
from pathlib import Path

import numpy as np
import pytest

from a2d.report import style
from a2d.report.style import ANALOG, DASHES, PAPER, THEME, TWINS, TWINS_ON_DARK, frequency_ticks, twin_style
from a2d.report.text import hertz, plain

# Simulation of full protanopia, deuteranopia and tritanopia on linear RGB: G. M. Machado, M. M. Oliveira and
# L. A. F. Fernandes, "A physiologically-based model for simulation of color vision deficiency", IEEE TVCG 15 (2009),
# table of severity 1.0.
VISION = {
    "full": np.eye(3),
    "protan": [[0.152286, 1.052583, -0.204868], [0.114503, 0.786281, 0.099216], [-0.003882, -0.048116, 1.051998]],
    "deutan": [[0.367322, 0.860646, -0.227968], [0.280085, 0.672501, 0.047413], [-0.011820, 0.042940, 0.968881]],
    "tritan": [[1.255528, -0.076749, -0.178779], [-0.078411, 0.930809, 0.147602], [0.004733, 0.691367, 0.303900]],
}
TO_XYZ = np.array([[0.4124, 0.3576, 0.1805], [0.2126, 0.7152, 0.0722], [0.0193, 0.1192, 0.9505]])  # IEC 61966-2-1


def linear(color: str) -> np.ndarray:
    c = np.array([int(color[i : i + 2], 16) for i in (1, 3, 5)]) / 255.0
    return np.where(c <= 0.04045, c / 12.92, ((c + 0.055) / 1.055) ** 2.4)


def contrast(one: str, other: str) -> float:
    """WCAG 2.2, contrast ratio."""
    low, high = sorted(float(TO_XYZ[1] @ linear(c)) for c in (one, other))
    return (high + 0.05) / (low + 0.05)


def lab(color: str, vision: str) -> np.ndarray:
    xyz = TO_XYZ @ np.clip(np.asarray(VISION[vision]) @ linear(color), 0.0, 1.0) / np.array([0.9505, 1.0, 1.089])
    f = np.where(xyz > (6 / 29) ** 3, np.cbrt(xyz), xyz / (3 * (6 / 29) ** 2) + 4 / 29)
    return np.array([116 * f[1] - 16, 500 * (f[0] - f[1]), 200 * (f[1] - f[2])])


@pytest.mark.parametrize("colors", [TWINS, TWINS_ON_DARK], ids=["light", "dark"])
@pytest.mark.parametrize("vision", VISION)
def test_twins_differ_for_every_eye(vision: str, colors: tuple[str, ...]) -> None:
    # CIE 1976: 2.3 is a just noticeable difference; ten times that tells thin lines apart.
    apart = [np.linalg.norm(lab(a, vision) - lab(b, vision)) for a, b in itertools.combinations(colors, 2)]
    assert min(apart) > 23.0


@pytest.mark.parametrize("theme", [0, 1], ids=["light", "dark"])
def test_lines_stand_out_from_paper(theme: int) -> None:
    paper = THEME["paper"][theme]
    assert THEME["paper"][0] == PAPER
    for color in (TWINS, TWINS_ON_DARK)[theme]:
        assert contrast(color, paper) >= 3.0  # WCAG 2.2, 1.4.11: graphical objects


@pytest.mark.parametrize("theme", [0, 1], ids=["light", "dark"])
def test_text_on_pages_is_legible(theme: int) -> None:
    css = (Path(style.__file__).parent / "common.css").read_text()
    blocks = re.findall(r":root \{(.*?)\}", css, re.DOTALL)
    own = dict(re.findall(r"--([a-z-]+): (#[0-9a-f]{6})", blocks[theme])) | {k: v[theme] for k, v in THEME.items()}
    pairs = [(text, ground) for text in ("ink", "faint", "accent") for ground in ("paper", "ground")]
    pairs += [(state, f"{state}-ground") for state in ("good", "bad", "open")] + [("bad", "paper")]
    pairs += [("paper", "accent"), ("ink", "open-ground")]
    for text, ground in pairs:
        assert contrast(own[text], own[ground]) >= 4.5, (text, ground)  # WCAG 2.2, 1.4.3: text, level AA


def test_thirty_rates_have_thirty_looks() -> None:
    looks = {(s["color"], str(s["linestyle"])) for s in map(twin_style, range(len(TWINS) * len(DASHES)))}
    assert len(looks) == 30
    assert ANALOG not in TWINS


def test_audible_band() -> None:
    labels = [hertz(f) for f in frequency_ticks(20.0, 20_000.0)]
    assert labels == ["20", "50", "100", "200", "500", "1k", "2k", "5k", "10k", "20k"]


@pytest.mark.parametrize(
    ("low", "high"), [(0.01, 1e6), (900.0, 1_100.0), (15_000.0, 20_000.0), (1.0, 3.0), (20.0, 100.0)]
)
def test_any_band_has_a_few_labels(low: float, high: float) -> None:
    ticks = frequency_ticks(low, high)
    assert 3 <= ticks.size <= 13
    assert np.all((ticks >= low * 0.999) & (ticks <= high * 1.001))
    assert len({hertz(f) for f in ticks}) == ticks.size


def test_plain_text() -> None:
    assert plain("a\n b\t\x00c $x_1$") == "a b \ufffdc $x_1$"
