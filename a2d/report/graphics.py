"""A figure as bytes that hold no date, no version and no host."""

from __future__ import annotations

import io
import warnings
from collections.abc import Callable, Iterator
from contextlib import contextmanager

import numpy as np
from matplotlib.figure import Figure
from matplotlib.layout_engine import PlaceHolderLayoutEngine
from matplotlib.transforms import Bbox

from a2d.report.style import DOTS_PER_INCH


def settle(figure: Figure) -> None:
    """Lay the figure out once and for all.

    The solver behind the layout gives the last digits differently from run to run; places are rounded to 1e-4 of the
    figure, so that the same figure gives the same bytes.
    """
    engine = figure.get_layout_engine()
    if engine is None or isinstance(engine, PlaceHolderLayoutEngine):
        return
    with _boxes_for_missing_letters():
        for _ in range(2):  # the first round changes the panels' sizes, and so how many ticks they have
            engine.execute(figure)
    figure.set_layout_engine("none")
    for axes in figure.axes:
        axes.set_position(Bbox.from_bounds(*np.round(axes.get_position(original=True).bounds, 4)))
    for text in (figure._suptitle, figure._supxlabel):  # type: ignore[attr-defined]
        if text is not None:
            text.set_position([round(float(v), 4) for v in text.get_position()])


def svg(figure: Figure) -> bytes:
    """The figure as SVG."""
    settle(figure)
    buffer = io.BytesIO()
    with _boxes_for_missing_letters():
        figure.savefig(buffer, format="svg", metadata={"Date": None, "Creator": None})
    return buffer.getvalue()


def png(figure: Figure) -> bytes:
    """The figure as PNG at 150 dots an inch."""
    settle(figure)
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
