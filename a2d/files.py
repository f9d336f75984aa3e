"""Files appear whole or not at all."""

from __future__ import annotations

import contextlib
import os
import tempfile
from collections.abc import Mapping
from pathlib import Path

from a2d.errors import FileError


def write_all(folder: str | Path, files: Mapping[str, bytes | str]) -> tuple[Path, ...]:
    """Write `files` (name to content; text as UTF-8 with \\n) into `folder`, which is made when absent.

    Every file is first written beside its place under another name; only when all are there are they renamed, so that
    a full disk or a missing permission leaves what was there before.

    Raises
    ------
    FileError
        With the file's name and the system's reason.
    """
    target = Path(folder)
    written: list[tuple[Path, Path]] = []
    try:
        target.mkdir(parents=True, exist_ok=True)
        for name, content in files.items():
            written.append((_write_beside(target / name, content), target / name))
        for temporary, place in written:
            temporary.replace(place)
    except OSError as error:
        for temporary, _ in written:
            with contextlib.suppress(OSError):
                temporary.unlink(missing_ok=True)
        raise FileError(f"cannot write: {error.strerror or error} @ {error.filename or target}") from error
    return tuple(place for _, place in written)


def _write_beside(place: Path, content: bytes | str) -> Path:
    place.parent.mkdir(parents=True, exist_ok=True)
    handle, temporary = tempfile.mkstemp(dir=place.parent, prefix=f".{place.name}.")
    with os.fdopen(handle, "wb") as stream:
        stream.write(content.encode("utf-8") if isinstance(content, str) else content)
    Path(temporary).chmod(0o666 & ~_umask())
    return Path(temporary)


def _umask() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return mask
