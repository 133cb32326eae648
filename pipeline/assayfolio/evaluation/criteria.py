"""Limits set in advance, held against the exact value.

Relative quantities are in percent: a level's standard deviation of its own mean, a standard deviation of the
precision of the mean that is stated with it, the largest difference of two level means of the mean of all
values, each of its absolute value.
"""

from collections.abc import Callable
from fractions import Fraction

from assayfolio.evaluation.subject import Subject
from assayfolio.exact import Exact, Root
from assayfolio.findings import (
    CRITERION_MET,
    CRITERION_NOT_MET,
    NOT_ASSESSABLE,
    CriterionFindings,
    NotReported,
    PrecisionFindings,
)
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.study.plan import Criterion

AT_MOST, AT_LEAST = "at most", "at least"
PERCENT = ("-rsd", "-percent")


def criterion_findings(
    plans: tuple[Criterion, ...],
    subject: Subject,
    precision: PrecisionFindings | None,
    not_reported: list[NotReported],
) -> tuple[CriterionFindings, ...]:
    """The criteria on this response in the order of the plan; one with both limits gives two entries.

    A quantity that cannot be given makes a criterion not assessable, with the reason in `not_reported`.
    """
    found: list[CriterionFindings] = []
    for plan in plans:
        if plan.response not in (None, subject.response):
            continue
        value: Exact | None = None
        try:
            value = _value(plan, subject, precision)
        except NotComputableError as error:
            of_level = f" of {plan.level}" if plan.level else ""
            not_reported.append(subject.unreported(f"criterion: {plan.quantity}{of_level}", error))
        limits = ((AT_MOST, plan.at_most), (AT_LEAST, plan.at_least))
        found.extend(
            _entry(plan, subject, value, relation, limit) for relation, limit in limits if limit is not None
        )
    return tuple(found)


def compared(value: Exact, limit: Fraction) -> int:
    """-1, 0 or 1 as `value` is below, at or above `limit`, exactly."""
    sign = (limit > 0) - (limit < 0)
    if not isinstance(value, Root):
        return (value > limit) - (value < limit)
    if value.sign != sign:
        return 1 if value.sign > sign else -1
    square = limit**2
    return value.sign * ((value.square > square) - (value.square < square))


def _entry(
    plan: Criterion, subject: Subject, value: Exact | None, relation: str, limit: Fraction
) -> CriterionFindings:
    verdict = NOT_ASSESSABLE
    if value is not None:
        beyond = compared(value, limit) * (1 if relation == AT_MOST else -1)
        verdict = CRITERION_NOT_MET if beyond > 0 else CRITERION_MET
    unit = "%" if plan.quantity.endswith(PERCENT) else subject.unit
    return CriterionFindings(plan.quantity, plan.level, value, relation, limit, unit, verdict)


def _value(plan: Criterion, subject: Subject, precision: PrecisionFindings | None) -> Exact:
    if plan.quantity in _OF_MEANS:
        return _OF_MEANS[plan.quantity](subject)
    if plan.level is not None:
        return _OF_LEVEL[plan.quantity](subject, plan.level)
    if precision is None:
        raise NotComputableError("the precision could not be estimated")
    value = _OF_PRECISION[plan.quantity](precision)
    if value is None:
        zero = plan.quantity.endswith(PERCENT) and not precision.relative_mean
        reason = f"the {precision.relative_to} is zero" if zero else "it could not be estimated"
        raise NotComputableError(reason)
    return value


def _largest_difference(subject: Subject) -> Fraction:
    means = [level.mean for level in subject.analysis.levels]
    return max(means) - min(means)


def _largest_difference_percent(subject: Subject) -> Fraction:
    mean = subject.analysis.grand_mean
    if not mean:
        raise NotComputableError("the mean of all values is zero")
    return 100 * _largest_difference(subject) / abs(mean)


def _level_mean(subject: Subject, level: str) -> Fraction:
    return subject.analysis.summary_of(level).mean


def _level_sd(subject: Subject, level: str) -> Root:
    sd = subject.analysis.summary_of(level).sd
    if sd is None:
        raise NotComputableError(f"{level} has one value, from which no standard deviation can be estimated")
    return sd


def _level_rsd(subject: Subject, level: str) -> Root:
    sd, mean = _level_sd(subject, level), _level_mean(subject, level)
    if not mean:
        raise NotComputableError(f"the mean of {level} is zero")
    return Root.of(Fraction(100) ** 2 * sd.square / mean**2)


_OF_MEANS: dict[str, Callable[[Subject], Exact]] = {
    "largest-difference": _largest_difference,
    "largest-difference-percent": _largest_difference_percent,
}
_OF_LEVEL: dict[str, Callable[[Subject, str], Exact]] = {
    "level-mean": _level_mean,
    "level-sd": _level_sd,
    "level-rsd": _level_rsd,
}
_OF_PRECISION: dict[str, Callable[[PrecisionFindings], Exact | None]] = {
    "repeatability-sd": lambda found: found.repeatability_sd,
    "repeatability-rsd": lambda found: found.repeatability_rsd,
    "repeatability-limit": lambda found: found.repeatability_limit,
    "between-sd": lambda found: found.between_sd,
    "between-rsd": lambda found: found.between_rsd,
    "total-sd": lambda found: found.total_sd,
    "total-rsd": lambda found: found.total_rsd,
}
