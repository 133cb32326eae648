"""The planned tests of equivalence and non-inferiority, on every response."""

from collections.abc import Callable, Sequence
from fractions import Fraction
from itertools import combinations

from assayfolio.evaluation.across_responses import AcrossRule, FamilyTails, across_rule
from assayfolio.evaluation.subject import Subject
from assayfolio.evaluation.verdicts import shows
from assayfolio.exact import round_significant
from assayfolio.findings import (
    EQUIVALENCE_NOT_SHOWN,
    EQUIVALENCE_SHOWN,
    NON_INFERIORITY_NOT_SHOWN,
    NON_INFERIORITY_SHOWN,
    EquivalenceFamily,
    EquivalenceRow,
    NotReported,
)
from assayfolio.method_names import equivalence_method
from assayfolio.statistics.adjustment import Tail, stated
from assayfolio.statistics.equivalence import (
    EquivalenceResult,
    Margins,
    Pairs,
    equivalence_pooled,
    equivalence_separate,
)
from assayfolio.statistics.equivalence_percent import (
    equivalence_percent_pooled,
    equivalence_percent_separate,
)
from assayfolio.statistics.oneway import NotComputableError, OneWay
from assayfolio.study.plan import EquivalencePlan, StudyDefinition

EQUIVALENCE, NON_INFERIORITY = "equivalence", "non-inferiority"
UNITS, PERCENT = "units", "percent"

_VERDICTS = {
    EQUIVALENCE: (EQUIVALENCE_SHOWN, EQUIVALENCE_NOT_SHOWN),
    NON_INFERIORITY: (NON_INFERIORITY_SHOWN, NON_INFERIORITY_NOT_SHOWN),
}
_PROCEDURES: dict[
    tuple[str, bool], Callable[[OneWay, Pairs, Margins, float, str], tuple[EquivalenceResult, ...]]
] = {
    ("pooled", False): equivalence_pooled,
    ("pooled", True): equivalence_percent_pooled,
    ("separate", False): equivalence_separate,
    ("separate", True): equivalence_percent_separate,
}

_Results = tuple[EquivalenceResult, ...]


def equivalence_families(
    study: StudyDefinition, subjects: Sequence[Subject], not_reported: list[NotReported]
) -> list[tuple[EquivalenceFamily, ...]]:
    """The families of each subject in the order of the plan, adjusted over the responses as planned."""
    found: dict[str, list[EquivalenceFamily]] = {subject.response: [] for subject in subjects}
    for plan in study.equivalence:
        asked = [subject for subject in subjects if plan.response in (None, subject.response)]
        rule = across_rule(study, plan.adjust, len(_pairs(plan, subjects[0].analysis)), len(asked))
        results = [_results_of(plan, study, subject, rule, not_reported) for subject in asked]
        tails = [None if one is None else _tails(one) for one in results]
        for subject, rows, adjusted in zip(asked, results, rule.adjusted(tails), strict=True):
            if rows is not None:
                found[subject.response].append(_family(plan, study, rule, rows, adjusted))
    return [tuple(found[subject.response]) for subject in subjects]


def _pairs(plan: EquivalencePlan, analysis: OneWay) -> Pairs:
    names = [level.level for level in analysis.levels]
    if plan.against is None:
        return list(combinations(names, 2))
    return [(name, plan.against) for name in names if name != plan.against]


def _results_of(
    plan: EquivalencePlan,
    study: StudyDefinition,
    subject: Subject,
    rule: AcrossRule,
    not_reported: list[NotReported],
) -> _Results | None:
    procedure = _PROCEDURES[study.design.variances, plan.percent]
    pairs, level = _pairs(plan, subject.analysis), rule.level(_alpha(plan, study))
    try:
        return procedure(subject.analysis, pairs, _margins(plan), level, plan.adjust)
    except NotComputableError as error:
        not_reported.append(subject.unreported(f"equivalence: {plan.name}", error))
        return None


def _margins(plan: EquivalencePlan) -> Margins:
    if plan.percent:
        return Margins(plan.lower_percent, plan.upper_percent)
    return Margins(plan.lower, plan.upper)


def _alpha(plan: EquivalencePlan, study: StudyDefinition) -> Fraction:
    return study.alpha if plan.alpha is None else plan.alpha


def _tails(results: _Results) -> FamilyTails:
    return FamilyTails(tuple(row.tail for row in results), tuple(row.adjusted for row in results))


def _family(
    plan: EquivalencePlan,
    study: StudyDefinition,
    rule: AcrossRule,
    results: _Results,
    adjusted: Sequence[Tail],
) -> EquivalenceFamily:
    claim = NON_INFERIORITY if plan.non_inferiority else EQUIVALENCE
    margins, alpha = _margins(plan), _alpha(plan, study)
    return EquivalenceFamily(
        name=plan.name,
        claim=claim,
        scale=PERCENT if plan.percent else UNITS,
        lower=margins.lower,
        upper=margins.upper,
        margin_source=plan.margin_source,
        adjust=plan.adjust,
        method=equivalence_method(plan, study.design.variances),
        alpha=alpha,
        registered=False,
        family_size=len(results),
        responses=rule.responses,
        rows=tuple(_row(result, tail, claim, alpha) for result, tail in zip(results, adjusted, strict=True)),
        across_responses=rule.method,
        against=plan.against,
    )


def _row(result: EquivalenceResult, tail: Tail, claim: str, alpha: Fraction) -> EquivalenceRow:
    adjusted = stated(tail)
    shown, not_shown = _VERDICTS[claim]
    return EquivalenceRow(
        label=result.label,
        estimate=result.estimate,
        se=result.se,
        df=result.df,
        ci=result.interval,
        p_lower=_p(result.tail_lower),
        p_upper=_p(result.tail_upper),
        p=round_significant(result.tail.p),
        p_adjusted=adjusted.p,
        log10_p_adjusted=adjusted.log10_p,
        verdict=shown if shows(adjusted.p, alpha) else not_shown,
    )


def _p(tail: Tail | None) -> float | None:
    return None if tail is None else round_significant(tail.p)
