"""The power of a plan: of every planned test, with the numbers that would reach the target.

From the plan alone. Nothing here sees data, and no power is computed after the fact.
"""

from dataclasses import dataclass

from assayfolio.exact import round_significant
from assayfolio.findings import NotReported, PowerFindings, PowerRow
from assayfolio.planning.numbers import PlanNumbers, numbers_of
from assayfolio.planning.questions import PlannedTest, planned_tests
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.statistics.sample_size import MOST_VALUES, detectable_difference, smallest_n
from assayfolio.study.plan import StudyDefinition

_CURVE_POINTS = 16


@dataclass(frozen=True, slots=True)
class PowerCurve:
    """The power of one planned test against the number of values at each level."""

    question: str
    meaning: str
    n: tuple[int, ...]
    power: tuple[float, ...]


def plan_power(study: StudyDefinition) -> tuple[PowerFindings | None, tuple[NotReported, ...]]:
    """The power of the planned tests of `study`, and what of it cannot be given with its reason.

    None where the plan does not ask for power.
    """
    if study.power is None:
        return None, ()
    numbers = numbers_of(study, study.power)
    if numbers is None:
        return None, (NotReported("power", "the plan does not declare its levels and replicates"),)
    gaps: list[NotReported] = []
    response = study.power.response or study.data.response[0]
    rows = []
    for test in planned_tests(study, numbers, response, gaps):
        try:
            rows.append(_row(test, numbers))
        except NotComputableError as error:
            gaps.append(NotReported(f"power: {test.question}", str(error)))
    plan = study.power
    power = PowerFindings(
        response=response,
        unit=study.data.unit_of(response),
        levels=numbers.levels,
        replicates=numbers.replicates,
        alpha=study.alpha / numbers.responses,
        difference=plan.difference,
        sigma=plan.sigma,
        target=plan.target,
        true_difference=plan.true_difference,
        allocation=plan.allocation,
        rows=tuple(rows),
    )
    return power, tuple(gaps)


def _row(test: PlannedTest, numbers: PlanNumbers) -> PowerRow:
    power = min(1.0, test.power(numbers.replicates, numbers.difference))
    n = smallest_n(lambda size: test.power(numbers.sizes(size), numbers.difference), numbers.target)
    detectable = None
    if test.grows:
        detectable = detectable_difference(
            lambda difference: test.power(numbers.replicates, difference), numbers.target, numbers.sigma
        )
    width = None if test.half_width is None else test.half_width(numbers.replicates)
    return PowerRow(
        question=test.question,
        method=test.method,
        meaning=test.meaning,
        power=round_significant(power),
        n_for_target=None if n is None else numbers.sizes(n),
        detectable_difference=None if detectable is None else round_significant(detectable),
        half_width=None if width is None else round_significant(width),
    )


def power_curves(study: StudyDefinition, power: PowerFindings) -> tuple[PowerCurve, ...]:
    """How the power of the planned tests rises with the number of values at each level, one curve a row.

    Each runs from 2 values to half as many again as are planned or needed, whichever is more.
    """
    numbers = None if study.power is None else numbers_of(study, study.power)
    if numbers is None:
        return ()
    rows = {(row.question, row.meaning): row for row in power.rows}
    return tuple(
        _curve(test, numbers, rows[test.question, test.meaning])
        for test in planned_tests(study, numbers, power.response, [])
        if (test.question, test.meaning) in rows
    )


def _curve(test: PlannedTest, numbers: PlanNumbers, row: PowerRow) -> PowerCurve:
    needed = min(numbers.replicates) if row.n_for_target is None else min(row.n_for_target)
    last = min(MOST_VALUES, max(6, 3 * max(needed, min(numbers.replicates)) // 2))
    n = tuple(dict.fromkeys(2 + round(at * (last - 2) / _CURVE_POINTS) for at in range(_CURVE_POINTS + 1)))
    powers = tuple(min(1.0, test.power(numbers.sizes(size), numbers.difference)) for size in n)
    return PowerCurve(test.question, test.meaning, n, powers)
