"""Rational Chebyshev approximation of a squared magnitude, many sections at a time.

On the unit circle |B/A|² is a ratio N(t)/D(t) of polynomials in t = tan²(w/2), and every ratio that is positive for
all t ≥ 0 belongs to one stable section with its zeros inside. The minimax fit of a section is therefore the best
approximation of the analog |H|² by such a ratio in the sense of the logarithm, which Remez' exchange finds and the
alternation of its error proves (docs/fidelity.md).
"""
