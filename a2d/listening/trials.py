"""How likely is a listener's score by guessing alone? The one-sided binomial test with p = 1/2."""

from __future__ import annotations

import math

from a2d import checks
from a2d.errors import ParameterError

MOST_TRIALS = 10_000


def p_value(correct: int, trials: int) -> float:
    """The chance of `correct` or more right answers out of `trials` by guessing.

    P = Σ_{k ≥ c} C(n, k) / 2ⁿ, summed in whole numbers and rounded once (any textbook on statistics: the exact
    one-sided binomial test).

    Parameters
    ----------
    correct
        Right answers, 0 to `trials`.
    trials
        Trials done, 1 or more.

    Raises
    ------
    ParameterError
        Either number is outside its range.

    Examples
    --------
    >>> round(p_value(12, 16), 3)
    0.038
    """
    n = checks.whole("trials", trials, 1, MOST_TRIALS)
    c = checks.whole("correct", correct, 0, n)
    ways = sum(math.comb(n, k) for k in range(c, n + 1))
    return float(ways / 2**n)


def fewest_correct(trials: int, significance: float = 0.05) -> int:
    """The smallest number of right answers out of `trials` that guessing reaches with at most `significance`.

    Raises
    ------
    ParameterError
        Even a perfect score is as likely as that by guessing: more trials are needed.

    Examples
    --------
    >>> fewest_correct(16)
    12
    """
    n = checks.whole("trials", trials, 1, MOST_TRIALS)
    level = float(checks.between("significance", significance, 1e-12, 0.5))
    ways, correct = 0, n + 1
    while correct > 0 and (ways + math.comb(n, correct - 1)) / 2**n <= level:
        correct -= 1
        ways += math.comb(n, correct)
    if correct > n:
        needed = math.ceil(-math.log2(level))
        raise ParameterError(f"{n} trials cannot show a significance of {level:g} (at least {needed} can)")
    return correct
