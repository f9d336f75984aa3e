"""Short sound for the report's players: noise through the analog model and the twin, at a quiet and equal gain."""

from __future__ import annotations

import io

import numpy as np
import soundfile

from a2d.arrays import FloatArray
from a2d.conversion import Conversion
from a2d.listening.quantise import ENCODINGS, to_steps, triangular_dither
from a2d.listening.render import signal_source
from a2d.listening.signals import SignalSettings, pink
from a2d.report.content import Recording
from a2d.report.text import error_text, rate_label, signed

LEVEL_DBFS, SECONDS, SEED = -30.0, 2.5, 1
HIGHEST_PEAK = 0.5  # -6 dBFS: what boosts beyond it is turned down, all versions alike
VERSIONS = {
    "input": "Pink noise, unprocessed",
    "analog": "Pink noise through the analog model",
    "twin": "Pink noise through the twin",
}


def examples(conversion: Conversion) -> tuple[Recording, ...]:
    """Pink noise at the design's lowest rate, where the twin's error is largest, as 16-bit WAV.

    Raises
    ------
    AudioError
        The analog model does not settle, so that there is no sound to play.
    """
    judged = min(conversion.judged, key=lambda j: j.twin.sample_rate_hz)
    rate = float(judged.twin.sample_rate_hz)
    samples = pink(SignalSettings(rate, LEVEL_DBFS, SECONDS, seed=SEED))
    versions = next(signal_source(samples, conversion.chain, judged.twin)(tuple(VERSIONS)))
    peak = max(float(np.abs(v).max()) for v in versions.values())
    gain = min(1.0, HIGHEST_PEAK / peak)
    level = LEVEL_DBFS + 20.0 * float(np.log10(gain))
    worst = judged.comparison.magnitude_db
    listen = f"The twin departs most by {error_text(worst.worst, 'dB', worst.at_hz)}."
    return tuple(
        Recording(
            f"{title}, {rate_label(rate)}",
            f"Input at {signed(level)} dBFS RMS. {listen if name == 'twin' else ''}".strip(),
            wav_16(versions[name][0] * gain, rate),
        )
        for name, title in VERSIONS.items()
    )


def wav_16(samples: FloatArray, sample_rate_hz: float) -> bytes:
    """Mono samples [n] within ±1 as a 16-bit WAV file with triangular dither."""
    generator = np.random.default_rng(SEED)
    steps, _ = to_steps(samples, ENCODINGS["16"], lambda shape: triangular_dither(generator, shape))
    buffer = io.BytesIO()
    soundfile.write(buffer, steps.astype(np.int16), round(sample_rate_hz), format="WAV", subtype="PCM_16")
    return buffer.getvalue()
