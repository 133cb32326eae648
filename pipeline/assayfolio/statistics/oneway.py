"""The one-way analysis of variance from exact sums, for equal and unequal numbers of observations.

Everything here is rational: nothing is rounded. With y_ij the j-th value at level i, n_i values at level i,
S_i their sum, Q_i their sum of squares, k levels and N values in all,

    SS within  = sum(Q_i - S_i^2 / n_i)            on N - k degrees of freedom
    SS between = sum(S_i^2 / n_i) - S^2 / N        on k - 1
    SS total   = Q - S^2 / N                       on N - 1

These are the textbook formulas (for example NIST/SEMATECH e-Handbook of Statistical Methods, 7.4.3; from
memory); in exact arithmetic they lose no digit, whatever the offset of the data.
"""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from fractions import Fraction

from assayfolio.exact import ExactSums, Root


class NotComputableError(ValueError):
    """The data do not hold what the analysis needs; the message says what is missing."""


@dataclass(frozen=True, slots=True)
class LevelSummary:
    """One level: its exact sums, mean, and the sum of squares about the mean."""

    level: str
    sums: ExactSums
    mean: Fraction
    ss: Fraction

    @property
    def n(self) -> int:
        """The number of values."""
        return self.sums.n

    @property
    def sd(self) -> Root | None:
        """The standard deviation on n - 1 degrees of freedom; None where n = 1."""
        return Root.of(self.ss / (self.n - 1)) if self.n > 1 else None


@dataclass(frozen=True, slots=True)
class OneWay:
    """The analysis of variance of k levels with N = `n_total` values; sums and mean squares are exact."""

    levels: tuple[LevelSummary, ...]
    grand_mean: Fraction
    ss_between: Fraction
    ss_within: Fraction
    n_total: int

    @property
    def k(self) -> int:
        """The number of levels."""
        return len(self.levels)

    @property
    def df_between(self) -> int:
        """The degrees of freedom between levels, k - 1."""
        return self.k - 1

    @property
    def df_within(self) -> int:
        """The degrees of freedom within levels, N - k."""
        return self.n_total - self.k

    @property
    def ss_total(self) -> Fraction:
        """The sum of squares about the grand mean, on N - 1 degrees of freedom."""
        return self.ss_between + self.ss_within

    @property
    def ms_between(self) -> Fraction:
        """The mean square between levels."""
        return self.ss_between / self.df_between

    @property
    def ms_within(self) -> Fraction:
        """The mean square within levels: the pooled variance."""
        return self.ss_within / self.df_within

    @property
    def f(self) -> Fraction | None:
        """The variance ratio; None where nothing varies within the levels."""
        return self.ms_between / self.ms_within if self.ss_within else None

    @property
    def r_squared(self) -> Fraction | None:
        """The share of SS between in SS total; None where all values are equal."""
        return self.ss_between / self.ss_total if self.ss_total else None

    def summary_of(self, level: str) -> LevelSummary:
        """The summary of the level of that name. Raises KeyError where there is none."""
        for summary in self.levels:
            if summary.level == level:
                return summary
        raise KeyError(level)


def without_variance(levels: Iterable[LevelSummary]) -> str | None:
    """Why the variance of some of `levels` cannot be estimated from its own values, by name; None if it can.

    A level of one value has no variance; one whose values are all equal has one that the recorded resolution
    does not show, which is not zero.
    """
    reasons = []
    for level in levels:
        if level.n < 2:
            reasons.append(f"{level.level} has one value, so its variance cannot be estimated")
        elif not level.ss:
            reasons.append(
                f"the values of {level.level} do not vary at the recorded resolution, so its variance cannot "
                "be estimated"
            )
    return "; ".join(reasons) or None


def one_way(groups: Sequence[tuple[str, ExactSums]]) -> OneWay:
    """The analysis of variance of `groups`: (level, exact sums), in the order they are given.

    Degenerate input: fewer than two levels, a level without values, and one value at every level (N = k) are
    refused with NotComputableError, since no error can be estimated. All values equal, or no variation within
    the levels, is answered: sums of squares are zero as they are, `f` is None, and `r_squared` is None where
    all values are equal.
    """
    if len(groups) < 2:
        raise NotComputableError(f"{len(groups)} level is not enough: a comparison needs at least two")
    for level, sums in groups:
        if sums.n == 0:
            raise NotComputableError(f"level {level!r} has no values")
    levels = tuple(_summary(level, sums) for level, sums in groups)
    n_total = sum(level.n for level in levels)
    if n_total == len(levels):
        raise NotComputableError(
            "one value at every level: nothing varies within the levels, so no error can be estimated"
        )
    grand_sum = sum((level.sums.sum for level in levels), Fraction(0))
    between = sum((level.sums.sum**2 / level.n for level in levels), Fraction(0)) - grand_sum**2 / n_total
    within = sum((level.ss for level in levels), Fraction(0))
    return OneWay(levels, grand_sum / n_total, between, within, n_total)


def _summary(level: str, sums: ExactSums) -> LevelSummary:
    total = sums.sum
    return LevelSummary(level, sums, total / sums.n, sums.sum_of_squares - total**2 / sums.n)
