"""The report in a real browser: nothing complained about, nothing fetched, plots visible, players play."""

from __future__ import annotations

import io
import subprocess
from collections.abc import Iterator
from pathlib import Path

import numpy as np
import pytest
import soundfile
from matplotlib.image import imread

from a2d.report.content import Extras, Recording
from a2d.report.page import report_page
from tests.report.test_report_page import LIMITS, MARKUP, conversion
from tests.support.browser import Browser, browser
from tests.support.tools import need


def sine_wav(seconds: float = 0.5, rate: int = 48_000, f_hz: float = 440.0, level: float = 0.1) -> bytes:
    """A quiet sine as 16-bit WAV."""
    samples = level * np.sin(2.0 * np.pi * f_hz * np.arange(int(seconds * rate)) / rate)
    buffer = io.BytesIO()
    soundfile.write(buffer, samples, rate, format="WAV", subtype="PCM_16")
    return buffer.getvalue()


@pytest.fixture(scope="module")
def window(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Browser]:
    with browser(tmp_path_factory.mktemp("profile")) as opened:
        yield opened


@pytest.fixture(scope="module")
def page(tmp_path_factory: pytest.TempPathFactory) -> Path:
    place = tmp_path_factory.mktemp("page") / "report.html"
    extras = Extras(recordings=(Recording("Sine, analog", "", sine_wav()), Recording("Sine, twin", "", sine_wav())))
    place.write_bytes(report_page(conversion(MARKUP, MARKUP, LIMITS), "00", extras))
    return place


def picture(content: bytes) -> np.ndarray:
    return np.asarray(imread(io.BytesIO(content), format="png"))[..., :3]


@pytest.mark.parametrize("dark", [False, True])
@pytest.mark.parametrize("width", [1280, 390])
def test_quiet_and_visible(window: Browser, page: Path, width: int, dark: bool) -> None:
    window.open(page, width=width, dark=dark)
    assert window.complaints() == []
    assert window.requests() == [page.as_uri()]
    assert window.run("return document.documentElement.scrollWidth <= window.innerWidth")  # no sideways scrolling
    image = picture(window.screenshot())
    ground = image[2, 2]
    assert (ground.mean() < 0.2) == dark
    # Not blank anywhere: in every band of 700 points some part differs from the page's ground.
    for top in range(0, image.shape[0] - 700, 700):
        assert np.mean(np.abs(image[top : top + 700] - ground).max(axis=-1) > 0.2) > 0.005


@pytest.mark.parametrize(("width", "shown"), [(1280, "wide"), (390, "narrow")])
def test_every_plot_shows_its_lines(window: Browser, page: Path, width: int, shown: str) -> None:
    window.open(page, width=width)
    boxes = window.run(
        "return [...document.querySelectorAll('.' + arguments[0] + ' svg')].map(s => {"
        " const r = s.getBoundingClientRect();"
        " return [r.left + scrollX, r.top + scrollY, r.right + scrollX, r.bottom + scrollY].map(Math.round)})",
        shown,
    )
    assert len(boxes) == 5
    image = picture(window.screenshot())
    for left, top, right, bottom in boxes:
        assert right - left > 0.7 * min(width, 900)
        part = image[top:bottom, left:right]
        first_twin = np.array([0x30, 0x21, 0x80]) / 255.0
        assert np.sum(np.abs(part - first_twin).max(axis=-1) < 0.1) > 100


def test_players_play(window: Browser, page: Path) -> None:
    window.open(page)
    played = window.driver.execute_async_script(
        "const done = arguments[0];"
        "Promise.all([...document.querySelectorAll('audio')].map(a => new Promise(r => {"
        " a.muted = true; a.onended = () => r([a.duration, a.currentTime, a.error]); a.onerror = () => r('error');"
        " a.play().catch(e => r(String(e)))}))).then(done)"
    )
    assert len(played) == 2
    for duration, reached, error in played:
        assert duration == pytest.approx(0.5, abs=1e-3)
        assert reached == pytest.approx(0.5, abs=1e-3)
        assert error is None
    assert window.complaints() == []


def test_names_with_markup_stay_text(window: Browser, page: Path) -> None:
    window.open(page)
    assert window.run("return document.querySelector('h1').textContent") == MARKUP
    assert window.run("return document.querySelectorAll('script, main b').length") == 0
    assert window.run("return [...document.querySelectorAll('svg text')].some(t => t.textContent.includes('<script>'))")


def test_screen_reader_tree(window: Browser, page: Path) -> None:
    window.open(page)
    nodes = window.command("Accessibility.getFullAXTree")["nodes"]
    roles = [node["role"]["value"] for node in nodes if not node.get("ignored")]
    for role in ("banner", "navigation", "main", "contentinfo", "table", "columnheader", "rowheader", "math"):
        assert role in roles
    images = [n for n in nodes if n["role"]["value"] in {"image", "img"} and not n.get("ignored")]
    assert len(images) == 5
    assert all(n["name"]["value"] and n["description"]["value"] for n in images)


def test_prints_on_a4(window: Browser, page: Path, tmp_path: Path) -> None:
    window.open(page, dark=True)
    (tmp_path / "report.pdf").write_bytes(window.pdf())
    subprocess.run([need("pdftoppm"), "-r", "40", "-png", "report.pdf", "p"], cwd=tmp_path, check=True)
    sheets = sorted(tmp_path.glob("p*.png"))
    assert 4 <= len(sheets) <= 12
    for sheet in sheets:
        image = picture(sheet.read_bytes())
        # A4 is 210 mm by 297 mm: 331 by 468 dots at 40 an inch, give or take the rounding.
        assert image.shape[:2] == (pytest.approx(468, abs=1), pytest.approx(331, abs=1))
        assert image[3, 3].mean() > 0.95  # paper stays white, whatever the screen's theme
        assert np.mean(image.min(axis=-1) < 0.6) > 0.002
