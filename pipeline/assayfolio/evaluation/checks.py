"""The checks of assumptions. They inform; they never choose the analysis.

Equal variances and normality are checked as planned, a trend in run order where the plan names an order
column, and the resolution of the values always: it has an entry where it is coarse. With separate variances
normality is checked level by level, and the notes say what the plan does not assume.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from assayfolio.evaluation.subject import Subject
from assayfolio.exact import Decimal10, Root, round_significant, to_double
from assayfolio.findings import NOT_ASSESSABLE, CheckFindings
from assayfolio.observations.values import Observation
from assayfolio.statistics.cochran import cochran_variances
from assayfolio.statistics.equal_variances import (
    EqualVariancesCheck,
    bartlett_variances,
    brown_forsythe_variances,
    levene_variances,
)
from assayfolio.statistics.joined_normality import (
    JoinedNormality,
    anderson_darling_joined,
    shapiro_wilk_joined,
)
from assayfolio.statistics.normality import (
    ANDERSON_DARLING_P_FROM,
    anderson_darling,
    residuals,
    shapiro_wilk,
)
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.statistics.resolution import resolution_of
from assayfolio.statistics.run_order import run_order_trend
from assayfolio.study.plan import NormalityCheck, StudyDefinition, VarianceCheck

BROWN_FORSYTHE = "Brown-Forsythe test of equal variances"
LEVENE = "Levene test of equal variances"
BARTLETT = "Bartlett test of equal variances"
COCHRAN = "Cochran test of the largest variance"
SHAPIRO_WILK = "Shapiro-Wilk test on residuals"
ANDERSON_DARLING = "Anderson-Darling test on residuals"
SHAPIRO_WILK_JOINED = "Shapiro-Wilk tests of the levels, joined"
ANDERSON_DARLING_JOINED = "Anderson-Darling tests of the levels, joined"
RUN_ORDER = "Trend in run order within levels"
RESOLUTION = "Resolution of the values"

_UNEQUAL = "unequal variances"
_NOT_NORMAL = "a departure of the residuals from normality"
_NOT_NORMAL_LEVELS = "a departure of the values within levels from normality"

_NO_ALARM = "this plan does not assume equal variances, so a departure is no alarm"
_ONE_VARIANCE = "this check assumes one variance for all levels, which the plan does not"


@dataclass(frozen=True, slots=True)
class _Case:
    """What is checked: the values, the level the checks are read at, and what the plan assumes of them."""

    subject: Subject
    alpha: float
    separate: bool

    def note(self, p: float, departure: str, *remarks: str) -> str:
        """What `p` shows about a departure, with remarks."""
        shown = "the data show" if p <= self.alpha else "the data do not show"
        words = [f"{shown} {departure} at level {self.alpha}", *remarks]
        return "; ".join([*words, "the check informs and does not choose the analysis"])

    def variances_note(self, p: float, departure: str, *remarks: str) -> str:
        """The note of a check of equal variances."""
        return self.note(p, departure, *remarks, *([_NO_ALARM] if self.separate else []))


_Check = Callable[[_Case], CheckFindings]


def check_findings(study: StudyDefinition, subject: Subject) -> tuple[CheckFindings, ...]:
    """The checks of one response: equal variances, normality, run order, and a note on coarse resolution."""
    case = _Case(subject, float(study.alpha), study.design.variances == "separate")
    normality = _NORMALITY_OF_EACH if case.separate else _NORMALITY
    wanted: list[tuple[str, _Check]] = [
        *(_EQUAL_VARIANCES[word] for word in study.checks.equal_variances),
        *(normality[word] for word in study.checks.normality),
    ]
    if study.data.order is not None:
        wanted.append((RUN_ORDER, _run_order))
    found = [_checked(name, check, case) for name, check in wanted]
    return (*found, *_coarse_resolution(subject))


def _checked(name: str, check: _Check, case: _Case) -> CheckFindings:
    try:
        return check(case)
    except NotComputableError as error:
        return CheckFindings(name, None, None, None, f"{NOT_ASSESSABLE}: {error}")


def _brown_forsythe(case: _Case) -> CheckFindings:
    case.subject.require_values()
    return _f_test(BROWN_FORSYTHE, brown_forsythe_variances(case.subject.groups), case)


def _levene(case: _Case) -> CheckFindings:
    case.subject.require_values()
    return _f_test(LEVENE, levene_variances(case.subject.groups), case)


def _f_test(name: str, check: EqualVariancesCheck, case: _Case) -> CheckFindings:
    p = round_significant(check.tail.p)
    return CheckFindings(name, check.f, check.df, p, case.variances_note(p, _UNEQUAL))


def _bartlett(case: _Case) -> CheckFindings:
    check = bartlett_variances(case.subject.analysis)
    p = round_significant(check.tail.p)
    left_out = [f"without {', '.join(check.left_out)}, with one value each"] if check.left_out else []
    note = case.variances_note(p, _UNEQUAL, *left_out)
    return CheckFindings(BARTLETT, round_significant(check.statistic), (check.df,), p, note)


def _cochran(case: _Case) -> CheckFindings:
    check = cochran_variances(case.subject.analysis)
    p = round_significant(check.bound.p)
    note = case.variances_note(p, f"a larger variance of {check.level} than of the others")
    return CheckFindings(COCHRAN, check.share, check.df, p, note)


def _shapiro_wilk(case: _Case) -> CheckFindings:
    case.subject.require_values()
    check = shapiro_wilk(residuals(case.subject.groups))
    p = round_significant(check.p)
    return CheckFindings(SHAPIRO_WILK, round_significant(check.w), None, p, case.note(p, _NOT_NORMAL))


def _anderson_darling(case: _Case) -> CheckFindings:
    count = case.subject.analysis.n_total
    if count < ANDERSON_DARLING_P_FROM:
        raise NotComputableError(
            f"the p-value of the Anderson-Darling test holds from {ANDERSON_DARLING_P_FROM} values; "
            f"here are {count}"
        )
    case.subject.require_values()
    check = anderson_darling(residuals(case.subject.groups))
    p = round_significant(check.p)
    return CheckFindings(ANDERSON_DARLING, round_significant(check.a2), None, p, case.note(p, _NOT_NORMAL))


def _shapiro_wilk_joined(case: _Case) -> CheckFindings:
    case.subject.require_values()
    found = shapiro_wilk_joined(case.subject.groups, case.subject.step_or_finest)
    return _joined(SHAPIRO_WILK_JOINED, found, case)


def _anderson_darling_joined(case: _Case) -> CheckFindings:
    case.subject.require_values()
    found = anderson_darling_joined(case.subject.groups, case.subject.step_or_finest)
    return _joined(ANDERSON_DARLING_JOINED, found, case)


def _joined(name: str, check: JoinedNormality, case: _Case) -> CheckFindings:
    p = round_significant(check.p)
    reasons = dict.fromkeys(reason for _, reason in check.left_out)
    left_out = [
        f"without {', '.join(level for level, why in check.left_out if why == reason)} ({reason})"
        for reason in reasons
    ]
    how = "each level tested by itself, since each has its own variance"
    return CheckFindings(
        name, round_significant(check.z), None, p, case.note(p, _NOT_NORMAL_LEVELS, how, *left_out)
    )


def _run_order(case: _Case) -> CheckFindings:
    case.subject.require_values()
    placed = [(level, _placed(rows)) for level, rows in case.subject.rows]
    check = run_order_trend(placed)
    p = round_significant(check.tail.p)
    unit = f" {case.subject.unit}" if case.subject.unit else ""
    slope = f"slope {to_double(check.slope):.3g}{unit} a place in the order"
    remarks = [slope, *([_ONE_VARIANCE] if case.separate else [])]
    note = case.note(p, "a trend in run order", *remarks)
    return CheckFindings(RUN_ORDER, check.statistic, (check.df,), p, note)


def _placed(rows: Sequence[Observation]) -> list[tuple[int, Decimal10]]:
    return [(row.order, row.value) for row in rows if row.order is not None]


def _coarse_resolution(subject: Subject) -> tuple[CheckFindings, ...]:
    """One entry where the recorded step is coarse against a spread that is not zero; else none.

    A value put in for one beyond a limit was not recorded with a step, so that it does not count.
    """
    step = subject.step
    if step is None:
        return ()
    found = resolution_of(step, subject.analysis)
    if not found.coarse or found.rounding_share is None:
        return ()
    unit = f" {subject.unit}" if subject.unit else ""
    note = (
        f"the values are recorded in steps of {to_double(found.step):g}{unit}, more than half the pooled "
        f"standard deviation of {to_double(found.pooled_sd):.3g}{unit}: rounding alone adds about "
        f"{100 * to_double(found.rounding_share):.2g} % to the variance; record more digits where the "
        "measurement has them"
    )
    return (CheckFindings(RESOLUTION, Root.of(12 * found.rounding_share), None, None, note),)


_EQUAL_VARIANCES: dict[VarianceCheck, tuple[str, _Check]] = {
    "brown-forsythe": (BROWN_FORSYTHE, _brown_forsythe),
    "levene": (LEVENE, _levene),
    "bartlett": (BARTLETT, _bartlett),
    "cochran": (COCHRAN, _cochran),
}
_NORMALITY: dict[NormalityCheck, tuple[str, _Check]] = {
    "shapiro-wilk": (SHAPIRO_WILK, _shapiro_wilk),
    "anderson-darling": (ANDERSON_DARLING, _anderson_darling),
}
_NORMALITY_OF_EACH: dict[NormalityCheck, tuple[str, _Check]] = {
    "shapiro-wilk": (SHAPIRO_WILK_JOINED, _shapiro_wilk_joined),
    "anderson-darling": (ANDERSON_DARLING_JOINED, _anderson_darling_joined),
}
