"""The planned outlier tests: what they propose to look into. Nothing is removed."""

from collections.abc import Callable, Iterator, Sequence
from fractions import Fraction

from assayfolio.evaluation.subject import Subject
from assayfolio.exact import Decimal10
from assayfolio.findings import NEITHER, NOT_ASSESSABLE, OUTLIER, STRAGGLER, OutlierFindings
from assayfolio.observations.values import Observation
from assayfolio.statistics.oneway import LevelSummary, NotComputableError
from assayfolio.statistics.outliers import (
    GRUBBS,
    GRUBBS_DOUBLE,
    cochran_outlier,
    grubbs_double,
    grubbs_double_of_means,
    grubbs_single,
    grubbs_single_of_means,
    not_done,
)
from assayfolio.statistics.outliers import OutlierTest as Tested
from assayfolio.study.plan import OutlierPlan, OutlierTest, StudyDefinition

VALUES, VARIANCE, MEANS = "values", "variance", "level means"

_VERDICTS = {"outlier": OUTLIER, "straggler": STRAGGLER, "neither": NEITHER}
_NOTES = {
    OUTLIER: "beyond the 1 % limit; look for a cause, nothing was removed",
    STRAGGLER: "beyond the 5 % limit; look for a cause, nothing was removed",
    NEITHER: "within the 5 % limit",
}
_ALREADY_NAMED = (
    "the test of one already names {what}; ISO 5725-2 takes the test of two {of} only where it names none"
)
_ON_VALUES: dict[OutlierTest, Callable[[str, Sequence[Decimal10], Fraction], Tested]] = {
    "grubbs": grubbs_single,
    "grubbs-double": grubbs_double,
}
_ON_MEANS: dict[OutlierTest, Callable[[Sequence[LevelSummary], Fraction], Tested]] = {
    "grubbs": grubbs_single_of_means,
    "grubbs-double": grubbs_double_of_means,
}


def outlier_findings(study: StudyDefinition, subject: Subject) -> tuple[OutlierFindings, ...]:
    """Every planned test in the order of the plan: those of values level by level, then those of level means.

    The means are tested where the levels are a sample, by Grubbs' tests, as ISO 5725-2 tests cell means.
    """
    plan = study.outliers
    if plan is None:
        return ()
    on_means = study.design.effects == "random"
    found: list[OutlierFindings] = []
    for word in plan.tests:
        if word == "cochran":
            found.append(_of_variance(cochran_outlier(subject.analysis)))
            continue
        found += _of_values(plan, subject, word)
        if on_means:
            found.append(_of_means(plan, subject, word))
    return tuple(found)


def _of_variance(test: Tested) -> OutlierFindings:
    levels = () if test.level is None else (test.level,)
    return _findings(test, VARIANCE, levels)


def _of_values(plan: OutlierPlan, subject: Subject, word: OutlierTest) -> Iterator[OutlierFindings]:
    try:
        subject.require_values()
    except NotComputableError as error:
        yield _findings(not_done(word, None, str(error)), VALUES, ())
        return
    step = subject.step_or_finest
    for (level, values), (_, rows) in zip(subject.groups, subject.rows, strict=True):
        test = _ON_VALUES[word](level, values, step)
        remarks = []
        if _names_again(plan, test) and _proposes(grubbs_single(level, values, step)):
            remarks.append(_ALREADY_NAMED.format(what="a value of this level", of="values"))
        named = [rows[index] for index in test.indexes]
        yield _findings(test, VALUES, (level,), *remarks, named=named, files=subject.files)


def _of_means(plan: OutlierPlan, subject: Subject, word: OutlierTest) -> OutlierFindings:
    levels, step = subject.analysis.levels, subject.step_or_finest
    test = _ON_MEANS[word](levels, step)
    remarks = []
    if _names_again(plan, test) and _proposes(grubbs_single_of_means(levels, step)):
        remarks.append(_ALREADY_NAMED.format(what="a level", of="means"))
    if len({level.n for level in levels}) > 1:
        remarks.append("the means are of unequal numbers of values, which the test does not know of")
    return _findings(test, MEANS, tuple(levels[index].level for index in test.indexes), *remarks)


def _names_again(plan: OutlierPlan, test: Tested) -> bool:
    return test.test == GRUBBS_DOUBLE and GRUBBS in plan.tests and _proposes(test)


def _proposes(test: Tested) -> bool:
    return test.verdict in ("outlier", "straggler")


def _findings(
    test: Tested,
    about: str,
    levels: tuple[str, ...],
    *remarks: str,
    named: Sequence[Observation] = (),
    files: tuple[str, ...] = (),
) -> OutlierFindings:
    verdict = NOT_ASSESSABLE if test.verdict is None else _VERDICTS[test.verdict]
    note = f"{NOT_ASSESSABLE}: {test.reason}" if test.reason else _NOTES[verdict]
    return OutlierFindings(
        test=test.test,
        level=test.level or "",
        lines=tuple(row.line for row in named),
        values=tuple(row.value.fraction for row in named),
        statistic=test.statistic,
        straggler_limit=test.straggler_limit,
        outlier_limit=test.outlier_limit,
        p=test.p,
        verdict=verdict,
        files=tuple(files[row.file] for row in named) if len(files) > 1 else (),
        note="; ".join([note, *remarks]),
        about=about,
        levels=levels,
    )
