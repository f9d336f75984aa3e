"""The binomial test against published tables and against scipy's own route."""

from __future__ import annotations

import pytest
from scipy import stats

from a2d.errors import ParameterError
from a2d.listening.trials import fewest_correct, p_value

# Fewest right answers for 95 % confidence, n = 10 to 25: the table that texts on ABX listening tests print.
PUBLISHED_95 = dict(zip(range(10, 26), (9, 9, 10, 10, 11, 12, 12, 13, 13, 14, 15, 15, 16, 16, 17, 18), strict=True))


def test_twelve_of_sixteen() -> None:
    assert p_value(12, 16) == pytest.approx(0.038, abs=5e-4)  # the issue's own figure, printed to three places


@pytest.mark.parametrize(("trials", "correct"), PUBLISHED_95.items())
def test_published_table(trials: int, correct: int) -> None:
    assert fewest_correct(trials) == correct


@pytest.mark.parametrize(("correct", "trials"), [(0, 1), (1, 1), (5, 8), (59, 100), (480, 1000)])
def test_against_the_incomplete_beta_function(correct: int, trials: int) -> None:
    # scipy sums through the regularised incomplete beta function: another route, good to about 1e-13.
    assert p_value(correct, trials) == pytest.approx(
        stats.binomtest(correct, trials, alternative="greater").pvalue, rel=1e-11
    )


@pytest.mark.parametrize("trials", range(5, 60))
def test_fewest_is_the_fewest(trials: int) -> None:
    fewest = fewest_correct(trials, 0.05)
    assert p_value(fewest, trials) <= 0.05 < p_value(fewest - 1, trials)


def test_errors() -> None:
    with pytest.raises(ParameterError, match="correct must be a whole number from 0 to 16"):
        p_value(17, 16)
    with pytest.raises(ParameterError, match="at least 5 can"):
        fewest_correct(4)
