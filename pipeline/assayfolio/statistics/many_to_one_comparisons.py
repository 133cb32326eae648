"""Every level against a reference, with the pooled error: Dunnett's procedure and its step-down form.

With m levels against the reference the statistics T_i share the reference mean and s, so that they are
correlated, with product correlations b_i b_j, b_i = sqrt(n_i / (n_0 + n_i)), for any sizes. The family is
these m comparisons.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from assayfolio.statistics.adjustment import Tail
from assayfolio.statistics.arguments import Floats
from assayfolio.statistics.comparisons import (
    TWO_SIDED,
    ComparisonResult,
    compare,
    directed,
    doubles,
    pooled_results,
    pooled_statistics,
    require_error_term,
    t_tails,
    tails_from_logs,
)
from assayfolio.statistics.distributions import (
    MOST_OTHERS,
    many_to_one_isf,
    many_to_one_log10_sf,
)
from assayfolio.statistics.estimates import reference_estimates
from assayfolio.statistics.oneway import NotComputableError, OneWay


def compare_dunnett(
    analysis: OneWay, reference: str, alternative: str, alpha: float
) -> tuple[ComparisonResult, ...]:
    """Every other level minus the reference by Dunnett's procedure, in one step, with intervals.

    The adjusted p-value is P(max |T_i| >= |t|) over all levels but the reference, or P(max T_i >= t) in the
    direction of a one-sided `alternative`; sizes may differ. Intervals are simultaneous at 1 - alpha, and
    one-sided where the alternative is. Source: Dunnett 1955, J. Am. Stat. Assoc. 50, 1096 (from memory). For
    two levels it is the t test.
    Raises NotComputableError where nothing varies within the levels and for more than 199 levels against the
    reference, KeyError for an unknown reference.
    """
    require_error_term(analysis)
    estimates = reference_estimates(analysis, reference)
    if analysis.k == 2:
        return compare(analysis, estimates, "none", alternative, alpha)
    family = _Family.of(analysis, reference, alternative)
    statistics = pooled_statistics(analysis, estimates)
    t = doubles(statistics)
    tails = t_tails(t, analysis.df_within, alternative)
    adjusted = family.tails(directed(t, alternative), range(len(estimates)))
    multiplier = family.point(alpha)
    return pooled_results(analysis, estimates, statistics, tails, adjusted, multiplier, alternative)


def compare_dunnett_step_down(
    analysis: OneWay, reference: str, alternative: str
) -> tuple[ComparisonResult, ...]:
    """Every other level minus the reference by the step-down tests of Dunnett and Tamhane; no intervals.

    The levels are ordered by their statistics, |t| or t in the direction of `alternative`. The largest is
    held against the maximum over all m levels, the next against the maximum over the m - 1 levels that
    remain, and so on; an adjusted p-value is the largest tail met so far. At every step the hypotheses that
    remain are those of the levels whose statistics are not larger, and the tail is that of the maximum over
    exactly these levels with their own sizes. Levels with equal statistics have the same adjusted p-value.

    With equal and with unequal sizes this is the closed test whose test of each set of levels refers the
    largest statistic in the set to the maximum over it: any set that holds a level also lies within what
    remained when the set's largest statistic had its turn, and a maximum over fewer levels has the smaller
    tail. So no set has a larger p-value than those that are met, and the family-wise error rate holds
    strongly. Source: Dunnett and Tamhane 1991, Stat. Med. 10, 939, "Step-down multiple tests for comparing
    treatments with a control in unbalanced one-way layouts" (from memory).
    Raises NotComputableError where nothing varies within the levels and for more than 199 levels against the
    reference, KeyError for an unknown reference.
    """
    require_error_term(analysis)
    estimates = reference_estimates(analysis, reference)
    statistics = pooled_statistics(analysis, estimates)
    t = doubles(statistics)
    tails = t_tails(t, analysis.df_within, alternative)
    if analysis.k == 2:
        return pooled_results(analysis, estimates, statistics, tails, tails, None, alternative)
    family = _Family.of(analysis, reference, alternative)
    adjusted = _stepped_down(family, directed(t, alternative))
    return pooled_results(analysis, estimates, statistics, tails, adjusted, None, alternative)


@dataclass(frozen=True, slots=True)
class _Family:
    """The levels against the reference: sizes, degrees of freedom, and whether both sides count."""

    n_control: int
    n_others: tuple[int, ...]
    df: int
    two_sided: bool

    @staticmethod
    def of(analysis: OneWay, reference: str, alternative: str) -> "_Family":
        others = tuple(level.n for level in analysis.levels if level.level != reference)
        if len(others) > MOST_OTHERS:
            raise NotComputableError(
                f"up to {MOST_OTHERS} levels are compared with a reference; here are {len(others):,}"
            )
        n_control = analysis.summary_of(reference).n
        return _Family(n_control, others, analysis.df_within, alternative == TWO_SIDED)

    def tails(self, d: Floats, members: Sequence[int]) -> tuple[Tail, ...]:
        """The tails at `d` of the maximum over `members`, places in `n_others`."""
        sizes = [self.n_others[at] for at in members]
        return tails_from_logs(
            many_to_one_log10_sf(d, self.n_control, sizes, self.df, two_sided=self.two_sided)
        )

    def point(self, alpha: float) -> float:
        """The point that the maximum over all levels exceeds with probability `alpha`."""
        point = many_to_one_isf(alpha, self.n_control, self.n_others, self.df, two_sided=self.two_sided)
        return float(point)


def _stepped_down(family: _Family, d: Floats) -> tuple[Tail, ...]:
    # Equal statistics take one step together, so that the order of the levels cannot matter.
    stepped: dict[float, Tail] = {}
    floor = Tail(0.0, -np.inf)
    for largest in sorted(set(d.tolist()), reverse=True):
        remaining = np.flatnonzero(d <= largest).tolist()
        (step,) = family.tails(np.array([largest]), remaining)
        floor = Tail(max(floor.p, step.p), max(floor.log10_p, step.log10_p))
        stepped[largest] = floor
    return tuple(stepped[one] for one in d.tolist())
