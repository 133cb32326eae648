"""Limits of charts for individual values and moving ranges, and where a value stands to them, exactly.

With x_1 ... x_m the values of the baseline and R the mean of the ranges |x_i - x_(i-1)| of neighbours,

    centre line of the individuals    mean(x)
    standard deviation                R / d2        d2 = 2 / sqrt(pi) for ranges of two
    k-sigma lines                     mean(x) +- k R / d2
    centre line of the moving range   R
    its upper limit                   R (1 + 3 d3 / d2) = R (1 + 3 sqrt(pi / 2 - 1)), its lower limit 0

d2 and d3 = sqrt(2 - 4 / pi) are mean and standard deviation of the range of two independent standard normal
values (W. A. Shewhart, Economic Control of Quality of Manufactured Product, 1931; ISO 7870-2:2013; both from
memory). Centre lines are rational and exact. The limits hold pi; whether a value lies beyond one is decided
exactly all the same, by comparing a rational number with as many digits of pi as it takes.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from functools import cache
from itertools import pairwise
from math import pi, sqrt

from assayfolio.exact import round_significant, to_double
from assayfolio.statistics.oneway import NotComputableError

D2 = 2 / sqrt(pi)
D3 = sqrt(2 - 4 / pi)
D4 = 1 + 3 * sqrt(pi / 2 - 1)
LEAST_BASELINE = 2
MOST_SIGMAS = 3

_FIRST_DIGITS = 40


@dataclass(frozen=True, slots=True)
class ChartLimits:
    """The lines of both charts: mean and mean moving range of the `n` values of the baseline."""

    n: int
    centre: Fraction
    mean_range: Fraction

    @property
    def sigma(self) -> float:
        """The standard deviation that the moving ranges stand for."""
        return round_significant(to_double(self.mean_range) / D2)

    def line(self, sigmas: int) -> float:
        """The line so many standard deviations above the centre line, below it where negative."""
        return round_significant(to_double(self.centre) + sigmas * to_double(self.mean_range) / D2)

    @property
    def range_limit(self) -> float:
        """The upper limit of the moving range."""
        return round_significant(to_double(self.mean_range) * D4)

    def zone(self, value: Fraction) -> int:
        """Where `value` stands: 0 on the centre line, else 1 plus the number of sigma lines it lies beyond.

        Up to three lines are counted; below the centre line the number is negative. A value on a line does
        not lie beyond it.
        """
        away = value - self.centre
        if not away:
            return 0
        # |away| > k R sqrt(pi) / 2 where 4 away^2 / (k R)^2 > pi
        share = 4 * away**2 / self.mean_range**2
        beyond = sum(exceeds_pi(share / sigmas**2) for sigmas in range(1, MOST_SIGMAS + 1))
        return (1 + beyond) * (1 if away > 0 else -1)

    def range_is_beyond(self, moving_range: Fraction) -> bool:
        """Whether a moving range lies beyond its upper limit."""
        over = moving_range / self.mean_range - 1
        # over > 3 sqrt(pi / 2 - 1) where 2 (over^2 / 9 + 1) > pi
        return over > 0 and exceeds_pi(2 * (over**2 / 9 + 1))


def moving_ranges(values: Sequence[Fraction]) -> tuple[Fraction, ...]:
    """The ranges of neighbours: one fewer than there are values."""
    return tuple(abs(after - before) for before, after in pairwise(values))


def chart_limits(baseline: Sequence[Fraction]) -> ChartLimits:
    """The lines that a baseline in its order gives.

    Raises NotComputableError for fewer than two values, and where neighbours never differ.
    """
    if len(baseline) < LEAST_BASELINE:
        raise NotComputableError("limits take two values at least")
    ranges = moving_ranges(baseline)
    if not any(ranges):
        raise NotComputableError("neighbouring values of the baseline never differ, so limits have no width")
    centre = sum(baseline, Fraction(0)) / len(baseline)
    return ChartLimits(len(baseline), centre, sum(ranges, Fraction(0)) / len(ranges))


def exceeds_pi(value: Fraction) -> bool:
    """Whether `value` is above pi. Pi is irrational, so some number of its digits always decides."""
    digits = _FIRST_DIGITS
    while True:
        low, scale = _pi_below(digits), 10**digits
        if value * scale >= low + 1:
            return True
        if value * scale <= low:
            return False
        digits *= 2


@cache
def _pi_below(digits: int) -> int:
    """The whole part of pi times ten to `digits`, by Machin's formula: 16 arctan(1/5) - 4 arctan(1/239)."""
    guard = 10
    unit: int = 10 ** (digits + guard)
    spare: int = 10**guard
    return (16 * _arctangent(5, unit) - 4 * _arctangent(239, unit)) // spare


def _arctangent(inverse: int, unit: int) -> int:
    """arctan(1 / `inverse`) in units of 1 / `unit`, within a few units."""
    total, term, odd = 0, unit // inverse, 1
    while term:
        total += term // odd if odd % 4 == 1 else -(term // odd)
        term //= inverse**2
        odd += 2
    return total
