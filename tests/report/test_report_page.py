"""The report page as a document: what it says, in which order, how it is marked up, and that all text stays text."""

from __future__ import annotations

import itertools
import re
from html.parser import HTMLParser

import pytest

from a2d.conversion import Conversion, convert
from a2d.design.read import parse_design
from a2d.report.by_method import attempts
from a2d.report.content import Extras, Finding, Recording
from a2d.report.echo import echo
from a2d.report.page import report_page, verdict

MARKUP = "<script>alert(1)</script>&amp;\"'<b>"
DESIGN = """
[design]
name = "quay"
title = '''{title}'''
sample_rates = ["48 kHz", "96 kHz"]
{limits}
[[section]]
name = '''{section}'''
kind = "peaking"
f0 = "3k2"
q = 1.4
gain = "4.5 dB"

[[section]]
name = "air"
kind = "peaking"
f0 = "16 kHz"
q = 1
gain = "6 dB"

[[section]]
name = "hum"
kind = "notch"
f0 = "50 Hz"
q = 5
"""
LIMITS = '[limits]\nmagnitude = "1 dB"\nphase = "30 deg"\n'


def conversion(title: str = "Quay strip", section: str = "presence", limits: str = "") -> Conversion:
    return convert(parse_design(DESIGN.format(title=title, section=section, limits=limits)))


EXTRAS = Extras(
    findings=(
        Finding(f"Rounding {MARKUP}", f"Text {MARKUP}", MARKUP, ("Rate", f"At {MARKUP}"), (("48 kHz", MARKUP),), True),
    ),
    recordings=(Recording(f"Noise {MARKUP}", f"Listen {MARKUP}", b"RIFF"),),
    notes=(f"note {MARKUP}",),
    warnings=(f"warning {MARKUP}",),
)
VOID = {"meta", "link", "br", "img", "input", "hr"}


class Document(HTMLParser):
    """Elements in order with their attributes; fails on a tag that closes what is not open."""

    def __init__(self, page: bytes):
        super().__init__(convert_charrefs=True)
        self.elements: list[tuple[str, dict[str, str]]] = []
        self.texts: list[str] = []
        self.open: list[str] = []
        self.feed(page.decode("utf-8"))
        assert self.open == []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.elements.append((tag, {k: v or "" for k, v in attrs}))
        if tag not in VOID:
            self.open.append(tag)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.elements.append((tag, {k: v or "" for k, v in attrs}))

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        self.texts.append(data)

    def all(self, tag: str) -> list[dict[str, str]]:
        return [attributes for name, attributes in self.elements if name == tag]


@pytest.fixture(scope="module")
def marked_up() -> bytes:
    return report_page(conversion(MARKUP, MARKUP, LIMITS), "ab" * 32, EXTRAS)


@pytest.fixture(scope="module")
def document(marked_up: bytes) -> Document:
    return Document(marked_up)


def test_names_with_markup_stay_text(marked_up: bytes, document: Document) -> None:
    assert b"<script" not in marked_up
    assert document.all("script") == []
    assert document.all("b") == []
    assert "".join(document.texts).count("<script>alert(1)</script>") >= 9


def test_landmarks_language_and_headings(document: Document) -> None:
    assert document.all("html") == [{"lang": "en"}]
    for landmark in ("header", "nav", "main", "footer", "h1"):
        assert len(document.all(landmark)) == 1
    levels = [int(tag[1]) for tag, _ in document.elements if re.fullmatch("h[1-6]", tag)]
    assert all(after - before <= 1 for before, after in itertools.pairwise(levels))


def test_ids_are_unique_and_references_meet_them(document: Document) -> None:
    ids = [a["id"] for _, a in document.elements if "id" in a]
    assert len(ids) == len(set(ids))
    wanted = [a["href"][1:] for a in document.all("a")] + [a["xlink:href"][1:] for a in document.all("use")]
    wanted += [i for _, a in document.elements for i in a.get("aria-labelledby", "").split()]
    wanted += re.findall(r"url\(#([^)]*)\)", " ".join(str(a) for _, a in document.elements))
    assert set(wanted) <= set(ids)


def test_tables_have_captions_and_headers(document: Document) -> None:
    tables = len(document.all("table"))
    assert tables == len(document.all("caption")) >= 5
    assert all(a.get("scope") in {"col", "row", "rowgroup"} for a in document.all("th"))


def test_plots_have_names_and_descriptions(document: Document) -> None:
    plots = [a for a in document.all("svg") if a.get("class") == "plot"]
    assert len(plots) == 10
    assert all(a["role"] == "img" and a["aria-labelledby"] for a in plots)
    assert len(document.all("desc")) == 10
    assert any("no output at all" in text and "50 Hz" in text for text in document.texts)


def test_nothing_is_fetched(marked_up: bytes, document: Document) -> None:
    for _, attributes in document.elements:
        for key in ("src", "href", "xlink:href"):
            assert attributes.get(key, "#").startswith(("#", "data:"))
    assert b"@import" not in marked_up
    assert not re.search(rb"url\((?!#)", marked_up)
    policy = next(a["content"] for a in document.all("meta") if "http-equiv" in a)
    assert policy.startswith("default-src 'none'")


def test_verdict_comes_first_and_says_what_is_broken(document: Document) -> None:
    text = " ".join("".join(document.texts).split())
    assert text.index("Fail. Over the stated limits at 48 kHz.") < text.index("Every value as the tool")
    assert "48 kHz: magnitude error -" in text


def test_verdicts() -> None:
    assert verdict(conversion()).state == "open"
    assert verdict(conversion(limits='[limits]\nmagnitude = "20 dB"\n')).state == "good"
    bad = verdict(conversion(limits=LIMITS))
    assert (bad.state, bad.sentence) == ("bad", "Over the stated limits at 48 kHz.")
    assert all(line.startswith("48 kHz: magnitude error -") for line in bad.lines)
    assert any("would keep it" in line for line in bad.advice)
    failed = Finding("Spread", "", "", (), (), passed=False)
    assert verdict(conversion(limits='[limits]\nmagnitude = "20 dB"\n'), [failed]).lines == (
        "Spread: not within the limits, see there",
    )


def test_echo_holds_every_value() -> None:
    tables = echo(conversion(limits=LIMITS).design)
    by_heading = {table.heading: table.values for table in tables}
    assert [t.heading for t in tables][-3:] == ["presence", "air", "hum"]
    assert dict(by_heading["[design]"])["sample_rates"] == "48 kHz, 96 kHz"
    assert dict(by_heading["[limits]"]) == {"magnitude": "1 dB", "phase": "30 deg"}
    assert by_heading["presence"][0] == ("kind", "peaking")
    assert {("f0", "3.2 kHz"), ("q", "1.4"), ("gain", "4.5 dB"), ("q_meaning", "w3c")} <= set(by_heading["presence"])


def test_methods_at_every_rate_and_refusals_in_words() -> None:
    found = attempts(conversion())
    bilinear = [a for a in found if a.method == "bilinear"]
    assert [a.sample_rate_hz for a in bilinear] == [48_000.0, 96_000.0]
    assert all(a.comparison is not None and a.refusal == "" for a in bilinear)
    low = convert(parse_design(DESIGN.format(title="t", section="s", limits="").replace("96 kHz", "96.5 kHz")))
    assert {a.sample_rate_hz for a in attempts(low)} == {48_000.0, 96_500.0}


def test_same_bytes_twice() -> None:
    assert report_page(conversion(), "00", EXTRAS) == report_page(conversion(), "00", EXTRAS)
