"""Plots as files: there, well-formed, not blank, and the same bytes wherever they are made."""

from __future__ import annotations

import hashlib
import os
import subprocess
import sys
import xml.etree.ElementTree as ET
from pathlib import Path

import matplotlib.image
import numpy as np
import pytest

from a2d.compare.errors import compare
from a2d.digital.twin import make_twin
from a2d.report.graphics import svg
from a2d.report.plots import PLOTS, plots
from a2d.report.root_plot import draw_roots
from a2d.report.style import PHONE_SHEET, drawing
from a2d.report.traces import traces
from tests.support.chains import chain_of, equaliser, highpass, peaking

ROOT = Path(__file__).parents[2]
AWKWARD_TITLE = "Desk <b>&amp; $\\frac{1}{$ \x07 房間 \U0001f50a"


def all_plots(title: str = "Harbour desk") -> dict[str, bytes]:
    chain = equaliser()
    twins = [make_twin(chain, rate, match_hz=np.minimum(chain.f0_hz, 0.4 * rate)) for rate in (44_100.0, 96_000.0)]
    return plots(chain, twins, [compare(chain, twin) for twin in twins], "desk", title)


@pytest.fixture(scope="module")
def files() -> dict[str, bytes]:
    return all_plots(AWKWARD_TITLE)


def test_names(files: dict[str, bytes]) -> None:
    assert list(files) == [f"desk.{key}.{kind}" for key in PLOTS for kind in ("svg", "png")]


@pytest.mark.parametrize("key", PLOTS)
def test_svg_is_well_formed_and_refers_to_nothing_outside(files: dict[str, bytes], key: str) -> None:
    root = ET.fromstring(files[f"desk.{key}.svg"])
    assert root.tag == "{http://www.w3.org/2000/svg}svg"
    links = [v for e in root.iter() for k, v in e.attrib.items() if k.endswith("href")]
    assert links
    assert all(link.startswith("#") for link in links)
    text = files[f"desk.{key}.svg"].decode()
    assert "dc:date" not in text
    assert "Matplotlib" not in text


@pytest.mark.parametrize("key", PLOTS)
def test_png_is_not_blank(files: dict[str, bytes], key: str, tmp_path: Path) -> None:
    place = tmp_path / "plot.png"
    place.write_bytes(files[f"desk.{key}.png"])
    image = matplotlib.image.imread(place)
    assert image.shape[1] == 9 * 150
    inked = np.mean(np.any(image[..., :3] < 0.9, axis=-1))
    assert 0.01 < inked < 0.5


SCRIPT = """
import hashlib, locale
locale.setlocale(locale.LC_ALL, "")
from tests.report.test_plots import all_plots
for name, content in all_plots().items():
    print(name, hashlib.sha256(content).hexdigest())
"""


def test_same_bytes_under_other_settings(tmp_path: Path) -> None:
    (tmp_path / "matplotlibrc").write_text("font.size: 20\nlines.linewidth: 7\nsvg.fonttype: none\naxes.grid: False\n")
    environment = {
        **os.environ,
        "PYTHONPATH": str(ROOT),
        "LC_ALL": "de_DE.UTF-8",
        "PYTHONHASHSEED": "7",
        "TZ": "Asia/Tokyo",
    }
    if not _has_locale("de_DE.UTF-8"):
        environment["LC_ALL"] = "C"
    out = subprocess.run(
        [sys.executable, "-c", SCRIPT], check=False, cwd=tmp_path, env=environment, capture_output=True, text=True
    )
    assert out.returncode == 0, out.stderr
    here = [f"{name} {hashlib.sha256(content).hexdigest()}" for name, content in all_plots().items()]
    assert out.stdout.splitlines() == here


def _has_locale(name: str) -> bool:
    listed = (
        subprocess.run(["locale", "-a"], check=True, capture_output=True, text=True).stdout.lower().replace("-", "")
    )
    return name.lower().replace("-", "") in listed


def test_layout_does_not_tremble() -> None:
    """Left to itself the layout of this plot comes out in three ways that differ in their last digits."""
    chain = chain_of(peaking(3_200.0, 1.4, 4.5), peaking(16_000.0, 1.0, 6.0), peaking(50.0, 5.0, -12.0))
    twins = [make_twin(chain, rate) for rate in (48_000.0, 96_000.0)]
    curves, seen = traces(chain, twins, [(20.0, 20_000.0)] * 2), set()
    for _ in range(8):
        with drawing(PHONE_SHEET.text, svg_text=True):
            seen.add(svg(draw_roots(curves, [], PHONE_SHEET)))
    assert len(seen) == 1


def test_settings_of_the_caller_are_left_alone() -> None:
    before = dict(matplotlib.rcParams)
    chain = chain_of(peaking(1_000.0, 1.0, 3.0))
    twin = make_twin(chain, 48_000.0)
    plots(chain, [twin], [compare(chain, twin)], "one", "One")
    assert dict(matplotlib.rcParams) == before


def test_many_rates_and_sections_and_a_flat_chain() -> None:
    rates = (8_000.0, 16_000.0, 32_000.0, 44_100.0, 48_000.0, 88_200.0, 192_000.0)
    chain = chain_of(highpass(30.0, 0.7), *(peaking(100.0 * k, 2.0, 1.0) for k in range(1, 31)))
    twins = [make_twin(chain, rate, match_hz=np.minimum(chain.f0_hz, 0.4 * rate)) for rate in rates]
    assert len(plots(chain, twins, [compare(chain, t) for t in twins], "many", "Many")) == 10
    flat = chain_of(([0.0, 0.0, 1.0], [0.0, 0.0, 1.0]))
    twin = make_twin(flat, 48_000.0)
    assert len(plots(flat, [twin], [compare(flat, twin)], "flat", "Flat")) == 10
