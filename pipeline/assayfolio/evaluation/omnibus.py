"""The analysis of variance and the tests of the overall question, on every response."""

from collections.abc import Callable, Sequence
from dataclasses import replace
from typing import TypeVar

from assayfolio.evaluation.across_responses import AcrossRule, FamilyTails, across_rule
from assayfolio.evaluation.subject import Subject
from assayfolio.evaluation.verdicts import difference_verdict
from assayfolio.exact import Root, round_significant
from assayfolio.findings import (
    NOT_ASSESSABLE,
    AnovaFindings,
    BrownForsytheMeansFindings,
    NotReported,
    Source,
    WelchFindings,
)
from assayfolio.statistics.adjustment import Tail, stated
from assayfolio.statistics.inference import OmnibusTest, omnibus_test
from assayfolio.statistics.oneway import NotComputableError, OneWay
from assayfolio.statistics.welch import BrownForsytheMeans, WelchTest, brown_forsythe_means, welch_test
from assayfolio.study.plan import StudyDefinition

Test = TypeVar("Test", OmnibusTest, WelchTest, BrownForsytheMeans)


def anova_findings(
    study: StudyDefinition, subjects: Sequence[Subject], not_reported: list[NotReported]
) -> list[AnovaFindings]:
    """The analysis of variance of each subject, without the F test where nothing varies within levels."""
    rule = _rule(study, subjects)
    level = rule.level(study.alpha)
    tests: list[OmnibusTest | None] = []
    for subject in subjects:
        try:
            tests.append(omnibus_test(subject.analysis, level))
        except NotComputableError as error:
            tests.append(None)
            not_reported.append(_no_f_test(subject, str(error)))
    adjusted = _adjusted(rule, tests)
    return [
        _anova(study, subject.analysis, rule, test, tail)
        for subject, test, tail in zip(subjects, tests, adjusted, strict=True)
    ]


def _rule(study: StudyDefinition, subjects: Sequence[Subject]) -> AcrossRule:
    return across_rule(study, "none", 1, len(subjects))


def _adjusted(rule: AcrossRule, tests: Sequence[Test | None]) -> list[Tail | None]:
    families = [None if test is None else FamilyTails((test.tail,), (test.tail,)) for test in tests]
    return [stated(tails[0]) if tails else None for tails in rule.adjusted(families)]


def _anova(
    study: StudyDefinition,
    analysis: OneWay,
    rule: AcrossRule,
    test: OmnibusTest | None,
    adjusted: Tail | None,
) -> AnovaFindings:
    found = AnovaFindings(
        between=Source(analysis.ss_between, analysis.df_between, analysis.ms_between),
        within=Source(analysis.ss_within, analysis.df_within, analysis.ms_within),
        total=Source(analysis.ss_total, analysis.n_total - 1, None),
        residual_sd=Root.of(analysis.ms_within),
        r_squared=analysis.r_squared,
        f=None,
        p=None,
        log10_p=None,
        p_adjusted=None,
        f_critical=None,
        verdict=NOT_ASSESSABLE,
    )
    if test is None or adjusted is None:
        return found
    tail = stated(test.tail)
    return replace(
        found,
        f=analysis.f,
        p=tail.p,
        log10_p=tail.log10_p,
        p_adjusted=adjusted.p,
        f_critical=round_significant(test.f_critical) if rule.has_intervals else None,
        verdict=difference_verdict(adjusted.p, study.alpha),
    )


def _no_f_test(subject: Subject, reason: str) -> NotReported:
    analysis = subject.analysis
    if analysis.ss_within:
        return subject.unreported("F test", reason)
    equal = "all values are equal" if not analysis.ss_between else "the values do not vary within any level"
    return subject.unreported(
        "F test and intervals for means",
        f"{equal}, so there is no error with which to compare the means; "
        "look at the resolution and the recording of the data",
    )


def welch_findings(
    study: StudyDefinition, subjects: Sequence[Subject], not_reported: list[NotReported]
) -> list[WelchFindings | None]:
    """Welch's test of each subject."""
    rule = _rule(study, subjects)
    level = rule.level(study.alpha)
    tests = _computed(subjects, lambda a: welch_test(a, level), "Welch's test of equal means", not_reported)
    found: list[WelchFindings | None] = []
    for test, adjusted in zip(tests, _adjusted(rule, tests), strict=True):
        if test is None or adjusted is None:
            found.append(None)
            continue
        tail = stated(test.tail)
        verdict = difference_verdict(adjusted.p, study.alpha)
        found.append(WelchFindings(test.f, test.df1, test.df2, tail.p, tail.log10_p, adjusted.p, verdict))
    return found


def brown_forsythe_findings(
    study: StudyDefinition, subjects: Sequence[Subject], not_reported: list[NotReported]
) -> list[BrownForsytheMeansFindings | None]:
    """The Brown-Forsythe test of means of each subject."""
    rule = _rule(study, subjects)
    what = "Brown-Forsythe test of equal means"
    tests = _computed(subjects, brown_forsythe_means, what, not_reported)
    found: list[BrownForsytheMeansFindings | None] = []
    for test, adjusted in zip(tests, _adjusted(rule, tests), strict=True):
        if test is None or adjusted is None:
            found.append(None)
            continue
        tail = stated(test.tail)
        found.append(
            BrownForsytheMeansFindings(
                f=test.f,
                df1=test.df1,
                df2=test.df2,
                p=tail.p,
                log10_p=tail.log10_p,
                p_adjusted=adjusted.p,
                df1_mehrotra=test.df1_mehrotra,
                p_mehrotra=round_significant(test.tail_mehrotra.p),
                verdict=difference_verdict(adjusted.p, study.alpha),
            )
        )
    return found


def _computed(
    subjects: Sequence[Subject], test: Callable[[OneWay], Test], what: str, not_reported: list[NotReported]
) -> list[Test | None]:
    found: list[Test | None] = []
    for subject in subjects:
        try:
            found.append(test(subject.analysis))
        except NotComputableError as error:
            found.append(None)
            not_reported.append(subject.unreported(what, error))
    return found
