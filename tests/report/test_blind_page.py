"""The blind comparison as a document, and what it refuses."""

from __future__ import annotations

import io
import re

import numpy as np
import pytest
import soundfile

from a2d.errors import AudioError, ParameterError
from a2d.report.blind import blind_page, level_note
from tests.report.test_report_page import MARKUP, Document

RATE = 48_000


def wav(samples: np.ndarray, rate: int = RATE, subtype: str = "FLOAT") -> bytes:
    buffer = io.BytesIO()
    soundfile.write(buffer, samples, rate, format="WAV", subtype=subtype)
    return buffer.getvalue()


def tone(f_hz: float, level: float = 0.1, seconds: float = 1.0) -> np.ndarray:
    return level * np.sin(2.0 * np.pi * f_hz * np.arange(int(seconds * RATE)) / RATE)


def test_document() -> None:
    page = blind_page(wav(tone(440.0)), wav(tone(880.0)), labels=(MARKUP, MARKUP), title=MARKUP)
    document = Document(page)
    assert document.all("html") == [{"lang": "en"}]
    assert document.all("b") == []
    assert [a.get("type", "") for a in document.all("script")] == ["text/plain", "text/plain", ""]
    assert "".join(document.texts).count(MARKUP) >= 5
    assert "default-src 'none'" in next(a["content"] for a in document.all("meta") if "http-equiv" in a)
    ids = [a["id"] for _, a in document.elements if "id" in a]
    assert len(ids) == len(set(ids))
    assert not re.search(r"https?://|fetch\(|XMLHttpRequest|import\(", page.decode())


def test_the_key_is_not_in_the_page() -> None:
    page = blind_page(wav(tone(440.0)), wav(tone(880.0)))
    assert page == blind_page(wav(tone(440.0)), wav(tone(880.0)))  # nothing is drawn when the page is made
    assert not re.search(rb"[AB]{5}", re.sub(rb'<script type="text/plain".*?</script>', b"", page))


def test_level_note() -> None:
    assert level_note(tone(997.0)[np.newaxis], tone(997.0)[np.newaxis], RATE).startswith(
        "Loudness is matched: B is 0 LU"
    )
    # Twice the amplitude is 6.02 dB, whatever the weighting.
    assert "B is louder by 6.02 LU" in level_note(tone(997.0)[np.newaxis], tone(997.0, 0.2)[np.newaxis], RATE)
    assert "A is louder by 6.02 LU" in level_note(tone(997.0, 0.2)[np.newaxis], tone(997.0)[np.newaxis], RATE)
    assert "could not be compared" in level_note(np.zeros((1, RATE)), np.zeros((1, RATE)), RATE)


def test_what_does_not_fit_is_refused() -> None:
    good = wav(tone(440.0))
    with pytest.raises(AudioError, match="same length, channels and rate"):
        blind_page(good, wav(tone(440.0, seconds=0.5)))
    with pytest.raises(AudioError, match=r"48000 Hz; .* 44100 Hz"):
        blind_page(good, wav(tone(440.0), 44_100))
    with pytest.raises(AudioError, match="the second recording cannot be read"):
        blind_page(good, b"no audio")
    with pytest.raises(AudioError, match="holds no samples"):
        blind_page(wav(np.zeros(0)), good)
    with pytest.raises(ParameterError, match="trials must be a whole number from 5 to 50"):
        blind_page(good, good, trials=2)
