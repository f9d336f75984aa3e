"""Reading design files: every fault at once, each with place, value and what is allowed."""

from __future__ import annotations

from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from a2d.design.kinds import Peaking, kinds_by_name
from a2d.design.read import parse_design, read_design_file
from a2d.errors import DesignError, FileError

HEAD = '[design]\nname = "demo"\nsample_rates = ["48 kHz"]\n'
BELL = '[[section]]\nname = "bell"\nkind = "peaking"\nf0 = "1 kHz"\ngain = "6 dB"\nq = 1\n'


def faults_of(text: str) -> list[str]:
    with pytest.raises(DesignError) as caught:
        parse_design(text, "demo.toml")
    return [str(fault) for fault in caught.value.faults]


def test_reads_a_section() -> None:
    design = parse_design(HEAD + BELL)
    section = design.sections[0]
    assert isinstance(section, Peaking)
    assert (section.f0, section.gain, section.q, section.q_meaning) == (1000.0, 6.0, 1.0, "w3c")


def test_all_faults_are_collected_in_order() -> None:
    text = """
[design]
name = "9x"
sample_rates = ["48 kHz", "foo"]
metod = "bilinear"
[[section]]
name = "presence"
kind = "peaking"
f0 = "10 nF"
gain = "4.5 dB"
qq = 3
[[section]]
name = "x"
kind = "peeking"
[[section]]
name = "y"
kind = "lowpass"
order = 3
f0 = 100
"""
    assert faults_of(text) == [
        'there is no "metod" here; nearest is "method" @ demo.toml: design',
        "is not a quantity ('foo', expected a value in Hz with or without prefix) @ demo.toml: design.sample_rates 2",
        'there is no "qq" here; nearest is "q" @ demo.toml: section "presence"',
        "has 'nF' after the number ('10 nF', expected a value in Hz with or without prefix) "
        '@ demo.toml: section "presence".f0',
        'there is no kind \'peeking\'; nearest is "peaking" @ demo.toml: section "x"',
        'is not one of: 1, 2 (3) @ demo.toml: section "y".order',
    ]


# (what is appended to a valid design, what the one fault says)
FILTER = '[[section]]\nname = "a"\nkind = "butterworth"\n'
SINGLE = [
    ('[[section]]\nname = "a"\nkind = "lowpass"\nf0 = 100\n', "q is missing"),
    ('[[section]]\nname = "a"\nkind = "lowpass"\nf0 = 100\norder = 1\nq = 1\n', "q has no meaning for order 1"),
    ('[[section]]\nname = "a"\nkind = "peaking"\nf0 = 100\ngain = 3\n', "either q or bandwidth"),
    ('[[section]]\nname = "a"\nkind = "peaking"\nf0 = 100\ngain = 3\nq = 1\nbandwidth = 1\n', "either q or bandwidth"),
    (
        '[[section]]\nname = "a"\nkind = "peaking"\nf0 = 100\ngain = 3\nbandwidth = 1\nbandwidth_at = "-3 dB"\n',
        "needs a gain beyond 3.01 dB",
    ),
    ('[[section]]\nname = "a"\nkind = "low_shelf"\nf0 = 100\ngain = 3\n', "either q or slope"),
    ('[[section]]\nname = "a"\nkind = "low_shelf"\nf0 = 100\ngain = 3\nslope = -1\n', "slope is out of range"),
    (
        '[[section]]\nname = "a"\nkind = "butterworth"\nresponse = "bandpass"\norder = 2\nf0 = 9\n',
        "takes band and not f0",
    ),
    (
        '[[section]]\nname = "a"\nkind = "butterworth"\nresponse = "lowpass"\norder = 99\nf0 = 9\n',
        "order is out of range",
    ),
    ('[[section]]\nname = "a"\nkind = "time_constants"\npoles = ["1 us"]\nzeros = [1, 2]\n', "more zeros than poles"),
    ('[[section]]\nname = "a"\nkind = "polynomial"\nb = [1, 0]\na = [1]\n', "b is of higher order than a"),
    ('[[section]]\nname = "bell"\nkind = "gain"\n', 'two sections are called "bell"'),
    ('[[section]]\nname = "a"\nkind = "gain"\nfactor = 0\n', "factor is zero"),
    ('[[section]]\nname = "a"\n', "exactly one of: kind"),
    ("[limits]\nband = [100, 10]\n", "band must rise"),
    ("[limitz]\n", 'nearest is "limits"'),
]


@pytest.mark.parametrize(("addition", "message"), SINGLE)
def test_one_fault(addition: str, message: str) -> None:
    faults = faults_of(HEAD + BELL + addition)
    assert len(faults) == 1
    assert message in faults[0]
    assert "@ demo.toml" in faults[0]


def test_missing_parts_are_named() -> None:
    assert faults_of("") == ["design is missing (needed) @ demo.toml", "section is missing (needed) @ demo.toml"]


def test_not_toml() -> None:
    (fault,) = faults_of("[design\n")
    assert fault.startswith("is not TOML")


@pytest.mark.parametrize(
    "text", ['R1 = { resistor = "1k" }\nR1 = { resistor = "2k" }\n', "R1 = 1\nR1 = 2", "R1 = 1\nR1 = 2 # again\n\n"]
)
def test_a_name_that_is_there_twice_is_named(text: str) -> None:
    (fault,) = faults_of(f"[section.network.parts]\n{text}")
    assert fault.startswith('is not TOML: "R1" is there twice')


def test_a_missing_file_is_named(tmp_path: Path) -> None:
    with pytest.raises(FileError, match=r"cannot read the design: No such file or directory @ .*absent\.toml"):
        read_design_file(tmp_path / "absent.toml")


def test_hash_is_of_the_bytes(tmp_path: Path) -> None:
    path = tmp_path / "demo.toml"
    path.write_text(HEAD + BELL)
    # sha256sum of the same bytes, by the standard library's other door
    import hashlib

    assert read_design_file(path).sha256 == hashlib.new("sha256", path.read_bytes()).hexdigest()


def test_kind_names_are_those_in_the_structs() -> None:
    from typing import get_args, get_type_hints

    for name, struct in kinds_by_name().items():
        assert get_args(get_type_hints(struct)["kind"]) == (name,)


@given(st.one_of(st.text(max_size=300), st.binary(max_size=300)))
@settings(max_examples=200)
def test_any_text_is_a_design_or_one_error(text: str | bytes) -> None:
    with pytest.raises(DesignError) as caught:  # no short random text is a whole design
        parse_design(text)
    assert caught.value.faults


VALUES = st.recursive(
    st.one_of(st.booleans(), st.integers(-(10**20), 10**20), st.floats(), st.text(max_size=8)),
    lambda inner: st.one_of(st.lists(inner, max_size=3), st.dictionaries(st.text(max_size=5), inner, max_size=3)),
    max_leaves=6,
)
KEYS = st.sampled_from(
    ["f0", "q", "gain", "kind", "order", "bandwidth", "band", "name", "match", "method", "x", "poles"]
)


@given(st.dictionaries(KEYS, VALUES, max_size=6), st.sampled_from(sorted(kinds_by_name())))
@settings(max_examples=300)
def test_any_section_table_is_read_or_one_error(table: dict[str, object], kind: str) -> None:
    import msgspec

    from a2d.design.model import Design
    from a2d.design.read import check_design

    whole = {"design": {"name": "demo", "sample_rates": [48000]}, "section": [{"kind": kind, "name": "a"} | table]}
    try:
        design = check_design(whole, "demo.toml")
    except DesignError as error:
        assert error.faults  # noqa: PT017 - both outcomes are allowed; the faults must be there
    else:
        assert isinstance(design, Design)
        assert msgspec.structs.asdict(design)
