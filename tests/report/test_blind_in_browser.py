"""A blind run in a real browser, by key presses; the playback sample by sample; the seal against hashlib."""

from __future__ import annotations

import hashlib
import time
from collections.abc import Iterator
from pathlib import Path

import numpy as np
import pytest
from selenium.webdriver.common.by import By
from selenium.webdriver.common.keys import Keys
from selenium.webdriver.support.ui import WebDriverWait

from a2d.listening.trials import fewest_correct, p_value
from a2d.report.blind import GAP_MS, blind_page
from tests.report.test_blind_page import RATE, tone, wav
from tests.report.test_report_page import MARKUP
from tests.support.browser import Browser, browser

SCRIPTS = Path(__file__).parents[2] / "a2d" / "report"
# A page that is loaded later finds this drawing of lots: the key's bytes come from the list, the salt's are 7.
DEALT = """
Object.defineProperty(crypto, 'getRandomValues', {value: (a) => {
  for (let i = 0; i < a.length; i += 1) a[i] = a.length === 16 && !window.keyDrawn ? DEAL[i] : 7;
  window.keyDrawn = true;
  return a;
}});
const DEAL = [0, 1, 1, 0, 1, 0, 0, 1, 1, 1, 0, 1, 0, 0, 1, 0];
"""
KEY = "ABBABAABBBABAABA"


@pytest.fixture(scope="module")
def window(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Browser]:
    with browser(tmp_path_factory.mktemp("profile")) as opened:
        yield opened


@pytest.fixture(scope="module")
def page(tmp_path_factory: pytest.TempPathFactory) -> Path:
    place = tmp_path_factory.mktemp("page") / "blind.html"
    place.write_bytes(blind_page(wav(tone(440.0)), wav(tone(1_760.0)), labels=(MARKUP, "twin"), title=MARKUP))
    return place


def text(window: Browser, identity: str) -> str:
    return str(window.run("return document.getElementById(arguments[0]).textContent", identity))


def press(window: Browser, *keys: str) -> None:
    for key in keys:
        window.driver.switch_to.active_element.send_keys(key)


def begin(window: Browser, trials: str = "16") -> None:
    """Start a run by keyboard alone: the begin button is reached and pressed."""
    window.driver.find_element(By.ID, "begin").send_keys(Keys.ENTER)
    WebDriverWait(window.driver, 10).until(lambda _: text(window, "run-title") == f"Trial 1 of {trials}")


def test_full_run_by_keys_with_a_drawn_key(window: Browser, page: Path) -> None:
    window.open(page)
    begin(window)
    seal = text(window, "seal")
    assert len(seal) == 64
    answers = "1221121221212112"
    for answer in answers:
        press(window, "a", "b", "x", answer)
    key, salt = text(window, "key"), text(window, "salt")
    assert set(key) <= {"A", "B"}
    assert len(key) == 16
    assert seal == text(window, "opened") == hashlib.sha256(f"{salt}:{key}".encode()).hexdigest()
    right = sum(side == "AB"[int(answer) - 1] for side, answer in zip(key, answers, strict=True))
    assert text(window, "score") == f"{right} of 16 right"
    assert float(text(window, "p-value")) == pytest.approx(p_value(right, 16), abs=5e-5)  # four places are shown
    assert window.complaints() == []
    assert window.requests() == [page.as_uri()]


def test_twelve_of_sixteen(window: Browser, page: Path) -> None:
    added = window.command("Page.addScriptToEvaluateOnNewDocument", source=DEALT)
    try:
        window.open(page)
        begin(window)
        for index, side in enumerate(KEY):
            right = index % 4 != 3  # three of four
            press(window, "x", "1" if (side == "A") == right else "2")
        assert text(window, "key") == KEY
        assert text(window, "score") == "12 of 16 right"
        assert text(window, "p-value") == "0.0384"  # the 0.038; exactly 2517/65536
        assert text(window, "meaning").startswith("A difference was heard")
        rows = window.run("return [...document.querySelectorAll('#answers tr')].map(r => r.innerText.split('\\t'))")
        assert rows[3] == ["4", "A", "B", "wrong"]
    finally:
        window.command("Page.removeScriptToEvaluateOnNewDocument", identifier=added["identifier"])


def test_no_answer_before_x_was_heard(window: Browser, page: Path) -> None:
    window.open(page)
    begin(window)
    press(window, "a", "1")
    assert text(window, "status") == "Listen to X first"
    assert text(window, "run-title") == "Trial 1 of 16"
    press(window, "x", "2")
    assert text(window, "run-title") == "Trial 2 of 16"


def test_another_run_has_another_key_and_length(window: Browser, page: Path) -> None:
    window.open(page)
    seals = set()
    for trials in ("10", "5"):
        choose = (
            "const t = document.getElementById('trials'); t.value = arguments[0]; t.dispatchEvent(new Event('change'))"
        )
        window.run(choose, trials)
        least = fewest_correct(int(trials))
        assert text(window, "needed").startswith(f"With {trials} trials, {least} right answers")
        begin(window, trials)
        seals.add(text(window, "seal"))
        for _ in range(int(trials)):
            press(window, "x", "2")
        key = text(window, "key")
        assert len(key) == int(trials)
        assert float(text(window, "p-value")) == pytest.approx(p_value(key.count("B"), int(trials)), abs=5e-5)
        window.driver.find_element(By.ID, "again").send_keys(Keys.ENTER)
    assert len(seals) == 2
    assert window.complaints() == []


def test_keys_do_nothing_while_a_number_is_typed(window: Browser, page: Path) -> None:
    window.open(page)
    begin(window)
    press(window, "x")
    window.driver.find_element(By.ID, "from").send_keys("0.1")
    assert text(window, "run-title") == "Trial 1 of 16"


def test_nothing_tells_the_key_during_the_run(window: Browser, page: Path) -> None:
    """The page's elements are the same whichever side X is: two runs with opposite keys."""
    seen = []
    for key in ("0", "1"):
        source = f"Object.defineProperty(crypto, 'getRandomValues', {{value: (a) => a.fill({key})}});"
        added = window.command("Page.addScriptToEvaluateOnNewDocument", source=source)
        try:
            window.open(page)
            begin(window)
            press(window, "a", "x")
            body = "const c = document.body.cloneNode(true); c.querySelector('#seal').remove(); return c.outerHTML"
            seen.append(window.run(body))
        finally:
            window.command("Page.removeScriptToEvaluateOnNewDocument", identifier=added["identifier"])
    assert seen[0] == seen[1]
    assert window.run("return typeof state + typeof seal") == "undefinedobject"  # `seal` is the element of that id


def loudest_hz(window: Browser) -> float:
    """Where the spectrum at the tap is highest, Hz."""
    bin_number = window.run(
        "const d = new Float32Array(4096); tap.getFloatFrequencyData(d); return d.indexOf(Math.max(...d))"
    )
    return float(bin_number) * RATE / 8192.0


def test_what_is_heard_is_what_was_drawn(window: Browser, page: Path) -> None:
    """A tap before the loudspeaker: X rings at A's or B's frequency as the key says, A and B at their own."""
    tap = """
    const connect = AudioNode.prototype.connect;
    AudioNode.prototype.connect = function (target, ...rest) {
      if (target instanceof AudioDestinationNode) {
        window.tap = new AnalyserNode(this.context, {fftSize: 8192, smoothingTimeConstant: 0});
        connect.call(this, window.tap);
      }
      return connect.call(this, target, ...rest);
    };
    """
    added = window.command("Page.addScriptToEvaluateOnNewDocument", source=DEALT + tap)
    try:
        window.open(page)
        begin(window)
        expected_hz = {"a": 440.0, "b": 1_760.0}
        for side in KEY[:4]:
            for name in "abx":
                press(window, name)
                wanted = expected_hz[side.lower() if name == "x" else name]
                time.sleep(0.35)  # the tap looks back over 8192 samples, 0.17 s
                settled = WebDriverWait(window.driver, 5.0, 0.1)  # more on a busy machine
                settled.until(lambda _, hz=wanted: abs(loudest_hz(window) - hz) <= RATE / 8192.0)
            press(window, "1")
    finally:
        window.command("Page.removeScriptToEvaluateOnNewDocument", identifier=added["identifier"])


def test_changes_keep_the_sample(window: Browser, page: Path) -> None:
    """Played into memory: outside the dips each output sample is the same sample of the recording let through."""
    window.open(page)
    source = (SCRIPTS / "deck.js").read_text()
    out = window.driver.execute_async_script(
        source
        + """
        const done = arguments[0], rate = 48000, n = 24000;
        const context = new OfflineAudioContext(1, n, rate);
        const [a, b] = [1, -1].map((sign) => {
          const buffer = new AudioBuffer({length: 10000, numberOfChannels: 1, sampleRate: rate});
          buffer.copyToChannel(Float32Array.from({length: 10000}, (_, i) => sign * (i + 1) / 16384), 0);
          return buffer;
        });
        const deck = new Deck(context, a, b);
        deck.level.gain.value = 1;
        deck.play(0, 0, 10000 / rate);
        deck.select("B", 4800 / rate);
        deck.select("B", 9600 / rate);
        deck.select("A", 14400 / rate);
        context.startRendering().then((r) => done([...r.getChannelData(0)]));
        """
    )
    played = np.array(out)
    ramp = (np.arange(24_000) % 10_000 + 1) / 16_384.0  # the passage repeats after 10 000 samples
    gap = RATE * GAP_MS // 1000
    sides = ((0, 4_800, 1), (4_800 + gap, 9_600, -1), (9_600 + gap, 14_400, -1), (14_400 + gap, 24_000, 1))
    for start, end, sign in sides:
        # One part in 2^23 of rounding in the gate's single-precision ramp; a sample late would be 6e-5.
        assert played[start + 2 : end - 2] == pytest.approx(sign * ramp[start + 2 : end - 2], abs=1e-6)
    # A change to the same side dips just as one to the other side does.
    same, other = np.abs(played[9_600 : 9_600 + gap]), np.abs(played[4_800 : 4_800 + gap])
    assert same / ramp[9_600 : 9_600 + gap] == pytest.approx(other / ramp[4_800 : 4_800 + gap], abs=2e-3)


def test_hash_and_chance_against_python(window: Browser, page: Path) -> None:
    window.open(page)
    texts = ["", "abc", "a" * 55, "a" * 56, "a" * 64, "key é 房間 " * 40]
    hashes, chances, least = window.run(
        "return [arguments[0].map(sha256), arguments[1].map(([c, n]) => chance(c, n)),"
        " arguments[2].map((n) => fewest(n, 0.05))]",
        texts,
        [[c, n] for n in (5, 16, 50) for c in range(n + 1)],
        list(range(5, 51)),
    )
    assert hashes == [hashlib.sha256(t.encode()).hexdigest() for t in texts]
    expected = [p_value(c, n) for n in (5, 16, 50) for c in range(n + 1)]
    assert chances == pytest.approx(expected, rel=1e-12)
    assert least == [fewest_correct(n) for n in range(5, 51)]


@pytest.mark.parametrize("width", [1280, 390])
def test_fits_and_names_stay_text(window: Browser, page: Path, width: int) -> None:
    window.open(page, width=width)
    begin(window)
    assert window.run("return document.documentElement.scrollWidth <= window.innerWidth")
    assert window.run("return document.querySelector('.facts').textContent") == MARKUP
    assert window.run("return document.querySelectorAll('script').length") == 3
    assert window.complaints() == []
