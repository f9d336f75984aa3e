"""NAME_controls.h, compiled: the same rows and the same map as in Python, between positions too."""

from __future__ import annotations

import dataclasses
import json
from functools import cache
from pathlib import Path

import numpy as np
import pytest

from a2d.commands.delivery import delivery_of
from a2d.compare.between import interpolate
from a2d.conversion import Conversion, convert
from a2d.design.model import Design
from a2d.design.read import parse_design
from a2d.errors import RoundingError
from a2d.firmware.control_header import rounded_values
from a2d.firmware.manifest import manifest
from a2d.listening.moving import Change, render_moving
from a2d.wordlength.structures import VALUE_NAMES
from tests.support.c_build import COMPILERS, build_and_run
from tests.support.controls import HEAD, PRESENCE, TONE, control

HASH = "ab" * 32
GRID = control("bass", "tone.P1.position", 0, 1, "positions = 5", grid="tone_grid")
GRID += control("treble", "tone.P2.position", 0, 1, "positions = 4", grid="tone_grid")
LIFT = control("lift", "presence.gain", "12 dB", "-12 dB", 'error = "0.1 dB"')
SWITCH = '[[control]]\nname = "mode"\nmoves = ["air.gain"]\nvalues = ["0 dB", "3 dB", "6 dB"]\n'
AIR = '[[section]]\nname = "air"\nkind = "high_shelf"\nf0 = "9 kHz"\norder = 1\ngain = "3 dB"\n'


@cache
def converted() -> Conversion:
    return convert(design(""))


def with_firmware(firmware: str) -> Conversion:
    """The same tables for another number format, which nothing before the header looks at."""
    return dataclasses.replace(converted(), design=design(firmware))


def design(firmware: str) -> Design:
    head = HEAD.replace('"48 kHz"', '"48 kHz", "96 kHz"')
    return parse_design(head + firmware + PRESENCE + TONE + AIR + GRID + LIFT + SWITCH)


def written(firmware: str, folder: Path) -> tuple:
    conversion = with_firmware(firmware)
    delivery = delivery_of(conversion, HASH)
    for name, text in delivery.files.items():
        (folder / name).write_text(text)
    return conversion, delivery.header


PROGRAM = """
#include <stdio.h>
#include <string.h>
#include "cove_controls.h"
int main(void)
{{
    static {word} rows[COVE_SECTIONS][COVE_VALUES];
    double given[6];
    while (fread(given, sizeof(double), 6, stdin) == 6) {{
        double out[4];
        const uint32_t fs = given[5] > 0.5 ? 96000u : 48000u;
        memcpy(rows, cove_find(fs)->values, sizeof(rows));
        out[0] = cove_bass_to_index(given[0]);
        out[1] = cove_lift_to_index(given[2]);
        out[2] = cove_bass_from_index(out[0]);
        out[3] = cove_lift_from_index(out[1]);
        if (cove_tone_grid_rows(rows, fs, out[0], cove_treble_to_index(given[1])) != 1) return 2;
        if (cove_lift_rows(rows, fs, out[1]) != 1) return 3;
        if (cove_mode_rows(rows, fs, cove_mode_to_index(given[3])) != 1) return 4;
        if (cove_lift_rows(rows, 1u, 0.0) != 0) return 5;
        fwrite(out, sizeof(double), 4, stdout);
        fwrite(rows, sizeof(rows), 1, stdout);
    }}
    return 0;
}}
"""


@pytest.mark.parametrize("compiler", COMPILERS)
@pytest.mark.parametrize(
    ("firmware", "word"),
    [
        ("", np.float32),
        ('[firmware]\nnumber = "float64"\nfeedback = "negated"\norder = ["a2", "a1", "b0", "b2", "b1"]\n', np.float64),
        ('[firmware]\nnumber = "float32"\nstructure = "delta"\n', np.float32),
    ],
    ids=["f32", "f64_negated", "delta"],
)
def test_rows_and_map_as_in_python(compiler: str, firmware: str, word: type, tmp_path: Path) -> None:
    conversion, header = written(firmware, tmp_path)
    generator = np.random.default_rng(5)
    given = np.stack(
        [
            generator.uniform(-0.1, 1.1, 40),
            generator.uniform(-0.1, 1.1, 40),
            generator.uniform(-14.0, 14.0, 40),
            generator.integers(0, 3, 40).astype(float),
            np.zeros(40),
            generator.integers(0, 2, 40).astype(float),
        ],
        axis=-1,
    )
    program = PROGRAM.format(word={np.float32: "float", np.float64: "double"}[word])
    raw = build_and_run(compiler, tmp_path / "rows.c", program, stdin=given.tobytes())
    sections = len(header.section_names)
    dtype = np.dtype([("map", np.float64, 4), ("rows", word, (sections, 5))])
    got = np.frombuffer(raw, dtype=dtype)
    assert len(got) == 40
    grid, lift, mode = conversion.controls
    ends = [(0.0, 1.0), (0.0, 1.0), (-12.0, 12.0)]
    held = np.stack([np.clip(given[:, k], *ends[k]) for k in range(3)], axis=-1)
    knots = lift.group.axes[0].knots
    # The map is a division and a product, each rounded once: 1e-12 of indices up to some ten.
    np.testing.assert_allclose(got["map"][:, 0], held[:, 0] * 4.0, atol=1e-12)
    np.testing.assert_allclose(got["map"][:, 1], np.interp(-held[:, 2], -knots, np.arange(len(knots))), atol=1e-11)
    np.testing.assert_allclose(got["map"][:, 2:], held[:, [0, 2]], atol=1e-9)
    for table, scales in ((grid, held[:, :2]), (lift, held[:, 2:3]), (mode, given[:, 3:4])):
        for r, rate in enumerate(table.rates):
            mine = given[:, 5] == r
            rounded = rounded_values(header, rate.sos.reshape(-1, 6)).reshape(*rate.sos.shape[:-1], 5)
            wanted = interpolate(rounded, [axis.knots for axis in table.group.axes], scales[mine])
            rows = got["rows"][mine][:, list(table.places)].astype(np.float64)
            back = rows[..., [header.order.index(name) for name in VALUE_NAMES]]
            if header.feedback == "negated":
                back = back * np.array([1.0, 1.0, 1.0, -1.0, -1.0])
            # Interpolated in double precision on both sides, then rounded once to the word.
            np.testing.assert_allclose(back, wanted, rtol=2e-7 if word is np.float32 else 1e-12, atol=1e-9)


def test_the_main_table_holds_the_rows_of_the_design_s_own_setting(tmp_path: Path) -> None:
    conversion, header = written("", tmp_path)
    mode = conversion.controls[2]
    own = np.array(header.tables[0].values)[list(mode.places)]
    rows = rounded_values(header, mode.rates[0].sos[1])
    # The main table's last bits were chosen together, a step of 2^-24 of 2 either way.
    np.testing.assert_allclose(own, rows, atol=5e-7)


def test_the_manifest_has_tables_and_map() -> None:
    conversion = converted()
    content = json.loads(manifest(conversion, HASH))
    grid, lift, mode = content["controls"]
    assert [c["name"] for c in grid["controls"]] == ["bass", "treble"]
    assert np.array(grid["tables"][1]["sos"]).shape == (5, 4, 2, 6)
    np.testing.assert_array_equal(np.array(lift["tables"][0]["sos"]), conversion.controls[1].rates[0].sos)
    knots = np.array(lift["controls"][0]["scale_at_index"])
    scales = np.linspace(-12.0, 12.0, 1001)
    index = np.interp(-scales, -knots, np.arange(len(knots)))
    np.testing.assert_allclose(np.interp(index, np.arange(len(knots)), knots), scales, atol=1e-9)
    assert mode["controls"][0]["values_at_index"] == [[0.0], [3.0], [6.0]]
    assert lift["tables"][0]["interpolation"]["worst_db"] <= 0.1


def test_fixed_point_says_that_there_are_no_tables_in_c() -> None:
    conversion = with_firmware("[firmware]\nnumber = { bits = 32, fraction = 30 }\n")
    delivery = delivery_of(conversion, HASH)
    assert "cove_controls.h" not in delivery.files
    assert any("manifest has the tables" in line for line in delivery.lines)


def test_what_rounding_could_make_unstable_is_refused() -> None:
    low = HEAD.replace("48 kHz", "384 kHz") + PRESENCE.replace("3.2 kHz", "4 Hz")
    conversion = convert(parse_design(low + control("lift", "presence.gain", 3, -3, "positions = 3")))
    with pytest.raises(RoundingError, match="choose float64, or the delta structure"):
        delivery_of(conversion, HASH)


def test_a_delta_table_carries_the_same_section() -> None:
    low = HEAD.replace("48 kHz", "384 kHz") + PRESENCE.replace("3.2 kHz", "4 Hz")
    text = low + control("lift", "presence.gain", 3, -3, "positions = 3") + '[firmware]\nstructure = "delta"\n'
    assert "cove_controls.h" in delivery_of(convert(parse_design(text)), HASH).files


MOVING = """
#include <stdio.h>
#include <string.h>
#include "cove_controls.h"
#include "cove_kernel.h"
#define TOTAL 3000u
#define BEFORE 1000u
#define RAMP 480u
static double in[TOTAL], out[TOTAL], rows[COVE_SECTIONS][COVE_VALUES];
int main(void)
{
    static cove_filter filter;
    cove_set moved = *cove_find(48000u);
    if (fread(in, sizeof(*in), TOTAL, stdin) != TOTAL) return 2;
    memcpy(rows, moved.values, sizeof(rows));
    moved.values = (const double (*)[COVE_VALUES])rows;
    if (!cove_lift_rows(rows, 48000u, cove_lift_to_index(7.5))) return 3;
    cove_use(&filter, &moved);
    cove_reset(&filter);
    cove_process(&filter, in, out, BEFORE);
    if (!cove_lift_rows(rows, 48000u, cove_lift_to_index(-3.3))) return 3;
    cove_ramp(&filter, &moved, RAMP);
    cove_process(&filter, in + BEFORE, out + BEFORE, TOTAL - BEFORE);
    fwrite(out, sizeof(*out), TOTAL, stdout);
    return 0;
}
"""


@pytest.mark.parametrize("structure", ["direct_form_1", "transposed_direct_form_2", "delta"])
def test_the_kernel_ramps_to_interpolated_rows_as_the_simulation_does(structure: str, tmp_path: Path) -> None:
    """Table, interpolation, set and ramp in C, against the same in Python."""
    _, header = written(f'[firmware]\nnumber = "float64"\nstructure = "{structure}"\n', tmp_path)
    conversion = converted()
    lift = conversion.controls[1]
    samples = np.random.default_rng(8).standard_normal(3000)
    raw = build_and_run("gcc", tmp_path / "moving.c", MOVING, stdin=samples.tobytes())
    knots = [axis.knots for axis in lift.group.axes]
    rows = np.tile(np.array(conversion.judged[0].twin.sos), (2, 1, 1))
    rows[:, list(lift.places)] = interpolate(lift.rates[0].sos, knots, np.array([[7.5], [-3.3]]))
    wanted = render_moving(rows, samples, structure, Change("ramp", 1000, 480))
    # The kernel adds 480 steps, each rounded to 1e-16 of its value; times the sections' gain at low frequencies.
    np.testing.assert_allclose(np.frombuffer(raw), wanted, rtol=0, atol=1e-9)
    assert header.structure == structure
