"""Residuals, and tests of their normality. They inform; they never choose the analysis."""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from math import exp, frexp, fsum, ldexp, sqrt
from typing import Final

import numpy as np
from scipy.special import log_ndtr

from assayfolio.exact import Decimal10, in_one_unit
from assayfolio.statistics.arguments import Floats
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.statistics.tails import normal_sf

SHAPIRO_WILK_LIMITS: Final = (3, 5000)
ANDERSON_DARLING_FROM: Final = 3
ANDERSON_DARLING_P_FROM: Final = 8
"""The number of values from which the p-value of the Anderson-Darling test was made to hold."""

_LARGEST_FITTED: Final = 10.0


@dataclass(frozen=True, slots=True)
class NormalityCheck:
    """A test of normal residuals: statistic W and its p-value."""

    w: float
    p: float


@dataclass(frozen=True, slots=True)
class AndersonDarlingCheck:
    """The Anderson-Darling test: A squared, A squared modified for the number of values, p-value."""

    a2: float
    modified: float
    p: float


def residuals(groups: Sequence[tuple[str, Sequence[Decimal10]]]) -> tuple[float, ...]:
    """Each value minus the exact mean of its level, rounded once; in the order of `groups`."""
    out: list[float] = []
    for _, values in groups:
        numbers, exponent, divisor = in_one_unit(values)
        n, total = len(numbers), sum(numbers)
        unit = Fraction(10) ** exponent / (divisor * n) if n else Fraction(1)
        for number in numbers:
            steps = number * n - total
            out.append(steps * unit.numerator / unit.denominator)  # integers: rounded once, correctly
    return tuple(out)


def shapiro_wilk(values: Sequence[float]) -> NormalityCheck:
    """The Shapiro-Wilk test of normality, for 3 to 5,000 values.

    Null hypothesis: the values come from one normal distribution. Computed by scipy (Royston 1995, AS R94);
    implementations agree to about three digits of p.
    Raises NotComputableError outside those limits and where all values are equal.
    """
    low, high = SHAPIRO_WILK_LIMITS
    if not low <= len(values) <= high:
        raise NotComputableError(
            f"the Shapiro-Wilk test is defined for {low} to {high:,} values; here are {len(values):,}"
        )
    if min(values) == max(values):
        raise NotComputableError("all residuals are equal")
    from scipy.stats import shapiro  # slow to load, so only where asked for

    # The algorithm takes a range below 1e-19 for no range at all, whatever the unit; W does not depend on the
    # unit, and a power of two changes no digit. It also starts from a value in the middle of the list, so the
    # last digit of p would follow the order of the rows.
    _, power = frexp(max(values) - min(values))
    scaled = [ldexp(value, -power) for value in sorted(values)]
    result = shapiro(np.asarray(scaled, dtype=np.float64))
    return NormalityCheck(float(result.statistic), float(result.pvalue))


def anderson_darling(values: Sequence[float]) -> AndersonDarlingCheck:
    """The Anderson-Darling test of normality with mean and standard deviation estimated from the values.

    Null hypothesis: the values come from one normal distribution. With z the sorted values less their mean,
    divided by their standard deviation on N - 1 (N the number of values, here of residuals),
    A^2 = -N - sum((2i - 1) (log Phi(z_i) + log(1 - Phi(z_(N+1-i))))) / N, modified to
    A^2 (1 + 0.75/N + 2.25/N^2). Logarithms of both tails are formed without loss.
    The p-value is the approximation of D'Agostino and Stephens 1986 (Goodness-of-Fit Techniques, table 4.9;
    from memory), two to three digits, made for 8 values and more; beyond a modified A^2 of 10 it is given as
    at 10 (3.7e-24), where the formula ends to be of use.
    Raises NotComputableError for fewer than 3 values and where all are equal.
    """
    n = len(values)
    if n < ANDERSON_DARLING_FROM:
        raise NotComputableError(
            f"the Anderson-Darling test needs {ANDERSON_DARLING_FROM} values; here are {n:,}"
        )
    if min(values) == max(values):
        raise NotComputableError("all residuals are equal")
    z = _standardised(values)
    rank = 2 * np.arange(1, n + 1) - 1
    terms = rank * (_log_below(z) + _log_below(-z[::-1])) / n
    a2 = -n - fsum(terms.tolist())
    modified = a2 * (1 + 0.75 / n + 2.25 / n**2)
    return AndersonDarlingCheck(a2, modified, _anderson_darling_p(modified))


def _standardised(values: Sequence[float]) -> Floats:
    _, power = frexp(max(abs(value) for value in values))
    scaled = [ldexp(value, -power) for value in sorted(values)]  # squares stay in range; no digit changes
    mean = fsum(scaled) / len(scaled)
    deviations = [value - mean for value in scaled]
    sd = sqrt(fsum(one * one for one in deviations) / (len(scaled) - 1))
    return np.array([one / sd for one in deviations])


def _log_below(z: Floats) -> Floats:
    # Above the middle from the upper tail, so that log(1 - tail) keeps its digits.
    tail = normal_sf(np.abs(z))
    with np.errstate(divide="ignore"):
        far_below = np.where(z > -30, np.log(tail), log_ndtr(np.minimum(z, 0.0)))
    return np.where(z >= 0, np.log1p(-tail), far_below)


def _anderson_darling_p(modified: float) -> float:
    a = min(modified, _LARGEST_FITTED)
    if a >= 0.6:
        return exp(1.2937 - 5.709 * a + 0.0186 * a * a)
    if a > 0.34:
        return exp(0.9177 - 4.279 * a - 1.38 * a * a)
    if a > 0.2:
        return 1 - exp(-8.318 + 42.796 * a - 59.938 * a * a)
    return 1 - exp(-13.436 + 101.14 * a - 223.73 * a * a)
