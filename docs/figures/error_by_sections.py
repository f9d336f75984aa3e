"""The table of docs/fidelity.md: largest magnitude error in dB by method and number of sections.

python docs/figures/error_by_sections.py
"""

from __future__ import annotations

from a2d.analog.chain import AnalogChain
from a2d.analog.kinds.equalisers import high_shelf, peaking
from a2d.analog.kinds.filters import lowpass
from a2d.compare.errors import compare
from a2d.digital.twin import make_twin

RATES = (44_100.0, 48_000.0, 96_000.0)
WAYS = (
    {"method": "bilinear"},
    {"method": "magnitude_matched"},
    {"method": "minimax"},
    {"method": "minimax", "scope": "chain"},
    {"method": "minimax", "scope": "chain", "extra_sections": 1},
    {"method": "minimax", "scope": "chain", "extra_sections": 2},
)


def chains() -> dict[str, AnalogChain]:
    """The chains of the table."""
    made = {
        "peaking 16 kHz, Q 1.4, +12 dB": [peaking(16_000.0, 1.4, 12.0)],
        "peaking 12 kHz, Q 0.5, -12 dB": [peaking(12_000.0, 0.5, -12.0)],
        "high shelf 12 kHz, +12 dB": [high_shelf(12_000.0, 12.0, 0.7071)],
        "low-pass 1 kHz, Q 0.7071": [lowpass(1000.0, 0.7071)],
        "three sections: peaking 120 Hz +5 dB, peaking 9 kHz -6 dB, high shelf 12 kHz +4 dB": [
            peaking(120.0, 0.8, 5.0),
            peaking(9000.0, 1.1, -6.0),
            high_shelf(12_000.0, 4.0, 0.7),
        ],
    }
    found = {}
    for name, parts in made.items():
        b = [s.b.reshape(-1, 3)[0] for s in parts]
        a = [s.a.reshape(-1, 3)[0] for s in parts]
        found[name] = AnalogChain.of([f"s{i}" for i in range(len(parts))], b=b, a=a)
    replay = AnalogChain.of(["replay"], b=[[0.0, 318e-6, 1.0]], a=[[3180e-6 * 75e-6, 3255e-6, 1.0]])
    return found | {"disc replay, 3180/318/75 µs": replay}


def main() -> None:
    for name, chain in chains().items():
        for rate in RATES:
            errors = [abs(compare(chain, make_twin(chain, rate, **way)).magnitude_db.worst) for way in WAYS]
            print(f"| {name} | {rate / 1000.0:g} kHz | " + " | ".join(f"{e:.2g}" for e in errors) + " |")


if __name__ == "__main__":
    main()
