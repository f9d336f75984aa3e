"""Fits of whole chains: scope, extra sections, fewest sections, phase; certificates; the choice of `auto`."""

import numpy as np
import pytest

from a2d.analog.chain import AnalogChain
from a2d.compare.errors import compare
from a2d.digital.allowed import Allowed, even
from a2d.digital.certificate import certify
from a2d.digital.chain_fit import fit_chain
from a2d.digital.twin import Twin, make_twin
from a2d.errors import ConversionError, ParameterError
from tests.support import prototypes

RATE = 48_000.0
BAND = np.array([20.0, 20_000.0])
F = np.unique(np.concatenate([np.geomspace(*BAND, 2000), np.linspace(*BAND, 4000)]))


def chain_of(*parts):
    sections = [prototypes.section(*part) for part in parts]
    names = [f"{part[0]}.{i}" for i, part in enumerate(parts)]
    return AnalogChain.of(names, b=[s[0] for s in sections], a=[s[1] for s in sections])


DESK = (("peaking", 120.0, 0.8, 5.0), ("peaking", 9000.0, 1.1, -6.0), ("highshelf", 12_000.0, 0.7, 4.0))


def worst_db(chain, sos, rate=RATE):
    """The largest magnitude error, from responses of the tests' own."""
    total = sum(prototypes.digital_db(row, F, rate) for row in sos)
    return np.abs(total - sum(prototypes.analog_db(b, a, F) for b, a in zip(chain.b, chain.a, strict=True))).max()


@pytest.mark.parametrize(("f0", "q"), [(1000.0, 0.5), (8000.0, 1.4), (16_000.0, 1.4), (16_000.0, 4.0)])
@pytest.mark.parametrize("gain_db", [12.0, -12.0])
def test_one_section_more_brings_a_peaking_section_below_half_a_thousandth(f0, q, gain_db):
    chain = chain_of(("peaking", f0, q, gain_db))
    fit = fit_chain(chain.b, chain.a, RATE, BAND, extra_sections=1)
    assert len(fit.sos) == 2
    assert worst_db(chain, fit.sos) < 0.0005


def test_sections_fitted_together_do_better_than_apart_and_more_do_better_still():
    chain = chain_of(*DESK)
    errors = [worst_db(chain, make_twin(chain, RATE, method="minimax").sos)]
    for extra in (0, 1, 2):
        twin = make_twin(chain, RATE, method="minimax", scope="chain", extra_sections=extra)
        assert len(twin) == 3 + extra
        errors.append(worst_db(chain, twin.sos))
    assert errors[1] < 0.8 * errors[0]
    assert errors[2] < 0.3 * errors[1]
    assert errors[3] < errors[2]
    assert np.all(np.abs(twin.sos[:, 5]) < 1.0)
    assert np.all(np.abs(twin.sos[:, 4]) < 1.0 + twin.sos[:, 5])


def test_the_bound_of_a_chain_fit_is_no_larger_than_its_error():
    chain = chain_of(*DESK[:2])
    fit = fit_chain(chain.b, chain.a, RATE, BAND)
    assert 0.99 * fit.worst < fit.bound <= fit.worst
    assert worst_db(chain, fit.sos) == pytest.approx(fit.worst, rel=0.03)  # the fit's grid is the coarser one


def test_the_error_by_number_of_sections_is_kept():
    chain = chain_of(*DESK)
    fit = fit_chain(chain.b, chain.a, RATE, BAND, extra_sections=2)
    counts, errors = zip(*fit.by_count, strict=True)
    assert counts == (3, 4, 5)
    assert list(errors) == sorted(errors, reverse=True)
    twin = make_twin(chain, RATE, method="minimax", scope="chain", extra_sections=1)
    assert "3 sections" in twin.why[0]
    assert "4 sections" in twin.why[0]


def test_zeros_on_the_axis_keep_their_place_in_a_chain():
    chain = chain_of(("notch", 5000.0, 3.0), ("highpass", 40.0, 0.7), ("peaking", 15_000.0, 1.0, 6.0))
    twin = make_twin(chain, RATE, method="minimax", scope="chain")
    zeros = np.roots(twin.sos[0, :3])
    assert np.abs(zeros) == pytest.approx(1.0, abs=1e-12)
    assert np.abs(np.angle(zeros)) == pytest.approx(2.0 * np.pi * 5000.0 / RATE, rel=1e-9)
    assert abs(twin.sos[1, :3].sum()) < 1e-15 * 4


def test_an_order_of_21_with_poles_up_to_1_mhz_becomes_few_sections():
    audible = (
        ("peaking", 80.0, 0.7, 6.0), ("peaking", 1200.0, 1.2, -4.0), ("highshelf", 6000.0, 0.7, 5.0),
        ("peaking", 9000.0, 2.0, 3.0), ("highpass", 12.0, 0.6),
    )  # fmt: skip
    above = (
        ("lowpass", 60e3, 0.8), ("lowpass", 150e3, 1.1), ("lowpass", 400e3, 0.6), ("lowpass", 1e6, 0.5),
        ("peaking", 300e3, 0.5, 2.0),
    )  # fmt: skip
    chain = chain_of(*audible, *above)
    first = prototypes.first_order("lowpass", 35e3)
    chain = AnalogChain.of([*chain.names, "rc"], b=[*chain.b, first[0]], a=[*chain.a, first[1]])
    twin = make_twin(chain, RATE, method="minimax", scope="fewest", allowed=even(F, 0.05))
    assert len(twin) <= 6
    assert worst_db(chain, twin.sos) <= 0.05


def test_a_limit_out_of_reach_is_said():
    chain = chain_of(("lowpass", 15_000.0, 0.7))
    with pytest.raises(ConversionError, match=r"no 4 sections keep the chain within 1e-12 dB at 48000 Hz"):
        make_twin(chain, RATE, method="minimax", scope="fewest", allowed=even(F, 1e-12))


def test_weight_phase_trades_magnitude_for_phase():
    chain = chain_of(("peaking", 16_000.0, 1.4, 12.0))
    found = [compare(chain, make_twin(chain, RATE, method="minimax", weight_phase=w)) for w in (0.0, 0.3, 1.0, 3.0)]
    magnitude = [abs(c.magnitude_db.worst) for c in found]
    phase = [abs(c.phase_deg.worst) for c in found]
    assert magnitude == sorted(magnitude)
    assert phase == sorted(phase, reverse=True)
    assert phase[-1] < 0.2 * phase[0]


def test_the_phase_left_by_a_magnitude_fit_is_nearly_a_delay():
    found = compare(chain := chain_of(DESK[1]), make_twin(chain, RATE, method="minimax"))
    assert abs(found.delay_us) * RATE * 1e-6 < 0.25
    assert abs(found.phase_without_delay_deg.worst) < 0.2 * abs(found.phase_deg.worst)


@pytest.mark.parametrize("kind", prototypes.KINDS)
def test_certificates_of_minimax_prove_it(kind):
    chain = chain_of((kind, 11_000.0, 0.9, 7.0))
    twin = make_twin(chain, RATE, method="minimax")
    [proof] = certify(twin.sos, chain.b, chain.a, RATE, BAND)
    assert proof.alternations >= proof.needed
    assert proof.gap < 0.005
    if kind == "allpass":
        assert proof.unit == "deg"
    else:
        assert abs(proof.worst) == pytest.approx(worst_db(chain, twin.sos), rel=1e-3)


def test_certificates_of_other_sections_claim_nothing_false():
    """The bilinear twin's own bound, where it has one, stays below the best there is."""
    for kind in ("peaking", "lowpass", "highpass", "bandpass"):
        chain = chain_of((kind, 7000.0, 1.1, 6.0))
        best = worst_db(chain, make_twin(chain, RATE, method="minimax").sos)
        [proof] = certify(make_twin(chain, RATE).sos, chain.b, chain.a, RATE, BAND)
        assert proof.bound <= best
        assert abs(proof.worst) > best


def test_auto_takes_the_simplest_that_serves():
    chain = chain_of(("peaking", 100.0, 1.0, 6.0), ("peaking", 14_000.0, 1.0, 9.0))
    loose = make_twin(chain, RATE, method="auto", allowed=even(F, 10.0))
    tight = make_twin(chain, RATE, method="auto", allowed=even(F, 0.2))
    assert loose.methods == ("bilinear", "bilinear")
    assert tight.methods == ("bilinear", "minimax")
    assert worst_db(chain, tight.sos) <= 0.2
    assert "bilinear 4" in tight.why[1] or "bilinear" in tight.why[1]
    assert make_twin(chain, RATE, method="auto").methods == ("minimax", "minimax")


def test_auto_counts_one_sided_limits_and_phase():
    chain = chain_of(("peaking", 14_000.0, 1.0, 9.0))
    open_below = Allowed(F, np.full_like(F, -np.inf), np.full_like(F, 0.5))
    assert make_twin(chain, RATE, method="auto", allowed=open_below).methods == ("bilinear",)
    no_phase = Allowed(F, np.full_like(F, -10.0), np.full_like(F, 10.0), phase_deg=0.01)
    assert make_twin(chain, RATE, method="auto", allowed=no_phase).methods != ("auto",)


@pytest.mark.parametrize(
    ("options", "message"),
    [
        ({"scope": "all"}, "there is no scope 'all'"),
        ({"scope": "chain"}, r'scope = "chain" is a fit: its method is "minimax" \(section methods: bilinear\)'),
        ({"scope": "fewest", "method": "minimax"}, "needs a magnitude limit"),
        ({"extra_sections": 1, "method": "minimax"}, r'extra_sections needs scope = "chain"'),
        ({"extra_sections": -1}, "extra_sections must be a whole number from 0 to 8"),
        ({"weight_phase": -0.1}, "weight_phase must lie from 0 to 100"),
        ({"method": "none"}, "there is no method 'none'"),
    ],
)
def test_mixtures_that_make_no_sense_are_refused(options, message):
    with pytest.raises(ParameterError, match=message):
        make_twin(chain_of(DESK[0]), RATE, **options)


def test_a_twin_from_sos_can_be_fitted_further():
    """Any sections may be the start of comparison: the certificate takes them as they come."""
    chain = chain_of(DESK[0])
    twin = Twin.from_sos(make_twin(chain, RATE).sos, RATE)
    assert certify(twin.sos, chain.b, chain.a, RATE, BAND)[0].needed == 6


@pytest.mark.parametrize(("f0", "q"), [(9000.0, 0.35), (12_000.0, 0.48), (15_000.0, 0.5)])
def test_a_zero_at_half_the_rate_counts_as_an_alternation(f0, q):
    """These low-passes are best with a zero at z = -1; a linear programme with N ≥ 0 finds nothing below the bound."""
    chain = chain_of(("lowpass", f0, q))
    twin = make_twin(chain, RATE, method="minimax")
    [proof] = certify(twin.sos, chain.b, chain.a, RATE, BAND)
    assert abs(twin.sos[0, 0] - twin.sos[0, 1] + twin.sos[0, 2]) < 1e-15
    assert proof.alternations >= proof.needed == 6
    assert proof.gap < 0.02
