"""The planned outlier tests: what they propose to look into. Nothing is removed."""

from collections.abc import Sequence

from assayfolio.evaluation.subject import Subject
from assayfolio.findings import NEITHER, NOT_ASSESSABLE, OUTLIER, STRAGGLER, OutlierFindings
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.statistics.outliers import OutlierTest as Tested
from assayfolio.statistics.outliers import cochran_outlier, grubbs_double, grubbs_single, not_done
from assayfolio.study.plan import OutlierPlan, OutlierTest

_VERDICTS = {"outlier": OUTLIER, "straggler": STRAGGLER, "neither": NEITHER}
_NOTES = {
    OUTLIER: "beyond the 1 % limit; look for a cause, nothing was removed",
    STRAGGLER: "beyond the 5 % limit; look for a cause, nothing was removed",
    NEITHER: "within the 5 % limit",
}
_ALREADY_NAMED = (
    "the test of one value already names a value of this level; ISO 5725-2 takes the test of two values only "
    "where it names none"
)


def outlier_findings(plan: OutlierPlan | None, subject: Subject) -> tuple[OutlierFindings, ...]:
    """Every planned test in the order of the plan, those of values level by level."""
    if plan is None:
        return ()
    return tuple(_findings(plan, subject, test) for word in plan.tests for test in _tests(word, subject))


def _tests(word: OutlierTest, subject: Subject) -> Sequence[Tested]:
    if word == "cochran":
        return [cochran_outlier(subject.analysis)]
    try:
        subject.require_values()
    except NotComputableError as error:
        return [not_done(word, None, str(error))]
    test = grubbs_single if word == "grubbs" else grubbs_double
    return [test(level, values) for level, values in subject.groups]


def _findings(plan: OutlierPlan, subject: Subject, test: Tested) -> OutlierFindings:
    rows, files = dict(subject.rows).get(test.level or "", ()), subject.files
    named = [rows[index] for index in test.indexes]
    verdict = NOT_ASSESSABLE if test.verdict is None else _VERDICTS[test.verdict]
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
        note=f"{NOT_ASSESSABLE}: {test.reason}" if test.reason else _note(plan, subject, test, verdict),
    )


def _note(plan: OutlierPlan, subject: Subject, test: Tested, verdict: str) -> str:
    if test.test == "grubbs-double" and "grubbs" in plan.tests and verdict != NEITHER:
        single = grubbs_single(test.level or "", dict(subject.groups)[test.level or ""])
        if single.verdict in ("outlier", "straggler"):
            return f"{_NOTES[verdict]}; {_ALREADY_NAMED}"
    return _NOTES[verdict]
