"""The same analysis on other values: with nothing excluded, and under each policy for values below a limit.

The values of one response are changed at a time for the policies, those of all together for the exclusions.
"""

from collections.abc import Callable, Sequence
from fractions import Fraction

from assayfolio.evaluation.subject import Subject, subject_of
from assayfolio.exact import Decimal10
from assayfolio.findings import NotReported, ResponseFindings, SpreadFindings
from assayfolio.findings_intake import (
    CensoredLevel,
    CensoringFindings,
    PolicyFamily,
    PolicyFindings,
    PolicyRow,
)
from assayfolio.observations.values import BelowLimit, Observation, Observations
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.study.plan import StudyDefinition

Analyse = Callable[[Sequence[Subject], list[NotReported]], tuple[ResponseFindings, ...]]
"""The whole analysis of the responses, with what cannot be given added to the list."""

NOTHING_EXCLUDED = "with nothing excluded"
_POLICY_WORDS = {
    "omit": "values below a limit omitted",
    "half-limit": "half the limit for values below it",
    "limit": "the limit for values below it",
}


def unexcluded_findings(
    study: StudyDefinition,
    observations: Sequence[Observations],
    analyse: Analyse,
    not_reported: list[NotReported],
) -> list[ResponseFindings | None]:
    """The analysis of each response as if nothing had been excluded; None where nothing was.

    Where Holm's adjustment takes the responses together, an exclusion from one bears on all, so that none is
    None.
    """
    excluded = [any(aside.cause == "excluded" for aside in observed.set_aside) for observed in observations]
    if not any(excluded):
        return [None] * len(observations)
    subjects = [
        subject_of(observed, study.data.unit_of(observed.response), observed.with_excluded)
        for observed in observations
    ]
    gaps: list[NotReported] = []
    found = analyse(subjects, gaps)
    _add_new(gaps, NOTHING_EXCLUDED, not_reported)
    together = study.design.across_responses == "holm"
    return [one if own or together else None for one, own in zip(found, excluded, strict=True)]


def censoring_findings(
    study: StudyDefinition,
    observations: Sequence[Observations],
    subjects: Sequence[Subject],
    analyse: Analyse,
    not_reported: list[NotReported],
) -> list[CensoringFindings | None]:
    """The values beyond a limit of each response, and its result under each policy; None where it has none.

    `subjects` are the responses as planned. A policy under which no analysis is possible, and what cannot be
    given under one, stand in `not_reported`.
    """
    return [
        _censoring(study, observed, at, subjects, analyse, not_reported)
        for at, observed in enumerate(observations)
    ]


def _censoring(
    study: StudyDefinition,
    observed: Observations,
    at: int,
    subjects: Sequence[Subject],
    analyse: Analyse,
    not_reported: list[NotReported],
) -> CensoringFindings | None:
    levels = _censored_levels(observed)
    if not levels:
        return None
    sensitivity = []
    for policy, rows in observed.under_policies:
        what = _POLICY_WORDS[policy]
        try:
            subject = subject_of(observed, subjects[at].unit, rows)
        except NotComputableError as error:
            not_reported.append(subjects[at].unreported(f"result with {what}", error))
            continue
        gaps: list[NotReported] = []
        found = analyse([*subjects[:at], subject, *subjects[at + 1 :]], gaps)[at]
        _add_new([gap for gap in gaps if gap.response == subject.response], f"with {what}", not_reported)
        sensitivity.append(_under(policy, policy == study.data.below_limit, found))
    missing = "half-limit" not in dict(observed.under_policies)
    if observed.under_policies and missing:
        reason = "half of a limit that is not above zero is no value below it"
        not_reported.append(subjects[at].unreported(f"result with {_POLICY_WORDS['half-limit']}", reason))
    return CensoringFindings(
        below_limit=study.data.below_limit,
        above_limit=study.data.above_limit,
        below=sum(level.below for level in levels),
        above=sum(level.above for level in levels),
        levels=levels,
        sensitivity=tuple(sensitivity),
        verdicts_agree=len({_verdicts(one) for one in sensitivity}) <= 1,
    )


def _add_new(gaps: Sequence[NotReported], where: str, not_reported: list[NotReported]) -> None:
    """Add those of `gaps` that the analysis as planned does not have as well, saying where they belong."""
    known = frozenset(not_reported)
    not_reported.extend(
        NotReported(f"{where}: {gap.what}", gap.reason, gap.response) for gap in gaps if gap not in known
    )


def _under(policy: BelowLimit, planned: bool, found: ResponseFindings) -> PolicyFindings:
    test = found.overall_test
    return PolicyFindings(
        policy=policy,
        planned=planned,
        levels=tuple((level.level, level.n, level.mean) for level in found.levels),
        p=None if test is None else test.p,
        p_adjusted=None if test is None else test.p_adjusted,
        verdict=found.overall_verdict,
        comparisons=tuple(
            PolicyFamily(
                family.name,
                tuple(PolicyRow(row.label, row.estimate, row.p_adjusted, row.verdict) for row in family.rows),
            )
            for family in found.comparisons
        ),
        equivalence=tuple(
            PolicyFamily(
                family.name,
                tuple(PolicyRow(row.label, row.estimate, row.p_adjusted, row.verdict) for row in family.rows),
            )
            for family in found.equivalence
        ),
        spread=None if found.spread is None else _spread(found.spread),
        criteria=tuple(criterion.verdict for criterion in found.criteria),
    )


def _spread(found: SpreadFindings) -> PolicyFamily:
    return PolicyFamily(
        "", tuple(PolicyRow(row.label, row.ratio, row.p_adjusted, row.verdict) for row in found.rows)
    )


def _verdicts(found: PolicyFindings) -> tuple[tuple[str, str, str], ...]:
    """Every planned verdict, with what it is about: a family that cannot be formed is another answer."""
    families = [*found.comparisons, *found.equivalence, *([found.spread] if found.spread else [])]
    rows = [(family.name, row.label, row.verdict) for family in families for row in family.rows]
    return (("", "", found.verdict), *rows, *(("", "", verdict) for verdict in found.criteria))


def _censored_levels(observed: Observations) -> tuple[CensoredLevel, ...]:
    """The levels with received values beyond a limit, exclusions apart."""
    below: dict[str, list[Fraction]] = {level: [] for level in observed.levels}
    above: dict[str, list[Fraction]] = {level: [] for level in observed.levels}
    by_kind = {"below limit": below, "above limit": above}
    for level, kind, limit in _beyond_limits(observed):
        if kind in by_kind:
            by_kind[kind][level].append(limit.fraction)
    received = {counts.level: counts.received - counts.excluded for counts in observed.flow}
    return tuple(
        CensoredLevel(
            level=level,
            received=received[level],
            below=len(below[level]),
            above=len(above[level]),
            below_limits=tuple(sorted(set(below[level]))),
            above_limits=tuple(sorted(set(above[level]))),
        )
        for level in observed.levels
        if below[level] or above[level]
    )


def _beyond_limits(observed: Observations) -> Sequence[tuple[str, str, Decimal10]]:
    """(level, kind, limit) of every value that was received beyond a limit and not excluded."""
    singles: list[Observation] = []
    for row in observed.rows:
        singles.extend(row.repeats or (row,))
    analysed = [(row.level, row.kind, row.limit) for row in singles if row.limit is not None]
    omitted = [
        (aside.level, aside.cause, aside.value) for aside in observed.set_aside if aside.value is not None
    ]
    return [*analysed, *((level, cause, limit) for level, cause, limit in omitted if cause != "excluded")]
