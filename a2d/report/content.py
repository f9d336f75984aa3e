"""What a report page may hold beyond the conversion itself."""

from __future__ import annotations

import base64
from collections.abc import Sequence
from dataclasses import dataclass


@dataclass(frozen=True)
class Finding:
    """A further result as a table: rounding, headroom, noise, component spread.

    Parameters
    ----------
    title
        The heading.
    text
        What was examined and how, in a sentence or two.
    caption, columns, rows
        The table; the first column names the row.
    passed
        True or False where there is a verdict, None where there is none.
    lines
        Further sentences, one a line.
    """

    title: str
    text: str
    caption: str
    columns: Sequence[str]
    rows: Sequence[Sequence[str]]
    passed: bool | None = None
    lines: Sequence[str] = ()


@dataclass(frozen=True)
class Recording:
    """Audio that the page plays.

    Parameters
    ----------
    title
        What is heard.
    text
        What to listen for, at which level; may be empty.
    audio
        A whole file.
    media_type
        `audio/wav` or `audio/flac`.
    """

    title: str
    text: str
    audio: bytes
    media_type: str = "audio/wav"

    @property
    def data_uri(self) -> str:
        """The file inside the page."""
        return f"data:{self.media_type};base64,{base64.b64encode(self.audio).decode('ascii')}"


@dataclass(frozen=True)
class Extras:
    """Optional parts of a report page: warnings stand below the verdict, notes on sections after their H(s)."""

    findings: Sequence[Finding] = ()
    recordings: Sequence[Recording] = ()
    notes: Sequence[str] = ()
    warnings: Sequence[str] = ()
