"""Figures as SVG inside a page: letters stay letters, colours follow the page's light or dark theme."""

from __future__ import annotations

import re

from markupsafe import Markup
from matplotlib.figure import Figure

from a2d.report.graphics import svg
from a2d.report.style import THEME

_PREAMBLE = re.compile(r"\A.*?(?=<svg )", re.DOTALL)
_METADATA = re.compile(r"\s*<metadata>.*?</metadata>", re.DOTALL)
_STYLE_FOR_ALL = re.compile(r"\s*<defs>\s*<style type=\"text/css\">.*?</style>\s*</defs>", re.DOTALL)
_IDS = re.compile(r'(\bid="|href="#|url\(#)')
_GEOMETRY = re.compile(r'\b(?:d|x|y|transform|points)="[^"]*"')
_LONG_NUMBER = re.compile(r"-?\d+\.\d{3,}")
_OPENING = re.compile(r"<svg ([^>]*)>")
_SIZE = re.compile(r'\b(?:width|height)="[^"]*"\s*')
_FONT = "'DejaVu Sans'"
_PAGE_FONT = "'DejaVu Sans', Verdana, sans-serif"


def inline_svg(figure: Figure, key: str, title: str, description: str) -> Markup:
    """The figure as an `<svg>` element, with a name and a description for those who do not see it.

    Parameters
    ----------
    figure
        Drawn with `drawing(..., svg_text=True)`.
    key
        Starts every id in the element, so that several can stand in one page.
    title, description
        Any text.
    """
    text = _PREAMBLE.sub("", svg(figure).decode("utf-8"))
    text = _STYLE_FOR_ALL.sub("", _METADATA.sub("", text))
    text = _IDS.sub(rf"\g<1>{key}-", text)
    text = _GEOMETRY.sub(lambda m: _LONG_NUMBER.sub(_hundredths, m[0]), text)
    for name, (light, _) in THEME.items():
        text = text.replace(light, f"var(--{name}, {light})")
    text = text.replace(_FONT, _PAGE_FONT)
    opening = Markup('<svg {} class="plot" role="img" aria-labelledby="{}-title {}-text">').format(
        Markup(_SIZE.sub("", _OPENING.search(text)[1])),  # type: ignore[index]
        key,
        key,
    )
    names = Markup('<title id="{}-title">{}</title><desc id="{}-text">{}</desc>').format(key, title, key, description)
    return Markup(_OPENING.sub(lambda _: opening + names, text, count=1))


def _hundredths(match: re.Match[str]) -> str:
    """A length in points to two digits, which no screen can tell from more."""
    return f"{float(match[0]):.2f}".rstrip("0").rstrip(".")
