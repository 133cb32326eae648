"""The planned tests of equivalence and non-inferiority, on every response."""

from collections.abc import Sequence
from dataclasses import dataclass
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
    BoundaryFindings,
    EquivalenceFamily,
    EquivalenceRow,
    NotReported,
)
from assayfolio.method_names import equivalence_method
from assayfolio.statistics.adjustment import Tail, stated
from assayfolio.statistics.equivalence import (
    BoundaryTest,
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
from assayfolio.statistics.oneway import NotComputableError, OneWay, without_variance
from assayfolio.study.plan import EquivalencePlan, StudyDefinition

EQUIVALENCE, NON_INFERIORITY = "equivalence", "non-inferiority"
UNITS, PERCENT = "units", "percent"

_VERDICTS = {
    EQUIVALENCE: (EQUIVALENCE_SHOWN, EQUIVALENCE_NOT_SHOWN),
    NON_INFERIORITY: (NON_INFERIORITY_SHOWN, NON_INFERIORITY_NOT_SHOWN),
}


@dataclass(frozen=True, slots=True)
class _Results:
    """The rows of one family on one response, and the label and reason of each planned one it lacks."""

    rows: tuple[EquivalenceResult, ...]
    missing: tuple[tuple[str, str], ...] = ()


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
        for subject, one, adjusted in zip(asked, results, rule.adjusted(tails), strict=True):
            if one is not None:
                found[subject.response].append(_family(plan, study, rule, one, adjusted))
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
    what, level = f"equivalence: {plan.name}", rule.level(_alpha(plan, study))
    results = _separate_results if study.design.variances == "separate" else _pooled_results
    try:
        found = results(plan, subject.analysis, level)
    except NotComputableError as error:
        not_reported.append(subject.unreported(what, error))
        return None
    not_reported.extend(subject.unreported(f"{what}: {label}", reason) for label, reason in found.missing)
    return found


def _pooled_results(plan: EquivalencePlan, analysis: OneWay, alpha: float) -> _Results:
    procedure = equivalence_percent_pooled if plan.percent else equivalence_pooled
    return _Results(procedure(analysis, _pairs(plan, analysis), _margins(plan), alpha, plan.adjust))


def _separate_results(plan: EquivalencePlan, analysis: OneWay, alpha: float) -> _Results:
    """The rows that can be given: without those that involve a level whose variance cannot be estimated."""
    procedure = equivalence_percent_separate if plan.percent else equivalence_separate
    given, missing = [], []
    for x, r in _pairs(plan, analysis):
        reason = without_variance([analysis.summary_of(x), analysis.summary_of(r)])
        if reason is None:
            given.append((x, r))
        else:
            missing.append((f"{x} - {r}", reason))
    if not given:
        raise NotComputableError("; ".join(dict.fromkeys(reason for _, reason in missing)))
    return _Results(
        procedure(analysis, given, _margins(plan), alpha, plan.adjust, len(missing)), tuple(missing)
    )


def _margins(plan: EquivalencePlan) -> Margins:
    if plan.percent:
        return Margins(plan.lower_percent, plan.upper_percent)
    return Margins(plan.lower, plan.upper)


def _alpha(plan: EquivalencePlan, study: StudyDefinition) -> Fraction:
    return study.alpha if plan.alpha is None else plan.alpha


def _tails(results: _Results) -> FamilyTails:
    raw = tuple(row.tail for row in results.rows)
    return FamilyTails(raw, tuple(row.adjusted for row in results.rows), len(results.missing))


def _family(
    plan: EquivalencePlan,
    study: StudyDefinition,
    rule: AcrossRule,
    results: _Results,
    adjusted: Sequence[Tail],
) -> EquivalenceFamily:
    claim = NON_INFERIORITY if plan.non_inferiority else EQUIVALENCE
    margins, alpha = _margins(plan), _alpha(plan, study)
    rows = tuple(
        _row(result, tail, claim, alpha) for result, tail in zip(results.rows, adjusted, strict=True)
    )
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
        family_size=len(rows) + len(results.missing),
        responses=rule.responses,
        rows=rows,
        across_responses=rule.method,
        against=plan.against,
        critical=rows[0].critical if study.design.variances == "pooled" else None,
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
        t_lower=None if result.lower is None else result.lower.statistic,
        t_upper=None if result.upper is None else result.upper.statistic,
        boundaries=tuple(_boundary(test) for test in (result.lower, result.upper) if test is not None),
        critical=None if result.critical is None else round_significant(result.critical),
    )


def _boundary(test: BoundaryTest) -> BoundaryFindings:
    return BoundaryFindings(test.margin, test.statistic, test.se, test.df, round_significant(test.tail.p))


def _p(tail: Tail | None) -> float | None:
    return None if tail is None else round_significant(tail.p)
