"""Component spread: seeded draws against the propagation of small tolerances and the simulator, corners, statement."""

from __future__ import annotations

from pathlib import Path

import msgspec
import numpy as np
import pytest
import scipy.stats

from a2d.analog.build import build_chain
from a2d.analog.spread import spread_model
from a2d.analog.spread_causes import corners, first_order_deviation_db, sensitivities
from a2d.analog.spread_draws import DEVIATIONS, DISTRIBUTIONS, draw_factors, run_spread
from a2d.design.model import Design
from a2d.design.network import Network
from a2d.design.read import parse_design
from a2d.design.unit import measured_unit
from a2d.errors import DesignError, ParameterError
from tests.support import spice
from tests.support.controls import HEAD, PRESENCE, TONE
from tests.support.tools import need

F = np.geomspace(20.0, 20e3, 60)
BOOST = TONE.replace("position = 0.5", "position = 0.2", 1)  # away from flat, where everything cancels
RC = """
[[section]]
name = "rc"
circuit = "rc_lowpass"
parts = { R1 = "10k", C1 = "1.6n" }
"""


def design(spread: str, sections: str = BOOST) -> Design:
    return parse_design(HEAD + sections + "[spread]\n" + spread)


def test_small_tolerances_spread_as_the_first_order_says() -> None:
    """JCGM 100:2008 equation 10. The standard deviation of D draws is itself known to 1/sqrt(2D)."""
    units = 8_000
    model = spread_model(design('resistors = "1 %"\ncapacitors = "2 %"\ndistribution = "normal"\n'), F)
    drawn = run_spread(model, units, seed=7).deviation_db
    wanted = first_order_deviation_db(model)
    loud = wanted > 1e-3 * wanted.max()
    # 5 standard errors of the sample (60 correlated frequencies), and 1 % for the second order of 2 % tolerances.
    assert np.max(np.abs(drawn[loud] / wanted[loud] - 1.0)) < 5.0 / np.sqrt(2.0 * units) + 0.01


def test_bands_of_a_single_part_are_its_quantiles() -> None:
    """|H| of an RC low-pass falls with C: its percentiles are those of C, in closed form."""
    model = spread_model(design('capacitors = "10 %"\n', RC), np.array([10e3]))
    result = run_spread(model, 40_000, seed=3)

    def level(share: float) -> float:
        c = 1.6e-9 * (1.0 + 0.1 * share)
        return float(-10.0 * np.log10(1.0 + (2.0 * np.pi * 10e3 * 10e3 * c) ** 2))

    # A percentile p of D uniform draws is known to sqrt(p(1-p)/D) = 1.1e-3 of the probability, 2.2e-3 of the tolerance.
    slope = abs(level(1.0) - level(-1.0)) / 2.0
    for got, share in zip(result.percentiles_db[:, 0], (0.9, 0.0, -0.9), strict=True):
        assert got == pytest.approx(level(share), abs=5.0 * 2.2e-3 * slope)
    assert result.lowest_db[0] >= level(1.0) - 1e-6
    assert result.highest_db[0] <= level(-1.0) + 1e-6
    assert result.within_db(1.0) == pytest.approx(max(abs(level(s) - level(0.0)) for s in (-1, 1)), rel=1e-2)


@pytest.mark.parametrize("name", DISTRIBUTIONS)
def test_distributions(name: str) -> None:
    """Against scipy's, by the Kolmogorov-Smirnov test, and nothing beyond the tolerance."""
    shares = DISTRIBUTIONS[name](np.random.default_rng(11), 20_000)
    law = {"uniform": scipy.stats.uniform(-1.0, 2.0), "normal": scipy.stats.truncnorm(-3.0, 3.0, 0.0, 1.0 / 3.0)}[name]
    assert scipy.stats.kstest(shares, law.cdf).pvalue > 1e-3
    assert np.max(np.abs(shares)) <= 1.0
    assert DEVIATIONS[name] == pytest.approx(law.std(), rel=1e-12)


def test_the_same_seed_draws_the_same_units() -> None:
    model = spread_model(design('resistors = "1 %"\n'), F)
    first, again, other = (run_spread(model, 50, seed) for seed in (4, 4, 5))
    np.testing.assert_array_equal(first.percentiles_db, again.percentiles_db)
    assert np.any(first.percentiles_db != other.percentiles_db)


def test_matched_parts_deviate_alike_and_a_part_may_have_its_own() -> None:
    text = 'resistors = "1 %"\ncapacitors = "5 %"\nmatched = [["tone.C1", "tone.C2"]]\n'
    text += '[spread.parts]\n"tone.C2" = { tolerance = "2 %" }\n"tone.R4" = { distribution = "normal" }\n'
    model = spread_model(design(text), F)
    names = [part.name for part in model.parts]
    factors = draw_factors(model, 2000, 1)
    c1, c2 = (factors[:, names.index(n)] - 1.0 for n in ("tone.C1", "tone.C2"))
    np.testing.assert_allclose(c1 / 0.05, c2 / 0.02, rtol=1e-9)
    assert np.max(np.abs(c1)) <= 0.05
    assert np.std(factors[:, names.index("tone.R4")] - 1.0) == pytest.approx(0.01 * DEVIATIONS["normal"], rel=0.1)
    rest = np.corrcoef(factors[:, [names.index(n) for n in ("tone.C1", "tone.C3", "tone.R1")]].T)
    assert np.max(np.abs(rest - np.eye(3))) < 0.12  # 5/sqrt(2000)


def test_corners_agree_with_the_circuit_simulator(tmp_path: Path) -> None:
    """The worst cases themselves, part by part, in ngspice; and no drawn unit lies outside them."""
    f = np.geomspace(20.0, 20e3, 16)
    chosen = design('resistors = "1 %"\ncapacitors = "5 %"\npotentiometers = "2 %"\n')
    model = spread_model(chosen, f)
    found = corners(model)
    for corner in np.unique([*found.lowest_at[::5], *found.highest_at[::5]]):
        network = changed(chosen.sections[0].network, model, found.factors[corner])  # type: ignore[attr-defined]
        f_spice, h = spice.response(network, need("ngspice"), tmp_path, decade=5, start=20.0, stop=2e4)
        at = spread_model(chosen, f_spice)
        # ngspice: 1e-4 Ω in place of none, a gain of 1e9 in place of infinite.
        assert np.max(np.abs(at.response(found.factors[corner : corner + 1])[0] / h - 1.0)) < 2e-6
    drawn = run_spread(model, 2000, 1)
    assert np.all(drawn.highest_db <= found.highest_db + 1e-5)
    assert np.all(drawn.lowest_db >= found.lowest_db - 1e-5)


def changed(network: Network, model: object, factors: np.ndarray) -> Network:
    """The network with its parts' values multiplied, on the design's own structs."""
    parts = dict(network.parts)
    for part, factor in zip(model.parts, factors, strict=True):  # type: ignore[attr-defined]
        name = part.name.removeprefix("tone.")
        key = next(k for k in ("resistor", "capacitor", "inductor", "potentiometer") if hasattr(parts[name], k))
        parts[name] = msgspec.structs.replace(parts[name], **{key: float(getattr(parts[name], key)) * factor})
    return msgspec.structs.replace(network, parts=parts)


def test_many_parts_take_the_corners_of_their_slopes() -> None:
    """With more than ten parts: against every corner of a circuit small enough to try them all."""
    chosen = design('resistors = "0.1 %"\ncapacitors = "0.5 %"\n')
    model = spread_model(chosen, F)
    assert model.groups <= 10
    everything = corners(model)
    more = spread_model(
        design(
            'resistors = "0.1 %"\ncapacitors = "0.5 %"\n',
            BOOST + RC + RC.replace('"rc"', '"rc2"').replace("1.6n", "2n"),
        ),
        F,
    )
    assert more.groups > 10
    few = corners(more)
    assert len(few.factors) < 300
    assert np.all(few.highest_db - more.nominal_db() >= everything.highest_db - model.nominal_db() - 1e-6)


def test_sensitivities_of_an_rc_low_pass() -> None:
    """At the corner d(level)/d(ln C) = -(20/ln 10)·(wRC)²/(1 + (wRC)²)."""
    f = np.array([1.0 / (2.0 * np.pi * 10e3 * 1.6e-9)])
    rows = sensitivities(spread_model(design('capacitors = "10 %"\nresistors = "1 %"\n', RC), f))
    assert [row.name for row in rows] == ["rc.C1", "rc.R1"]
    for row in rows:
        assert row.db_per_percent == pytest.approx(-0.01 * 20.0 / np.log(10.0) / 2.0, rel=1e-6)
    assert rows[0].contribution_db == pytest.approx(10.0 * 0.01 * 20.0 / np.log(10.0) / 2.0, rel=1e-6)


def test_what_does_not_vary_is_part_of_the_response() -> None:
    model = spread_model(design('resistors = "1 %"\n', BOOST + PRESENCE), F)
    chain = build_chain(design('resistors = "1 %"\n', BOOST + PRESENCE))
    np.testing.assert_allclose(model.nominal_db(), 20.0 * np.log10(np.abs(chain.response(F))), atol=1e-9)


def test_a_measured_unit_stands_in_for_the_nominal_one() -> None:
    text = '[spread.measured]\n"tone.C1" = "23.1n"\n"tone.R1" = "9.93 kΩ"\n'
    unit = measured_unit(parse_design(HEAD + BOOST + text))
    parts = unit.sections[0].network.parts  # type: ignore[attr-defined]
    assert (float(parts["C1"].capacitor), float(parts["R1"].resistor)) == pytest.approx((23.1e-9, 9930.0))
    assert float(parts["C2"].capacitor) == 22e-9
    with pytest.raises(ParameterError, match="no measured values"):
        measured_unit(parse_design(HEAD + BOOST))


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ('[spread.measured]\n"tone.C9" = "1n"\n', "no .C9."),
        ('[spread.measured]\n"tone.C1" = "1k"\n', "tone.C1"),
        ("[spread]\nunits = 5\n", "allowed 10 to"),
        ('[spread]\nmatched = [["tone.C1"]]\n', "group of one part"),
        ('[spread]\nmatched = [["tone.C1", "tone.C2"], ["tone.C2", "tone.C3"]]\n', "twice"),
        ('[spread]\ndistribution = "gaussian"\n', "no .gaussian."),
    ],
)
def test_faults_of_the_table(text: str, message: str) -> None:
    with pytest.raises(DesignError, match=message):
        parse_design(HEAD + BOOST + text)


def test_faults_of_the_model() -> None:
    with pytest.raises(ParameterError, match="no part varies"):
        spread_model(parse_design(HEAD + BOOST), F)
    with pytest.raises(ParameterError, match=r'names "tone\.C9"'):
        spread_model(design('matched = [["tone.C1", "tone.C9"]]\n'), F)
