"""The planned comparison of spreads: the variance of every level divided by that of the reference."""

from collections.abc import Sequence

from assayfolio.evaluation.across_responses import AcrossRule, FamilyTails, across_rule
from assayfolio.evaluation.subject import Subject
from assayfolio.evaluation.verdicts import difference_verdict
from assayfolio.exact import round_significant
from assayfolio.findings import NotReported, SpreadFindings, SpreadRow
from assayfolio.method_names import spread_method
from assayfolio.statistics.adjustment import Tail, stated
from assayfolio.statistics.spread import VarianceRatio, variance_ratios
from assayfolio.study.plan import SpreadPlan, StudyDefinition


def spread_findings(
    study: StudyDefinition, subjects: Sequence[Subject], not_reported: list[NotReported]
) -> list[SpreadFindings | None]:
    """The variance ratios of each subject, adjusted over the responses as planned; None where not planned.

    A level without a variance, or all of them where the reference has none, stands in `not_reported`.
    """
    plan = study.spread
    if plan is None:
        return [None] * len(subjects)
    rule = across_rule(study, plan.adjust, subjects[0].analysis.k - 1, len(subjects))
    level = rule.level(study.alpha)
    ratios = []
    for subject in subjects:
        rows = variance_ratios(subject.analysis, plan.against, level, plan.adjust)
        ratios.append([row for row in rows if row.reason is None])
        not_reported.extend(
            subject.unreported(f"spread: {row.label}", row.reason) for row in rows if row.reason is not None
        )
    adjusted = rule.adjusted([_tails(rows) for rows in ratios])
    return [
        _findings(study, plan, rule, rows, tails) if rows else None
        for rows, tails in zip(ratios, adjusted, strict=True)
    ]


def _tails(rows: Sequence[VarianceRatio]) -> FamilyTails | None:
    raw = tuple(row.tail for row in rows if row.tail is not None)
    within = tuple(row.adjusted for row in rows if row.adjusted is not None)
    return FamilyTails(raw, within, len(rows) - len(raw)) if raw else None


def _findings(
    study: StudyDefinition,
    plan: SpreadPlan,
    rule: AcrossRule,
    rows: Sequence[VarianceRatio],
    adjusted: Sequence[Tail],
) -> SpreadFindings:
    found = []
    for row, tail in zip(rows, adjusted, strict=True):
        if row.ratio is None or row.df is None or row.tail is None:
            continue
        p_adjusted = stated(tail).p
        found.append(
            SpreadRow(
                label=row.label,
                ratio=row.ratio,
                df=row.df,
                p=round_significant(row.tail.p),
                p_adjusted=p_adjusted,
                ci=row.interval if rule.has_intervals else None,
                verdict=difference_verdict(p_adjusted, study.alpha),
            )
        )
    return SpreadFindings(
        against=plan.against,
        adjust=plan.adjust,
        method=spread_method(plan.adjust),
        rows=tuple(found),
        responses=rule.responses,
        across_responses=rule.method,
    )
