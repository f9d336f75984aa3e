"""`a2d render` of a file against a bare scipy.signal.sosfilt over the same audio; exits 1 below half its speed.

python -m tests.benchmarks.render_speed
"""

from __future__ import annotations

import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path

import numpy as np
import soundfile
from scipy.signal import sosfilt

from a2d.digital.twin import make_twin
from a2d.listening.render import VERSIONS, Output, block_source, write_versions
from a2d.listening.wav import read_blocks
from tests.support.chains import equaliser

RATE, SECONDS, CHANNELS, NEEDED = 48_000, 120, 2, 0.5


def best_of_each(work: dict[str, Callable[[], object]], times: int = 7) -> dict[str, float]:
    """The shortest run of each, s; the runs take turns, so that a busy machine is busy for all."""
    best = dict.fromkeys(work, float("inf"))
    for _ in range(times):
        for name, job in work.items():
            start = time.perf_counter()
            job()
            best[name] = min(best[name], time.perf_counter() - start)
    return best


def main() -> int:
    chain = equaliser()
    twin = make_twin(chain, float(RATE), match_hz=900.0)
    noise = 0.05 * np.random.default_rng(0).standard_normal((RATE * SECONDS, CHANNELS))
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "x.wav"
        soundfile.write(path, noise, RATE, subtype="PCM_24")

        def render(versions: tuple[str, ...], encoding: str) -> None:
            source = block_source(lambda: read_blocks(path), CHANNELS, chain, twin)
            write_versions(source, RATE, CHANNELS, len(noise), Output(Path(folder) / "y", versions, encoding))

        took = best_of_each(
            {
                "sosfilt": lambda: sosfilt(twin.sos, noise, axis=0),
                "twin, 24 bits": lambda: render(("twin",), "24"),
                "twin, 16 bits": lambda: render(("twin",), "16"),
                "analog, twin and difference, 24 bits": lambda: render(VERSIONS[1:], "24"),
            }
        )
    bare = took.pop("sosfilt")
    print(f"sosfilt, {len(twin)} sections, {SECONDS} s of {CHANNELS} channels: {bare:.3f} s")
    for name, seconds in took.items():
        print(f"render {name}, file to file: {seconds:.3f} s, {bare / seconds:.2f} of its speed")
    return 0 if bare / took["twin, 24 bits"] >= NEEDED else 1


if __name__ == "__main__":
    sys.exit(main())
