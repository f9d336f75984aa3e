"""Peak memory of `a2d render` over 30 minutes of 48 kHz stereo, all versions; exits 1 at 300 MB or more.

python -m tests.benchmarks.render_memory
"""

from __future__ import annotations

import sys
import tempfile
import time
from pathlib import Path

import numpy as np
import soundfile

from a2d.cli import main as a2d

LIMIT_MB = 300


def main() -> int:
    design = Path(__file__).parents[2] / "audio_examples" / "harbour_eq.toml"
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "long.wav"
        block = (3_000 * np.random.default_rng(0).standard_normal((480_000, 2))).astype(np.int16)
        with soundfile.SoundFile(path, "w", 48_000, 2, "PCM_16") as file:
            for _ in range(180):
                file.write(block)
        start = time.perf_counter()
        a2d(["render", str(design), str(path), "--out", folder])
        took = time.perf_counter() - start
    used = int(Path("/proc/self/status").read_text().split("VmHWM:")[1].split()[0]) / 1024
    print(f"30 minutes of 48 kHz stereo, three versions: {used:.0f} MB (allowed {LIMIT_MB}), {took:.0f} s")
    return 0 if used < LIMIT_MB else 1


if __name__ == "__main__":
    sys.exit(main())
