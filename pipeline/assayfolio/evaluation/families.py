"""The planned families of comparisons, on every response."""

from collections.abc import Sequence
from fractions import Fraction

from assayfolio.evaluation.across_responses import AcrossRule, FamilyTails, across_rule
from assayfolio.evaluation.subject import Subject
from assayfolio.evaluation.verdicts import difference_verdict
from assayfolio.exact import round_significant
from assayfolio.findings import ComparisonFamily, ComparisonRow, NotReported
from assayfolio.method_names import comparison_method
from assayfolio.statistics.adjustment import Tail, stated
from assayfolio.statistics.comparisons import TWO_SIDED, ComparisonResult, compare
from assayfolio.statistics.estimates import (
    Estimate,
    contrast_estimate,
    pair_estimates,
    reference_estimates,
)
from assayfolio.statistics.many_to_one_comparisons import compare_dunnett, compare_dunnett_step_down
from assayfolio.statistics.oneway import NotComputableError, OneWay
from assayfolio.statistics.polynomials import polynomial_estimates
from assayfolio.statistics.separate_variances import compare_games_howell, compare_separate
from assayfolio.statistics.simultaneous import compare_scheffe, compare_tukey_kramer
from assayfolio.study.plan import (
    AgainstReference,
    AllPairs,
    Comparison,
    Contrast,
    ContrastFamily,
    StudyDefinition,
    Trend,
)

KINDS: dict[type[Comparison], str] = {
    AllPairs: "pairs",
    AgainstReference: "against",
    Contrast: "contrast",
    ContrastFamily: "contrasts",
    Trend: "trend",
}

_Results = tuple[ComparisonResult, ...]


def comparison_families(
    study: StudyDefinition, subjects: Sequence[Subject], not_reported: list[NotReported]
) -> list[tuple[ComparisonFamily, ...]]:
    """The families of each subject in the order of the plan, adjusted over the responses as planned."""
    found: list[list[ComparisonFamily]] = [[] for _ in subjects]
    for plan in study.comparisons:
        size = _size(plan, subjects[0].analysis.k)
        rule = across_rule(study, plan.adjust, size, len(subjects))
        results = [_results_of(plan, study, subject, rule, not_reported) for subject in subjects]
        tails = [None if one is None else _tails(one) for one in results]
        for families, rows, adjusted in zip(found, results, rule.adjusted(tails), strict=True):
            if rows is not None:
                families.append(_family(plan, study, rule, rows, adjusted))
    return [tuple(families) for families in found]


def _size(plan: Comparison, k: int) -> int:
    match plan:
        case AllPairs():
            return k * (k - 1) // 2
        case AgainstReference():
            return k - 1
        case ContrastFamily():
            return len(plan.contrasts)
        case Trend():
            return plan.degree
        case Contrast():
            return 1


def _results_of(
    plan: Comparison,
    study: StudyDefinition,
    subject: Subject,
    rule: AcrossRule,
    not_reported: list[NotReported],
) -> _Results | None:
    try:
        return _results(plan, subject.analysis, study.design.variances, rule.level(study.alpha))
    except NotComputableError as error:
        not_reported.append(subject.unreported(f"comparison: {plan.name}", error))
        return None


def _results(plan: Comparison, analysis: OneWay, variances: str, alpha: float) -> _Results:
    alternative = alternative_of(plan)
    if isinstance(plan, AgainstReference) and plan.adjust == "dunnett":
        return compare_dunnett(analysis, plan.against, alternative, alpha)
    if isinstance(plan, AgainstReference) and plan.adjust == "dunnett-step-down":
        return compare_dunnett_step_down(analysis, plan.against, alternative)
    estimates = _estimates(plan, analysis)
    if plan.adjust == "tukey-kramer":
        return compare_tukey_kramer(analysis, estimates, alpha)
    if plan.adjust == "games-howell":
        return compare_games_howell(analysis, estimates, alpha)
    if plan.adjust == "scheffe":
        return compare_scheffe(analysis, estimates, alpha)
    if variances == "separate":
        return compare_separate(estimates, plan.adjust, alternative, alpha)
    return compare(analysis, estimates, plan.adjust, alternative, alpha)


def alternative_of(plan: Comparison) -> str:
    """What the tests of the family are to show: two-sided for all pairs, else as planned."""
    return TWO_SIDED if isinstance(plan, AllPairs) else plan.alternative


def _estimates(plan: Comparison, analysis: OneWay) -> tuple[Estimate, ...]:
    match plan:
        case AllPairs():
            return pair_estimates(analysis)
        case AgainstReference():
            return reference_estimates(analysis, plan.against)
        case Contrast():
            return (contrast_estimate(analysis, plan.name, dict(plan.weights)),)
        case ContrastFamily():
            return tuple(contrast_estimate(analysis, one.name, dict(one.weights)) for one in plan.contrasts)
        case Trend():
            scores = {level.level: plan.score_of(level.level) for level in analysis.levels}
            return polynomial_estimates(analysis, scores, plan.degree)


def _tails(results: _Results) -> FamilyTails:
    return FamilyTails(tuple(row.tail for row in results), tuple(row.adjusted for row in results))


def _family(
    plan: Comparison, study: StudyDefinition, rule: AcrossRule, results: _Results, adjusted: Sequence[Tail]
) -> ComparisonFamily:
    return ComparisonFamily(
        name=plan.name,
        kind=KINDS[type(plan)],
        adjust=plan.adjust,
        method=comparison_method(plan.adjust, study.design.variances),
        alternative=alternative_of(plan),
        registered=False,
        family_size=len(results),
        responses=rule.responses,
        rows=tuple(
            _row(result, tail, rule, study.alpha) for result, tail in zip(results, adjusted, strict=True)
        ),
        across_responses=rule.method,
        against=plan.against if isinstance(plan, AgainstReference) else None,
    )


def _row(result: ComparisonResult, tail: Tail, rule: AcrossRule, alpha: Fraction) -> ComparisonRow:
    adjusted = stated(tail)
    return ComparisonRow(
        label=result.label,
        estimate=result.estimate,
        se=result.se,
        df=result.df,
        statistic=result.statistic,
        p=round_significant(result.tail.p),
        p_adjusted=adjusted.p,
        log10_p_adjusted=adjusted.log10_p,
        ci=result.interval if rule.has_intervals else None,
        verdict=difference_verdict(adjusted.p, alpha),
    )
