"""A figure as bytes that hold no date, no version and no host."""

from __future__ import annotations

import io
import warnings
from collections.abc import Callable, Iterator
from contextlib import contextmanager

from matplotlib.figure import Figure

DOTS_PER_INCH = 150


def svg(figure: Figure) -> bytes:
    """The figure as SVG."""
    buffer = io.BytesIO()
    with _boxes_for_missing_letters():
        figure.savefig(buffer, format="svg", metadata={"Date": None, "Creator": None})
    return buffer.getvalue()


def png(figure: Figure) -> bytes:
    """The figure as PNG at 150 dots an inch."""
    buffer = io.BytesIO()
    with _boxes_for_missing_letters():
        figure.savefig(buffer, format="png", dpi=DOTS_PER_INCH, metadata={"Software": None})
    return buffer.getvalue()


FORMATS: dict[str, Callable[[Figure], bytes]] = {"svg": svg, "png": png}


@contextmanager
def _boxes_for_missing_letters() -> Iterator[None]:
    """A title may hold letters that the font lacks. They are drawn as boxes, which says so better than a warning."""
    with warnings.catch_warnings():
        warnings.filterwarnings("ignore", message="Glyph .* missing from")
        yield
