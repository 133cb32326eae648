"""The second route: what a run reports, recomputed in doubles by other algorithms and compared.

Means, sums of squares and F come from two-pass sums of doubles, `math.fsum` on differences that are formed
exactly as decimals and rounded once; nothing of `ExactSums` or `one_way` is used. Tails come from
`second_tails`. Two numbers agree where their relative difference, taken to the larger one, is within a bound
that follows from the data. With u = 2^-53:

Sums of squares. The values of a level are shifted by its first value, v_ij = y_ij - y_i1, the first values by
the first of all, w_i = y_i1 - y_11. A rounded difference is off by at most u times itself, a mean of rounded
differences by 3u times the mean of their sizes; so the deviations whose squares are summed are off, together,
by at most 4u ||v|| within the levels and 12u ||m|| between them, with

    ||v||^2 = sum v_ij^2        ||m||^2 = sum n_i (|w_i| + mean |v_i|)^2

and with the condition number c = ||.|| / sqrt(SS), which is at least 1 (T. F. Chan, G. H. Golub and R. J.
LeVeque, Am. Stat. 37, 1983, 242; from memory), the relative error of SS is at most

    2e + e^2        e = 16 u c

which also covers the rounding of squares, of the sum and of the reported number. SS = 0 is no exception: the
bound then allows as much as the roundings may leave.

F: with the bounds a of SS between and b of SS within, (a + b + 8u) / (1 - b); no bound where b reaches 1.
Means: 8u (|y_i1| + mean |v_i|) / |mean|.
Tails: the bound of their law, for tails of 1e-280 and more; smaller ones only have to be smaller in both.
"""

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Final

import numpy as np

from assayfolio.exact import Decimal10
from assayfolio.statistics.second_tails import Law

MOST_ROWS: Final = 40
FEWEST_ROWS: Final = 4
MOST_EFFORT: Final = 400
MOST_DIGITS: Final = 16.0
SMALLEST_TAIL: Final = 1e-280
_U: Final = 2.0**-53

Groups = Sequence[tuple[str, Sequence[Decimal10]]]


@dataclass(frozen=True, slots=True)
class ReportedTable:
    """The doubles that are reported: each mean, the sums of squares, and F where there is one."""

    means: Mapping[str, float]
    ss_between: float
    ss_within: float
    f: float | None


@dataclass(frozen=True, slots=True)
class ReportedTail:
    """One reported p that is the tail of a law, at the statistic as that law takes it.

    That is the p of an F or t test before any adjustment, and the adjusted p of a single-step method.
    """

    label: str
    law: Law
    statistic: float
    p: float


@dataclass(frozen=True, slots=True)
class ReportedTails:
    """The reported tails of one table or family, under the name by which the record of the run calls them."""

    quantity: str
    rows: Sequence[ReportedTail]


@dataclass(frozen=True, slots=True)
class Agreement:
    """How a reported quantity agrees with the second route.

    `digits` is the negative decimal logarithm of the relative difference, from 0 to 16; `bound` is the
    largest relative difference that is allowed. Of `of` numbers `compared` were compared; digits and bound
    are those of the one that comes nearest to its bound, or is farthest beyond it: `at`.
    """

    quantity: str
    digits: float
    bound: float
    holds: bool
    compared: int
    of: int
    at: str


@dataclass(frozen=True, slots=True)
class NotCompared:
    """A quantity, or numbers of it, that the second route has nothing to say about, and why."""

    quantity: str
    reason: str


@dataclass(frozen=True, slots=True)
class SecondRoute:
    """All agreements of one response, and what was not compared."""

    agreements: tuple[Agreement, ...]
    not_compared: tuple[NotCompared, ...]

    @property
    def holds(self) -> bool:
        """Whether every agreement is within its bound."""
        return all(agreement.holds for agreement in self.agreements)

    @property
    def failures(self) -> tuple[Agreement, ...]:
        """The agreements beyond their bound."""
        return tuple(agreement for agreement in self.agreements if not agreement.holds)


def second_route(groups: Groups, table: ReportedTable, tails: Sequence[ReportedTails] = ()) -> SecondRoute:
    """The reported numbers of one response against the second route.

    `groups` are the analysed values a level, at least one each. Of more than 40 tails in a family 40 are
    recomputed, fewer of costly laws, but four at least: those with the smallest and the largest p, and others
    evenly spaced in rank (`chosen_rows`).
    Raises ValueError where the levels of `table` are not those of `groups`.
    """
    if [level for level, _ in groups] != list(table.means):
        raise ValueError("the reported means are not those of the levels that were analysed")
    agreements, missing = _compare_table(_Layout.of(groups), table)
    for family in tails:
        agreement, left_out = _compare_tails(family)
        agreements += agreement
        missing += left_out
    return SecondRoute(tuple(agreements), tuple(missing))


def second_route_of_tails(tails: Sequence[ReportedTails], reason: str) -> SecondRoute:
    """The reported tails of one response against the second route; the table is not compared for `reason`."""
    agreements: list[Agreement] = []
    missing = [NotCompared("means, sums of squares and F", reason)]
    for family in tails:
        agreement, left_out = _compare_tails(family)
        agreements += agreement
        missing += left_out
    return SecondRoute(tuple(agreements), tuple(missing))


def chosen_rows(p: Sequence[float], most: int = MOST_ROWS) -> tuple[int, ...]:
    """Which tails of a family are recomputed: all up to `most`, otherwise so many, evenly spaced in rank.

    The first is the smallest, the last the largest; equal ones rank in their order. Indices in rising order.
    """
    if len(p) <= most:
        return tuple(range(len(p)))
    ranked = sorted(range(len(p)), key=lambda row: (p[row], row))
    last = len(p) - 1
    return tuple(sorted(ranked[at * last // (most - 1)] for at in range(most)))


@dataclass(frozen=True, slots=True)
class _Compared:
    """One reported number beside the recomputed one, with the bound of their relative difference."""

    at: str
    reported: float
    recomputed: float
    bound: float

    @property
    def difference(self) -> float:
        """The relative difference to the larger one; infinite where either is not a number."""
        if self.reported == self.recomputed:
            return 0.0
        difference = abs(self.reported - self.recomputed) / max(abs(self.reported), abs(self.recomputed))
        return difference if math.isfinite(difference) else math.inf

    @property
    def share_of_bound(self) -> float:
        """The difference as a share of the bound."""
        return 0.0 if self.difference == 0 else self.difference / max(self.bound, 5e-324)


def _agreement(quantity: str, compared: Sequence[_Compared], of: int) -> Agreement:
    worst = max(compared, key=lambda one: one.share_of_bound)
    difference = worst.difference
    digits = MOST_DIGITS if difference == 0 else min(MOST_DIGITS, max(0.0, -math.log10(difference)))
    return Agreement(quantity, digits, worst.bound, difference <= worst.bound, len(compared), of, worst.at)


def _one(quantity: str, reported: float, recomputed: float, bound: float) -> Agreement:
    return _agreement(quantity, [_Compared(quantity, reported, recomputed, bound)], 1)


@dataclass(frozen=True, slots=True)
class _Level:
    """One level in doubles: w_i, the first value, and n, mean, mean size, squares and deviations of v_ij."""

    level: str
    n: int
    first: float
    w: float
    mean: float
    mean_size: float
    squares: float
    ss: float

    @staticmethod
    def of(level: str, values: Sequence[int], origin: int, unit: Fraction) -> "_Level":
        """The level of `values`, which count multiples of `unit`."""
        first = values[0]
        v = [_rounded(value - first, unit) for value in values]
        n = len(v)
        mean = math.fsum(v) / n
        return _Level(
            level=level,
            n=n,
            first=_rounded(first, unit),
            w=_rounded(first - origin, unit),
            mean=mean,
            mean_size=math.fsum(map(abs, v)) / n,
            squares=math.fsum(x * x for x in v),
            ss=math.fsum((x - mean) * (x - mean) for x in v),
        )

    @property
    def location(self) -> float:
        """The mean of the level, less the first value of all."""
        return self.w + self.mean


@dataclass(frozen=True, slots=True)
class _Layout:
    """All levels in doubles."""

    levels: tuple[_Level, ...]

    @staticmethod
    def of(groups: Groups) -> "_Layout":
        """The levels of `groups`, every difference formed exactly before it is rounded."""
        exponent = min(value.exponent for _, values in groups for value in values)
        divisor = math.lcm(*(value.divisor for _, values in groups for value in values))
        units = [
            [
                value.mantissa * 10 ** (value.exponent - exponent) * (divisor // value.divisor)
                for value in values
            ]
            for _, values in groups
        ]
        unit = Fraction(10) ** exponent / divisor
        levels = zip(groups, units, strict=True)
        return _Layout(tuple(_Level.of(name, level, units[0][0], unit) for (name, _), level in levels))

    @property
    def n_total(self) -> int:
        """The number of values."""
        return sum(level.n for level in self.levels)

    def ss_between(self) -> tuple[float, float]:
        """SS between, and ||m||^2."""
        grand = math.fsum(level.n * level.location for level in self.levels) / self.n_total
        squares = math.fsum(level.n * (level.location - grand) ** 2 for level in self.levels)
        return squares, math.fsum(level.n * (abs(level.w) + level.mean_size) ** 2 for level in self.levels)

    def ss_within(self) -> tuple[float, float]:
        """SS within, and ||v||^2."""
        return math.fsum(level.ss for level in self.levels), math.fsum(level.squares for level in self.levels)


def _rounded(units: int, unit: Fraction) -> float:
    return units * unit.numerator / unit.denominator  # true division of integers rounds correctly


def _bound_of_squares(size: float, ss: float) -> float:
    if ss == 0:
        return 0.0
    e = 16 * _U * math.sqrt(size / ss)
    return 2 * e + e * e


def _compare_table(layout: _Layout, table: ReportedTable) -> tuple[list[Agreement], list[NotCompared]]:
    between, size_between = layout.ss_between()
    within, size_within = layout.ss_within()
    a = _bound_of_squares(size_between, max(between, table.ss_between))
    b = _bound_of_squares(size_within, max(within, table.ss_within))
    agreements = [
        _agreement("means", [_mean(level, table) for level in layout.levels], len(layout.levels)),
        _one("SS between", table.ss_between, between, a),
        _one("SS within", table.ss_within, within, b),
    ]
    if table.f is None:
        return agreements, [NotCompared("F", "it is not reported")]
    df1, df2 = len(layout.levels) - 1, layout.n_total - len(layout.levels)
    f = (between / df1) / (within / df2) if within else math.inf
    bound = (a + b + 8 * _U) / (1 - b) if b < 1 else math.inf
    return [*agreements, _one("F", table.f, f, bound)], []


def _mean(level: _Level, table: ReportedTable) -> _Compared:
    reported, recomputed = table.means[level.level], level.first + level.mean
    larger = max(abs(reported), abs(recomputed))
    bound = 8 * _U * (abs(level.first) + level.mean_size) / larger if larger else 0.0
    return _Compared(level.level, reported, recomputed, bound)


def _compare_tails(family: ReportedTails) -> tuple[list[Agreement], list[NotCompared]]:
    effort = max((row.law.effort for row in family.rows), default=1)
    most = max(FEWEST_ROWS, min(MOST_ROWS, MOST_EFFORT // effort))
    rows = [family.rows[row] for row in chosen_rows([row.p for row in family.rows], most)]
    by_law: dict[Law, list[ReportedTail]] = {}
    for row in rows:
        by_law.setdefault(row.law, []).append(row)
    compared = [
        _Compared(row.label, row.p, float(tail), law.bound)
        for law, alike in by_law.items()
        for row, tail in zip(alike, law.tails(np.array([row.statistic for row in alike])), strict=True)
    ]
    large = [one for one in compared if max(one.reported, one.recomputed) >= SMALLEST_TAIL]
    missing = []
    if len(large) < len(compared):
        reason = f"{len(compared) - len(large)} of {len(compared)} tails are below {SMALLEST_TAIL:g} in both"
        missing.append(NotCompared(family.quantity, reason))
    if not family.rows:
        missing.append(NotCompared(family.quantity, "no tails are reported"))
    return ([_agreement(family.quantity, large, len(family.rows))] if large else []), missing
