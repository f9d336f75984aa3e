"""What a rendering did, as plain data for a JSON file and as lines for a terminal."""

from __future__ import annotations

import math
from typing import Any

from a2d.arrays import FloatArray
from a2d.listening.null_test import NullLevels, NullTest
from a2d.listening.render import Rendered
from a2d.listening.wav import Written


def as_data(rendered: Rendered) -> dict[str, Any]:
    """Files, loudness, offsets and null test in plain types; what is not defined is null."""
    return {
        "files": [_file(file) for file in rendered.files],
        "loudness_lufs": {name: round(v, 3) for name, v in rendered.loudness_lufs.items()},
        "level_match_offset_db": {name: round(v, 4) for name, v in rendered.offsets_db.items()},
        "null_test": None if rendered.null is None else null_data(rendered.null),
    }


def null_data(null: NullTest) -> dict[str, Any]:
    """A null test in plain types."""
    return {
        "overall_db": _number(null.raw.overall_db),
        "aligned_overall_db": _number(null.aligned.overall_db),
        "best_gain_db": round(null.gain_db, 5),
        "inverted": null.inverted,
        "best_delay_samples": round(null.delay_samples, 5),
        "third_octaves": [
            {"hz": round(f, 3), "db": _number(raw), "aligned_db": _number(aligned)}
            for f, raw, aligned in _bands(null.centres_hz, null.raw, null.aligned)
        ],
    }


def lines(rendered: Rendered) -> list[str]:
    """One line a file, then loudness and null test."""
    out = [f"{f.path.name}: peak {_dbfs(f.peak)}{_overs(f)}" for f in rendered.files]
    if rendered.offsets_db:
        out.append("loudness: " + ", ".join(f"{n} {v:.2f} LUFS" for n, v in rendered.loudness_lufs.items()))
        out.append("level match: " + ", ".join(f"{n} {v:+.2f} dB" for n, v in rendered.offsets_db.items()))
    if rendered.null is not None:
        null = rendered.null
        out.append(
            f"null test, twin against analog: {null.raw.overall_db:.1f} dB; {null.aligned.overall_db:.1f} dB with "
            f"{null.gain_db:+.3f} dB and {null.delay_samples:+.3f} samples taken out"
        )
    return out


def _bands(centres: FloatArray, raw: NullLevels, aligned: NullLevels) -> list[tuple[float, float, float]]:
    return [(float(f), float(r), float(a)) for f, r, a in zip(centres, raw.bands_db, aligned.bands_db, strict=True)]


def _file(file: Written) -> dict[str, Any]:
    return {
        "name": file.path.name,
        "frames": file.frames,
        "channels": file.channels,
        "peak_dbfs": round(decibels(file.peak), 3) if file.peak else None,
        "overs": file.overs,
    }


def decibels(peak: float) -> float:
    """A peak against full scale, dB."""
    return 20.0 * math.log10(peak)


def _dbfs(peak: float) -> str:
    return f"{decibels(peak):.1f} dBFS" if peak else "none, silence"


def _overs(file: Written) -> str:
    return f", {file.overs} samples over full scale" if file.overs else ""


def _number(value: float) -> float | None:
    return round(value, 2) if math.isfinite(value) else None
