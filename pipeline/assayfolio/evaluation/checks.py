"""The checks of assumptions. They inform; they never choose the analysis.

Equal variances and normality are checked as planned, a trend in run order where the plan names an order
column, and the resolution of the values always: it has an entry where it is coarse.
"""

from collections.abc import Callable, Sequence

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
from assayfolio.statistics.normality import (
    ANDERSON_DARLING_P_FROM,
    anderson_darling,
    residuals,
    shapiro_wilk,
)
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.statistics.resolution import Resolution, resolution, resolution_of
from assayfolio.statistics.run_order import run_order_trend
from assayfolio.study.plan import NormalityCheck, StudyDefinition, VarianceCheck

BROWN_FORSYTHE = "Brown-Forsythe test of equal variances"
LEVENE = "Levene test of equal variances"
BARTLETT = "Bartlett test of equal variances"
COCHRAN = "Cochran test of the largest variance"
SHAPIRO_WILK = "Shapiro-Wilk test on residuals"
ANDERSON_DARLING = "Anderson-Darling test on residuals"
RUN_ORDER = "Trend in run order within levels"
RESOLUTION = "Resolution of the values"

_UNEQUAL = "unequal variances"
_NOT_NORMAL = "a departure of the residuals from normality"

_Check = Callable[[Subject, float], CheckFindings]


def check_findings(study: StudyDefinition, subject: Subject) -> tuple[CheckFindings, ...]:
    """The checks of one response: equal variances, normality, run order, and a note on coarse resolution."""
    alpha = float(study.alpha)
    wanted: list[tuple[str, _Check]] = [
        *(_EQUAL_VARIANCES[word] for word in study.checks.equal_variances),
        *(_NORMALITY[word] for word in study.checks.normality),
    ]
    if study.data.order is not None:
        wanted.append((RUN_ORDER, _run_order))
    found = [_checked(name, check, subject, alpha) for name, check in wanted]
    return (*found, *_coarse_resolution(subject))


def _checked(name: str, check: _Check, subject: Subject, alpha: float) -> CheckFindings:
    try:
        return check(subject, alpha)
    except NotComputableError as error:
        return CheckFindings(name, None, None, None, f"{NOT_ASSESSABLE}: {error}")


def _brown_forsythe(subject: Subject, alpha: float) -> CheckFindings:
    subject.require_values()
    return _f_test(BROWN_FORSYTHE, brown_forsythe_variances(subject.groups), alpha)


def _levene(subject: Subject, alpha: float) -> CheckFindings:
    subject.require_values()
    return _f_test(LEVENE, levene_variances(subject.groups), alpha)


def _f_test(name: str, check: EqualVariancesCheck, alpha: float) -> CheckFindings:
    p = round_significant(check.tail.p)
    return CheckFindings(name, check.f, check.df, p, _note(p, alpha, _UNEQUAL))


def _bartlett(subject: Subject, alpha: float) -> CheckFindings:
    check = bartlett_variances(subject.analysis)
    p = round_significant(check.tail.p)
    note = _note(p, alpha, _UNEQUAL)
    if check.left_out:
        note = f"{note}; without {', '.join(check.left_out)}, with one value each"
    return CheckFindings(BARTLETT, round_significant(check.statistic), (check.df,), p, note)


def _cochran(subject: Subject, alpha: float) -> CheckFindings:
    check = cochran_variances(subject.analysis)
    p = round_significant(check.bound.p)
    note = _note(p, alpha, f"a larger variance of {check.level} than of the others")
    return CheckFindings(COCHRAN, check.share, check.df, p, note)


def _shapiro_wilk(subject: Subject, alpha: float) -> CheckFindings:
    subject.require_values()
    check = shapiro_wilk(residuals(subject.groups))
    p = round_significant(check.p)
    return CheckFindings(SHAPIRO_WILK, round_significant(check.w), None, p, _note(p, alpha, _NOT_NORMAL))


def _anderson_darling(subject: Subject, alpha: float) -> CheckFindings:
    count = subject.analysis.n_total
    if count < ANDERSON_DARLING_P_FROM:
        raise NotComputableError(
            f"the p-value of the Anderson-Darling test holds from {ANDERSON_DARLING_P_FROM} values; "
            f"here are {count}"
        )
    subject.require_values()
    check = anderson_darling(residuals(subject.groups))
    p = round_significant(check.p)
    return CheckFindings(ANDERSON_DARLING, round_significant(check.a2), None, p, _note(p, alpha, _NOT_NORMAL))


def _run_order(subject: Subject, alpha: float) -> CheckFindings:
    subject.require_values()
    placed = [(level, _placed(rows)) for level, rows in subject.rows]
    check = run_order_trend(placed)
    p = round_significant(check.tail.p)
    unit = f" {subject.unit}" if subject.unit else ""
    slope = f"slope {to_double(check.slope):.3g}{unit} a place in the order"
    note = f"{_note(p, alpha, 'a trend in run order')}; {slope}"
    return CheckFindings(RUN_ORDER, check.statistic, (check.df,), p, note)


def _placed(rows: Sequence[Observation]) -> list[tuple[int, Decimal10]]:
    return [(row.order, row.value) for row in rows if row.order is not None]


def _note(p: float, alpha: float, departure: str) -> str:
    shown = f"the data show {departure}" if p <= alpha else f"the data do not show {departure}"
    return f"{shown} at level {alpha}; the check informs and does not choose the analysis"


def _resolution(subject: Subject) -> Resolution | None:
    """The resolution of the recorded values; None where every value was put in for one beyond a limit."""
    if subject.totals is not None:
        return resolution_of(subject.totals.step, subject.analysis)
    recorded = [(level, [row.value for row in rows if row.limit is None]) for level, rows in subject.rows]
    return resolution(recorded, subject.analysis) if any(values for _, values in recorded) else None


def _coarse_resolution(subject: Subject) -> tuple[CheckFindings, ...]:
    """One entry where the recorded step is coarse against a spread that is not zero; else none.

    A value put in for one beyond a limit was not recorded with a step, so that it does not count.
    """
    found = _resolution(subject)
    if found is None or not found.coarse or found.rounding_share is None:
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
