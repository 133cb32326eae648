"""The planned families of comparisons, on every response."""

from collections.abc import Sequence
from dataclasses import dataclass
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
from assayfolio.statistics.oneway import NotComputableError, OneWay, without_variance
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


@dataclass(frozen=True, slots=True)
class _Results:
    """The rows of one family on one response, and the label and reason of each planned one it lacks."""

    rows: tuple[ComparisonResult, ...]
    missing: tuple[tuple[str, str], ...] = ()


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
        for families, one, adjusted in zip(found, results, rule.adjusted(tails), strict=True):
            if one is not None:
                families.append(_family(plan, study, rule, one, adjusted))
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
    what = f"comparison: {plan.name}"
    try:
        if study.design.variances == "separate":
            found = _separate_results(plan, subject.analysis, rule.level(study.alpha))
        else:
            found = _Results(_pooled_results(plan, subject.analysis, rule.level(study.alpha)))
    except NotComputableError as error:
        not_reported.append(subject.unreported(what, error))
        return None
    not_reported.extend(subject.unreported(f"{what}: {label}", reason) for label, reason in found.missing)
    return found


def _separate_results(plan: Comparison, analysis: OneWay, alpha: float) -> _Results:
    """The rows that can be given: without those that involve a level whose variance cannot be estimated."""
    given, missing = [], []
    for estimate in _estimates(plan, analysis):
        reason = without_variance(level for level, _ in estimate.weights)
        if reason is None:
            given.append(estimate)
        else:
            missing.append((estimate.label, reason))
    if not given:
        raise NotComputableError("; ".join(dict.fromkeys(reason for _, reason in missing)))
    if plan.adjust == "games-howell":
        rows = compare_games_howell(analysis, given, alpha)
    else:
        rows = compare_separate(given, plan.adjust, alternative_of(plan), alpha, len(missing))
    return _Results(rows, tuple(missing))


def _pooled_results(plan: Comparison, analysis: OneWay, alpha: float) -> tuple[ComparisonResult, ...]:
    alternative = alternative_of(plan)
    if isinstance(plan, AgainstReference) and plan.adjust == "dunnett":
        return compare_dunnett(analysis, plan.against, alternative, alpha)
    if isinstance(plan, AgainstReference) and plan.adjust == "dunnett-step-down":
        return compare_dunnett_step_down(analysis, plan.against, alternative)
    estimates = _estimates(plan, analysis)
    if plan.adjust == "tukey-kramer":
        return compare_tukey_kramer(analysis, estimates, alpha)
    if plan.adjust == "scheffe":
        return compare_scheffe(analysis, estimates, alpha)
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
    raw = tuple(row.tail for row in results.rows)
    return FamilyTails(raw, tuple(row.adjusted for row in results.rows), len(results.missing))


def _family(
    plan: Comparison, study: StudyDefinition, rule: AcrossRule, results: _Results, adjusted: Sequence[Tail]
) -> ComparisonFamily:
    rows = tuple(
        _row(result, tail, rule, study.alpha) for result, tail in zip(results.rows, adjusted, strict=True)
    )
    return ComparisonFamily(
        name=plan.name,
        kind=KINDS[type(plan)],
        adjust=plan.adjust,
        method=comparison_method(plan.adjust, study.design.variances),
        alternative=alternative_of(plan),
        registered=False,
        family_size=len(rows) + len(results.missing),
        responses=rule.responses,
        rows=rows,
        across_responses=rule.method,
        against=plan.against if isinstance(plan, AgainstReference) else None,
        critical=rows[0].critical if study.design.variances == "pooled" else None,
    )


def _row(result: ComparisonResult, tail: Tail, rule: AcrossRule, alpha: Fraction) -> ComparisonRow:
    adjusted = stated(tail)
    critical = result.critical if rule.has_intervals else None
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
        critical=None if critical is None else round_significant(critical),
    )
