"""Power of the F test and of single comparisons: the probability that a plan shows what is truly there.

Everything here is computed from the numbers of a plan, before there are data: the number of values at each
level, the standard deviation within levels (`sigma`), and the true difference. The tests are those of the
one-way analysis with the pooled error on N - k degrees of freedom.

Which means: unless all means are given, two extreme levels differ by `difference` and all others lie midway
between them, which for a given difference is the arrangement the F test finds hardest to see with equal n
(J. Cohen, Statistical Power Analysis, 1988, chapter 8, his pattern 1; from memory). Where numbers of values
are unequal, the extremes are the two levels that make the power of the F test smallest, so that what is
stated holds whichever two levels differ.
"""

import math
from collections.abc import Sequence
from fractions import Fraction
from itertools import combinations

from assayfolio.statistics.comparisons import GREATER, LESS, TWO_SIDED
from assayfolio.statistics.noncentral import noncentral_f_sf, noncentral_t_cdf, noncentral_t_sf
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.statistics.tails import f_isf, t_isf

Number = int | float | Fraction


def f_power(n: Sequence[int], difference: float, sigma: float, alpha: float) -> float:
    """The power of the F test at level `alpha` with `n` values at each level, two of which differ.

    Two extreme levels differ by `difference`, the rest lie midway; for unequal `n` the extremes are
    `least_favourable_pair(n)`. Then lambda = (difference / (2 sigma))^2 (a + b - (a - b)^2 / N), with a and b
    the extremes' numbers of values and N that of all.
    Raises ValueError unless `difference` and `sigma` are positive, and NotComputableError where N = k.
    """
    difference, sigma = positive("the difference", difference), positive("sigma", sigma)
    df = error_df(n)
    noncentrality = (difference / (2 * sigma)) ** 2 * _spread_of_extremes(n, *least_favourable_pair(n))
    return _f_power(len(n) - 1, df, noncentrality, alpha)


def f_power_of_means(means: Sequence[Number], n: Sequence[int], sigma: float, alpha: float) -> float:
    """The power of the F test at level `alpha` where the true level means are `means`.

    Raises ValueError unless `sigma` is positive, and NotComputableError where N = k.
    """
    return _f_power(len(n) - 1, error_df(n), f_noncentrality(means, n, sigma), alpha)


def f_noncentrality(means: Sequence[Number], n: Sequence[int], sigma: float) -> float:
    """The noncentrality lambda = sum(n_i (mu_i - weighted mean)^2) / sigma^2, the sum formed exactly."""
    sigma = positive("sigma", sigma)
    exact = [Fraction(mean) for mean in means]
    centre = sum((size * mean for size, mean in zip(n, exact, strict=True)), Fraction(0)) / sum(n)
    spread = sum((size * (mean - centre) ** 2 for size, mean in zip(n, exact, strict=True)), Fraction(0))
    return float(spread) / sigma**2


def least_favourable_pair(n: Sequence[int]) -> tuple[int, int]:
    """The positions of the two levels with which, as extremes, the F test has least power.

    The first such pair in the order of the levels; for equal `n` the first two levels.
    """
    return min(combinations(range(len(n)), 2), key=lambda pair: _spread_of_extremes(n, *pair))


def contrast_power(
    weights: Sequence[Number],
    n: Sequence[int],
    value: Number,
    sigma: float,
    alpha: float,
    alternative: str,
) -> float:
    """The power of the t test of a contrast whose true value is `value`.

    `alternative` is two-sided, greater or less, as in the comparison itself; the two-sided power counts a
    rejection in either direction. For a contrast of a family of m that is adjusted by Bonferroni pass
    alpha/m.
    Raises ValueError for weights that do not sum to zero and unless `sigma` is positive, NotComputableError
    where N = k.
    """
    exact = [Fraction(weight) for weight in weights]
    if sum(exact) != 0 or not any(exact):
        raise ValueError("the weights of a contrast sum to zero and are not all zero")
    factor = sum((weight**2 / size for weight, size in zip(exact, n, strict=True)), Fraction(0))
    delta = float(value) / (positive("sigma", sigma) * math.sqrt(factor))
    df = error_df(n)
    critical = float(t_isf(alpha / 2 if alternative == TWO_SIDED else alpha, df))
    return t_power(critical, df, delta, alternative)


def pair_power(
    n_a: int, n_b: int, df: float, difference: float, sigma: float, critical: float, alternative: str
) -> float:
    """The probability that two levels which differ by `difference` are declared different.

    `critical` is what t is held against: a point of t, of the studentized range over sqrt(2), or of the
    many-to-one distribution, as the procedure has it. Two-sided counts a declaration in either direction;
    with greater or less the true difference lies in the direction that the test is after.
    Raises ValueError unless `difference` and `sigma` are positive.
    """
    se = positive("sigma", sigma) * math.sqrt(1 / n_a + 1 / n_b)
    delta = positive("the difference", difference) / se
    return t_power(critical, df, -delta if alternative == LESS else delta, alternative)


def t_power(critical: float, df: float, delta: float, alternative: str) -> float:
    """P(|T| > `critical`), P(T > `critical`) or P(T < -`critical`) for noncentral t.

    Raises ValueError for another alternative than two-sided, greater or less.
    """
    if alternative == GREATER:
        return float(noncentral_t_sf(critical, df, delta))
    if alternative == LESS:
        return float(noncentral_t_cdf(-critical, df, delta))
    if alternative != TWO_SIDED:
        raise ValueError(f"the alternative is two-sided, greater or less, not {alternative!r}")
    return min(1.0, float(noncentral_t_sf(critical, df, delta) + noncentral_t_cdf(-critical, df, delta)))


def error_df(n: Sequence[int]) -> int:
    """N - k for `n` values at each level.

    Raises ValueError for fewer than two levels and for a level without values, NotComputableError where
    N = k.
    """
    if len(n) < 2:
        raise ValueError(f"a comparison needs at least two levels, not {len(n)}")
    if min(n) < 1:
        raise ValueError("every level has at least one value")
    if sum(n) == len(n):
        raise NotComputableError(
            "one value at every level leaves nothing to estimate the error from; plan replicates"
        )
    return sum(n) - len(n)


def positive(name: str, value: Number) -> float:
    """`value` as a double. Raises ValueError unless it is finite and positive."""
    if not 0 < value < math.inf:
        raise ValueError(f"{name} must be positive, not {value!r}")
    return float(value)


def _spread_of_extremes(n: Sequence[int], a: int, b: int) -> Fraction:
    # Four times lambda for a difference of one sigma.
    return n[a] + n[b] - Fraction((n[a] - n[b]) ** 2, sum(n))


def _f_power(df1: int, df2: int, noncentrality: float, alpha: float) -> float:
    return float(noncentral_f_sf(float(f_isf(alpha, df1, df2)), df1, df2, noncentrality))
