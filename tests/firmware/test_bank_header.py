"""Banks as parallel branches: the twin against scipy, and its C against a run in Python."""

import json
import re
from dataclasses import replace

import numpy as np
import pytest
from scipy import signal

import a2d
from a2d.cli import main
from a2d.compare.banks import parallel_banks
from a2d.design.read import parse_design
from a2d.errors import HeaderError
from a2d.firmware.bank_header import bank_header, bank_symbol, round_bank
from tests.support.c_build import COMPILERS, build_and_run
from tests.support.paths import ROOT

DESIGN = (ROOT / "audio_examples" / "lighthouse_bank.toml").read_text(encoding="utf-8")
DESIGN = DESIGN.replace('method = "minimax"', 'method = "bilinear"')  # which scipy has too
F = np.geomspace(10.0, 20_000.0, 200)


@pytest.fixture(scope="module")
def bank():
    (judged,) = parallel_banks(parse_design(DESIGN))
    return judged


def test_parallel_twin_is_the_sum_of_scipys_bilinear_bands(bank):
    """Each band prewarped at its own f0: scipy's bilinear transform with the rate that makes it so."""
    for twin in bank.twins:
        rate = twin.sample_rate_hz
        expected = np.full(len(F), bank.bank.direct, dtype=complex)
        for mix, sections in zip(bank.bank.mix, bank.bank.bands, strict=True):
            f0 = float(sections.f0_hz[0])
            bz, az = signal.bilinear(sections.b[0], sections.a[0], np.pi * f0 / np.tan(np.pi * f0 / rate))
            expected += mix * signal.freqz(bz, az, F, fs=rate)[1]
        # freqz adds up polynomials near z = 1: it loses some (rate/f)² roundings, 1e-16·(96000/10)²
        assert np.abs(twin.response(F) - expected).max() < 2e-8


def test_comparison_holds_between_grid_points(bank):
    f = np.geomspace(20.0, 20_000.0, 20_001)
    for twin, comparison in zip(bank.twins, bank.comparisons, strict=True):
        error = 20 * np.log10(np.abs(twin.response(f) / bank.bank.response(f)))
        assert abs(comparison.magnitude_db.worst) >= np.abs(error).max() - 1e-9
        assert abs(comparison.magnitude_db.worst) == pytest.approx(np.abs(error).max(), rel=1e-4)


def program(symbol, number, rate):
    word = {"float32": "float", "float64": "double"}[number]
    return f"""
#include <stdio.h>
#include "bank.h"
int main(void)
{{
    {word} state[{symbol.upper()}_SECTIONS][2] = {{{{0}}}};
    int n;
    for (n = 0; n < 4000; n++) {{
        {word} x = n == 0 ? ({word})1 : ({word})0;
        printf("%.17g\\n", (double){symbol}_sample({symbol}_{rate}, {symbol}_direct, {symbol}_mix, state, x));
    }}
    return 0;
}}
"""


@pytest.mark.parametrize("compiler", COMPILERS)
@pytest.mark.parametrize("number", ["float32", "float64"])
def test_the_header_compiles_strictly_and_computes_the_twin(bank, compiler, number, tmp_path):
    twins = [round_bank(twin, number) for twin in bank.twins]
    (tmp_path / "bank.h").write_text(bank_header("demo_room", "0" * 64, twins, number))
    out = build_and_run(compiler, tmp_path / "main.c", program("demo_room", number, 48000))
    got = np.array([float(x) for x in out.split()])
    impulse = np.zeros(4000)
    impulse[0] = 1.0
    twin = twins[0]
    expected = twin.direct * impulse
    for mix, band in zip(twin.mix, twin.bands, strict=True):
        expected = expected + mix * signal.sosfilt(band.sos, impulse)
    # float32: a rounding of 6e-8 a sample and branch, fed back by the narrowest band for some 1000 samples
    assert np.abs(got - expected).max() < (2e-6 if number == "float32" else 1e-13)


def test_command_writes_header_and_manifest_and_tells_the_errors(bank, tmp_path, capsys):
    design = tmp_path / "bank.toml"
    design.write_text(DESIGN)
    assert main(["convert", str(design), "--out", str(tmp_path / "out")]) == 0
    text = " ".join(capsys.readouterr().out.split())
    assert re.search(r"room in parallel at 48 kHz: [+-][0-9.]+ dB at .* in float32", text)
    assert (tmp_path / "out" / "lighthouse_bank_room.bank.h").exists()
    (written,) = json.loads((tmp_path / "out" / "lighthouse_bank.twin.json").read_text())["banks"]
    assert written["mix"] == bank.bank.mix.tolist()
    assert np.array(written["twins"][1]["sos"][3]) == pytest.approx(bank.twins[1].bands[3].sos, abs=0)


def test_a_band_above_the_band_says_where_it_is_exact(tmp_path, capsys):
    circuit = 'circuit = "rc_lowpass"\nparts = { R1 = "1k", C1 = "1n" }\n'
    design = tmp_path / "bank.toml"
    start = DESIGN.index("[[section.band]]")
    design.write_text(DESIGN[:start] + f'[[section.band]]\nname = "air"\n{circuit}')
    assert main(["convert", str(design), "--out", str(tmp_path / "out")]) == 0
    text = " ".join(capsys.readouterr().out.split())
    assert "in float32; exact at 20 kHz for an f0 above the band: air" in text


def test_fixed_words_are_refused(bank):
    with pytest.raises(HeaderError, match="float32 or float64"):
        round_bank(bank.twins[0], "fixed")


def test_two_bands_of_one_c_name_are_refused(bank):
    twin = replace(bank.twins[0], names=("a-b", "a b", *bank.twins[0].names[2:]))
    with pytest.raises(HeaderError, match="two bands are called A_B"):
        bank_header("demo_room", "0" * 64, [twin], "float64")


def test_symbol():
    assert bank_symbol("desk", "room 1") == "desk_room_1"


def convert(tmp_path, text):
    path = tmp_path / "bank.toml"
    path.write_text(text)
    return main(["convert", str(path), "--out", str(tmp_path / "out")])


def test_a_limit_that_only_the_parallel_form_breaks(tmp_path, capsys):
    """The demo's cascade stays within 0.05 dB at 48 kHz; its parallel form, band by band, is 0.79 dB off."""
    text = (ROOT / "audio_examples/lighthouse_bank.toml").read_text() + '\n[limits]\nmagnitude = "0.1 dB"\n'
    assert convert(tmp_path, text) == 1
    said = capsys.readouterr().err
    assert "limit broken at 48000 Hz by room in parallel: magnitude error +0.78" in said
    assert not a2d.convert(parse_design(text)).within_limits
    (bank,) = json.loads((tmp_path / "out/lighthouse_bank.twin.json").read_text())["banks"]
    assert [twin["within_limits"] for twin in bank["twins"]] == [False, False]


def test_a_phase_weight_reaches_the_bands(tmp_path):
    """Bands that are fitted in phase too add up as they should."""
    text = (ROOT / "audio_examples/lighthouse_bank.toml").read_text()
    (plain,) = parallel_banks(parse_design(text))
    (weighted,) = parallel_banks(parse_design(text.replace("[design]", "[design]\nweight_phase = 1", 1)))
    for before, after in zip(plain.comparisons, weighted.comparisons, strict=True):
        assert abs(after.phase_deg.worst) < 0.5 * abs(before.phase_deg.worst)


SMALL = """
[design]
name = "x"
sample_rates = ["48 kHz"]
"""
BANK = """
[[section]]
name = "{name}"
form = "parallel"
[[section.band]]
name = "b"
kind = "bandpass"
f0 = "1 kHz"
q = 1
"""


@pytest.mark.parametrize("other", ["my_room", "MY ROOM"])
def test_two_banks_with_one_name_in_c_are_refused(tmp_path, capsys, other):
    """The second would have taken the first one's file."""
    assert convert(tmp_path, SMALL + BANK.format(name="my room") + BANK.format(name=other)) == 2
    assert f'the banks "my room" and "{other}" have the same name in C' in capsys.readouterr().err


def test_firmware_keys_that_do_not_reach_the_bank_are_named(tmp_path, capsys):
    assert convert(tmp_path, SMALL + BANK.format(name="room") + '[firmware]\nfeedback = "negated"\n') == 0
    assert "feedback of [firmware] does not apply to .bank.h" in " ".join(capsys.readouterr().out.split())
