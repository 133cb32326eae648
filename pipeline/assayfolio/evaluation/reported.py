"""What is reported, laid out for the second route, which recomputes it by other algorithms.

Means, sums of squares and F of every response; the tails of the overall tests, of every comparison, and of
the equivalence tests with margins in units. p-values before any adjustment of p-values are compared, and for
the procedures with a distribution of their own (Tukey-Kramer, Games-Howell, Dunnett, Scheffe) their adjusted
ones.
"""

from collections.abc import Callable, Iterator
from fractions import Fraction
from math import sqrt

from assayfolio.evaluation.alternatives import NOTHING_EXCLUDED
from assayfolio.evaluation.subject import Subject, subject_of
from assayfolio.exact import Root, to_double
from assayfolio.findings import (
    ComparisonFamily,
    ComparisonRow,
    EquivalenceFamily,
    EquivalenceRow,
    Findings,
    ResponseFindings,
)
from assayfolio.observations.values import Observations
from assayfolio.statistics.comparisons import LESS, TWO_SIDED
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.statistics.second_route import (
    NotCompared,
    ReportedTable,
    ReportedTail,
    ReportedTails,
    SecondRoute,
    second_route,
    second_route_of_tails,
)
from assayfolio.statistics.second_tails import (
    Law,
    ManyToOneAbove,
    ManyToOneTwoSided,
    StudentAbove,
    StudentizedRange,
    StudentTwoSided,
    VarianceRatio,
)


def second_routes(
    findings: Findings, observations: tuple[Observations, ...]
) -> tuple[tuple[str, SecondRoute], ...]:
    """For each response, how its findings agree with the second route, also those with nothing excluded."""
    compared = []
    for found, observed in zip(findings.responses, observations, strict=True):
        compared.append((found.response, _route(found, subject_of(observed, found.unit))))
        if found.without_exclusions is not None:
            subject = subject_of(observed, found.unit, observed.with_excluded)
            name = f"{found.response} {NOTHING_EXCLUDED}"
            compared.append((name, _route(found.without_exclusions, subject)))
    return tuple(compared)


def _route(found: ResponseFindings, subject: Subject) -> SecondRoute:
    tails = list(_tails(found))
    try:
        subject.require_values()
        route = second_route(subject.groups, _table(found), tails)
    except NotComputableError as error:
        route = second_route_of_tails(tails, str(error))
    return SecondRoute(route.agreements, (*route.not_compared, *_beyond(found)))


def _table(found: ResponseFindings) -> ReportedTable:
    anova = found.anova
    return ReportedTable(
        means={level.level: to_double(level.mean) for level in found.levels},
        ss_between=to_double(anova.between.ss),
        ss_within=to_double(anova.within.ss),
        f=None if anova.f is None else to_double(anova.f),
    )


def _tails(found: ResponseFindings) -> Iterator[ReportedTails]:
    overall = list(_overall(found))
    if overall:
        yield ReportedTails("tails of the overall tests", overall)
    for comparison in found.comparisons:
        yield ReportedTails(
            f"t tails: {comparison.name}", [_t_tail(comparison, row) for row in comparison.rows]
        )
        adjusted = _adjusted_tails(found, comparison)
        if adjusted:
            yield ReportedTails(f"adjusted tails: {comparison.name}", adjusted)
    for family in found.equivalence:
        if family.scale == "units":
            rows = [tail for row in family.rows for tail in _boundary_tails(family, row)]
            yield ReportedTails(f"t tails: {family.name}", rows)


def _overall(found: ResponseFindings) -> Iterator[ReportedTail]:
    anova, welch, means = found.anova, found.welch, found.brown_forsythe_means
    if anova.f is not None and anova.p is not None:
        law = VarianceRatio(anova.between.df, anova.within.df)
        yield ReportedTail("F", law, to_double(anova.f), anova.p)
    if welch is not None:
        yield ReportedTail(
            "Welch", VarianceRatio(welch.df1, to_double(welch.df2)), to_double(welch.f), welch.p
        )
    if means is not None:
        f, df2 = to_double(means.f), to_double(means.df2)
        yield ReportedTail("Brown-Forsythe", VarianceRatio(means.df1, df2), f, means.p)
        mehrotra = VarianceRatio(to_double(means.df1_mehrotra), df2)
        yield ReportedTail("Mehrotra", mehrotra, f, means.p_mehrotra)


def _t_tail(family: ComparisonFamily, row: ComparisonRow) -> ReportedTail:
    if family.alternative == TWO_SIDED:
        return ReportedTail(row.label, StudentTwoSided(row.df), to_double(row.statistic), row.p)
    return ReportedTail(row.label, StudentAbove(row.df), _towards(family, row), row.p)


def _towards(family: ComparisonFamily, row: ComparisonRow) -> float:
    """The statistic in the direction of a one-sided alternative."""
    statistic = to_double(row.statistic)
    return -statistic if family.alternative == LESS else statistic


_LawOf = Callable[[ComparisonRow], tuple[Law, float]]


def _own_law(found: ResponseFindings, family: ComparisonFamily) -> _LawOf | None:
    """The law and the statistic of a row of a family that has a distribution of its own; else None."""
    k = len(found.levels)
    if family.across_responses == "holm":
        return None
    if family.adjust in ("tukey-kramer", "games-howell"):
        return lambda row: (StudentizedRange(k, row.df), sqrt(2) * abs(to_double(row.statistic)))
    if family.adjust == "scheffe":
        return lambda row: (VarianceRatio(k - 1, row.df), _square(row) / (k - 1))
    if family.adjust == "dunnett":
        return lambda row: _many_to_one(found, family, row)
    return None


def _adjusted_tails(found: ResponseFindings, family: ComparisonFamily) -> list[ReportedTail]:
    """The adjusted tails that a law gives; an adjusted p of 1 may have been cut off and says nothing."""
    law = _own_law(found, family)
    return (
        [] if law is None else [_adjusted(family, row, law(row)) for row in family.rows if row.p_adjusted < 1]
    )


def _square(row: ComparisonRow) -> float:
    statistic = row.statistic
    return to_double(statistic.square if isinstance(statistic, Root) else statistic**2)


def _many_to_one(found: ResponseFindings, family: ComparisonFamily, row: ComparisonRow) -> tuple[Law, float]:
    n_reference = next(level.n for level in found.levels if level.level == family.against)
    n_others = tuple(level.n for level in found.levels if level.level != family.against)
    if family.alternative == TWO_SIDED:
        return ManyToOneTwoSided(n_reference, n_others, row.df), to_double(row.statistic)
    return ManyToOneAbove(n_reference, n_others, row.df), _towards(family, row)


def _adjusted(family: ComparisonFamily, row: ComparisonRow, at: tuple[Law, float]) -> ReportedTail:
    law, statistic = at
    return ReportedTail(row.label, law, statistic, row.p_adjusted / family.responses)


def _boundary_tails(family: EquivalenceFamily, row: EquivalenceRow) -> Iterator[ReportedTail]:
    if row.se is None or row.df is None:
        return
    if family.lower is not None and row.p_lower is not None:
        t = _statistic(row.estimate - family.lower, row.se)
        yield ReportedTail(f"{row.label}, lower margin", StudentAbove(row.df), t, row.p_lower)
    if family.upper is not None and row.p_upper is not None:
        t = _statistic(family.upper - row.estimate, row.se)
        yield ReportedTail(f"{row.label}, upper margin", StudentAbove(row.df), t, row.p_upper)


def _statistic(excess: Fraction, se: Root) -> float:
    return to_double(Root((excess > 0) - (excess < 0), excess**2 / se.square))


def _beyond(found: ResponseFindings) -> Iterator[NotCompared]:
    """What is reported and has no second route."""
    for comparison in found.comparisons:
        if comparison.adjust == "dunnett-step-down":
            reason = "each step has a distribution of its own; the t tails are compared"
            yield NotCompared(f"adjusted tails: {comparison.name}", reason)
        elif _own_law(found, comparison) is not None and not _adjusted_tails(found, comparison):
            yield NotCompared(f"adjusted tails: {comparison.name}", "every adjusted p is 1")
    for family in found.equivalence:
        if family.scale == "percent":
            yield NotCompared(f"t tails: {family.name}", "the second route has no ratio of means")
