"""Where things are in the tree."""

from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
EXAMPLES = ROOT / "audio_examples"
