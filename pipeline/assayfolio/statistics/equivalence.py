"""Equivalence and non-inferiority of level means by one-sided t tests, margins in units of the response.

Two one-sided tests: with the margins lower < upper, "X is equivalent to R" is shown where both
mean(X) - mean(R) > lower and mean(X) - mean(R) < upper are, each at level alpha; p is the larger of the two.
No adjustment is needed for their number (Schuirmann 1987, J. Pharmacokinet. Biopharm. 15, 657; from
memory). With one margin only, the one test is the test of non-inferiority. The interval that belongs to the
pair of tests has confidence 1 - 2 alpha: it lies inside the margins exactly where both tests have p <= alpha.
With one margin it is the one-sided bound at 1 - alpha, open on the other side.

Differences, standard errors and statistics are exact; tails and interval ends are doubles.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Final

from assayfolio.exact import Root, round_significant, to_double
from assayfolio.statistics.adjustment import Tail, adjusted_beside_missing, bonferroni_level
from assayfolio.statistics.comparisons import (
    GREATER,
    LESS,
    Interval,
    doubles,
    require_error_term,
    signed_root,
    t_tails,
)
from assayfolio.statistics.oneway import LevelSummary, NotComputableError, OneWay, without_variance
from assayfolio.statistics.tails import t_isf

Pairs = Sequence[tuple[str, str]]

EQUIVALENCE_ADJUSTMENTS: Final = ("none", "bonferroni", "holm")


@dataclass(frozen=True, slots=True)
class Margins:
    """The limits within which a difference does not matter: in units, or in percent of the reference mean.

    A limit that is None leaves that side open (non-inferiority).
    Raises ValueError where both are None or `lower` is not below `upper`.
    """

    lower: Fraction | None
    upper: Fraction | None

    def __post_init__(self) -> None:
        if self.lower is None and self.upper is None:
            raise ValueError("equivalence needs a margin")
        if self.lower is not None and self.upper is not None and self.lower >= self.upper:
            raise ValueError("the lower margin is below the upper margin")


@dataclass(frozen=True, slots=True)
class BoundaryTest:
    """The one-sided t test against one margin; `tail` is the probability of a result as far inside it.

    `statistic` is positive above the lower margin, negative below the upper one. `se` is the standard error
    that it is over: with percent margins that of the linear combination of means.
    """

    margin: Fraction
    statistic: Root
    se: Root
    df: int | float
    tail: Tail


@dataclass(frozen=True, slots=True)
class EquivalenceResult:
    """One row of a family: X against R.

    `lower` and `upper` are the tests of the two margins, None where there is none. `tail` is the larger of
    their tails, `adjusted` that after the adjustment for the family. `estimate` is mean(X) - mean(R) with its
    `se` and `df`; with percent margins it is 100 (mean(X) / mean(R) - 1) and both are None. An end of
    `interval` is None where the margin on that side is. `critical` is what `se` is multiplied by for it, None
    with percent margins.
    """

    label: str
    estimate: Fraction
    se: Root | None
    df: int | float | None
    interval: Interval
    lower: BoundaryTest | None
    upper: BoundaryTest | None
    tail: Tail
    adjusted: Tail
    critical: float | None

    @property
    def tail_lower(self) -> Tail | None:
        """The tail of the test against the lower margin; None where there is none."""
        return None if self.lower is None else self.lower.tail

    @property
    def tail_upper(self) -> Tail | None:
        """The tail of the test against the upper margin; None where there is none."""
        return None if self.upper is None else self.upper.tail


def equivalence_pooled(
    analysis: OneWay, pairs: Pairs, margins: Margins, alpha: float, adjust: str
) -> tuple[EquivalenceResult, ...]:
    """One row for each (X, R) of `pairs`, with the pooled variance: t on N - k degrees of freedom.

    `alpha` is the level of each one-sided test, below 1/2. `adjust` is none, bonferroni or holm, over the
    rows. Intervals: at 1 - 2 alpha; with bonferroni at 1 - 2 alpha / m for m rows, so that interval and
    verdict agree; with holm, which has no simultaneous interval, the unadjusted one.
    Raises NotComputableError where nothing varies within the levels, KeyError for an unknown level or
    adjustment, ValueError for another alpha.
    """
    level = interval_level(alpha, adjust, len(pairs))
    require_error_term(analysis)
    variance, df = analysis.ms_within, analysis.df_within
    t = float(t_isf(level, df))
    rows = []
    for x, r in levels_of(analysis, pairs):
        square = variance * (Fraction(1, x.n) + Fraction(1, r.n))
        rows.append(_row(x, r, square, df, t, margins))
    return tested(rows, adjust, 0)


def equivalence_separate(
    analysis: OneWay, pairs: Pairs, margins: Margins, alpha: float, adjust: str, missing: int = 0
) -> tuple[EquivalenceResult, ...]:
    """As `equivalence_pooled`, with separate variances: only the two levels of a row enter it.

    The standard error is sqrt(s_X^2 / n_X + s_R^2 / n_R), on the degrees of freedom of Welch and
    Satterthwaite, an exact rational rounded to a double. `missing` is the number of rows of the family that
    cannot be given: they count as p = 1.
    Raises NotComputableError where a level has one value only or does not vary (see `without_variance`); the
    rest as `equivalence_pooled`.
    """
    level = interval_level(alpha, adjust, len(pairs) + missing)
    rows = []
    for x, r in levels_of(analysis, pairs):
        v_x, v_r = mean_variances(x, r)
        df = satterthwaite((v_x, x.n - 1), (v_r, r.n - 1))
        rows.append(_row(x, r, v_x + v_r, df, float(t_isf(level, df)), margins))
    return tested(rows, adjust, missing)


def _row(
    x: LevelSummary, r: LevelSummary, square: Fraction, df: int | float, t: float, margins: Margins
) -> "Row":
    difference, se = x.mean - r.mean, Root.of(square)
    half = Fraction(round_significant(t * to_double(se)))
    lower, upper = margins.lower, margins.upper
    return Row(
        f"{x.level} - {r.level}",
        difference,
        se,
        df,
        (
            None if lower is None else to_double(difference - half),
            None if upper is None else to_double(difference + half),
        ),
        None if lower is None else Boundary(lower, difference - lower, square, df),
        None if upper is None else Boundary(upper, difference - upper, square, df),
        t,
    )


@dataclass(frozen=True, slots=True)
class Boundary:
    """What is tested against zero at a margin: the excess over it, its squared standard error, its df."""

    margin: Fraction
    excess: Fraction
    square: Fraction
    df: int | float


@dataclass(frozen=True, slots=True)
class Row:
    """A row before its tests; fields as in EquivalenceResult."""

    label: str
    estimate: Fraction
    se: Root | None
    df: int | float | None
    interval: Interval
    lower: Boundary | None
    upper: Boundary | None
    critical: float | None


def tested(rows: Sequence[Row], adjust: str, missing: int) -> tuple[EquivalenceResult, ...]:
    """The rows with their tests, the tails adjusted for their number and that of the `missing` ones.

    Raises KeyError for an unknown adjustment.
    """
    above = _tests([row.lower for row in rows], GREATER)
    below = _tests([row.upper for row in rows], LESS)
    tails = [_larger(*tests) for tests in zip(above, below, strict=True)]
    adjusted = adjusted_beside_missing(adjust, tails, missing)
    return tuple(
        EquivalenceResult(
            row.label, row.estimate, row.se, row.df, row.interval, low, high, tail, after, row.critical
        )
        for row, low, high, tail, after in zip(rows, above, below, tails, adjusted, strict=True)
    )


def _tests(boundaries: Sequence[Boundary | None], direction: str) -> list[BoundaryTest | None]:
    # All tests with the same degrees of freedom at once.
    of_each_df: dict[int | float, list[tuple[int, Boundary]]] = {}
    for at, boundary in enumerate(boundaries):
        if boundary is not None:
            of_each_df.setdefault(boundary.df, []).append((at, boundary))
    found: list[BoundaryTest | None] = [None] * len(boundaries)
    for df, members in of_each_df.items():
        statistics = [signed_root(one.excess, one.excess**2 / one.square) for _, one in members]
        tails = t_tails(doubles(statistics), df, direction)
        for (at, one), statistic, tail in zip(members, statistics, tails, strict=True):
            found[at] = BoundaryTest(one.margin, statistic, Root.of(one.square), df, tail)
    return found


def _larger(lower: BoundaryTest | None, upper: BoundaryTest | None) -> Tail:
    tails = [test.tail for test in (lower, upper) if test is not None]
    return max(tails, key=lambda tail: (tail.p, tail.log10_p))


def interval_level(alpha: float, adjust: str, size: int) -> float:
    """The level of each end of an interval in a family of `size` rows.

    Raises ValueError for an alpha that is not between 0 and 1/2, KeyError for an unknown adjustment.
    """
    if not 0 < alpha < 0.5:
        raise ValueError(f"the level of a one-sided test is between 0 and 1/2, not {alpha!r}")
    if adjust not in EQUIVALENCE_ADJUSTMENTS:
        raise KeyError(adjust)
    return bonferroni_level(alpha, size) if adjust == "bonferroni" else alpha


def levels_of(analysis: OneWay, pairs: Pairs) -> list[tuple[LevelSummary, LevelSummary]]:
    """The summaries of both levels of each pair. Raises KeyError for an unknown level."""
    summaries = {summary.level: summary for summary in analysis.levels}
    return [(summaries[x], summaries[r]) for x, r in pairs]


def mean_variances(x: LevelSummary, r: LevelSummary) -> tuple[Fraction, Fraction]:
    """s_i^2 / n_i of both levels.

    Raises NotComputableError where a level has one value or does not vary.
    """
    reason = without_variance([x, r])
    if reason is not None:
        raise NotComputableError(reason)
    return x.ss / (x.n * (x.n - 1)), r.ss / (r.n * (r.n - 1))


def satterthwaite(*parts: tuple[Fraction, int]) -> float:
    """The degrees of freedom of a sum of variances, each with its own: (sum v)^2 / sum(v^2 / df).

    Satterthwaite 1946 (Biometrics Bull. 2, 110), Welch 1947 (Biometrika 34, 28); from memory.
    """
    total = sum((v for v, _ in parts), Fraction(0))
    return to_double(total**2 / sum((v**2 / df for v, df in parts), Fraction(0)))
