"""The planned tests as functions of numbers of values and of the true difference."""

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from fractions import Fraction
from functools import cache
from itertools import combinations

from assayfolio.exact import to_double
from assayfolio.findings import NotReported
from assayfolio.method_names import comparison_method, equivalence_method
from assayfolio.planning.numbers import PlanNumbers, Sizes
from assayfolio.statistics.adjustment import sidak_level
from assayfolio.statistics.comparisons import GREATER, LESS, TWO_SIDED
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.statistics.power import contrast_power, error_df, f_power, pair_power, t_power
from assayfolio.statistics.power_equivalence import equivalence_power, non_inferiority_power
from assayfolio.statistics.power_families import all_pairs_power, any_pair_power, tukey_critical
from assayfolio.statistics.power_reference import (
    all_reference_power,
    any_reference_power,
    dunnett_critical,
)
from assayfolio.statistics.sample_size import half_width
from assayfolio.statistics.tails import f_isf, t_isf
from assayfolio.study.plan import (
    AgainstReference,
    AllPairs,
    Comparison,
    Contrast,
    ContrastFamily,
    EquivalencePlan,
    StudyDefinition,
    Trend,
)

_STEPWISE = ("holm", "hochberg", "dunnett-step-down")
_LIES = {
    TWO_SIDED: ("differs from", "differ from"),
    GREATER: ("lies above", "lie above"),
    LESS: ("lies below", "lie below"),
}
_IS = {
    TWO_SIDED: "is the difference",
    GREATER: "lies above zero by the difference",
    LESS: "lies below zero by the difference",
}
_GO = {
    TWO_SIDED: "the means rise in a straight line",
    GREATER: "the means rise in a straight line",
    LESS: "the means fall in a straight line",
}
_UNEQUAL = "with unequal numbers of values only the power of one pair is computed"


@dataclass(frozen=True, slots=True)
class PlannedTest:
    """One question of the plan.

    `power` takes numbers of values and the true difference, `half_width` numbers of values. `grows` says
    whether power rises with the difference: that of equivalence does not, and has no detectable difference.
    """

    question: str
    method: str
    meaning: str
    power: Callable[[Sizes, float], float]
    half_width: Callable[[Sizes], float] | None
    grows: bool = True


def planned_tests(
    study: StudyDefinition, numbers: PlanNumbers, response: str, gaps: list[NotReported]
) -> Iterator[PlannedTest]:
    """Every planned test on `response`, the overall one first, in the order of the plan."""
    yield PlannedTest(
        "overall: do the means differ?",
        "F test",
        "showing a difference, where two extreme levels differ by the difference and the rest lie midway",
        lambda sizes, difference: f_power(sizes, difference, numbers.sigma, numbers.alpha),
        None,
    )
    for plan in study.comparisons:
        for planned in _comparison(plan, numbers, gaps):
            yield planned if _has_interval(plan, study) else replace(planned, half_width=None)
    for test in study.equivalence:
        if test.response in (None, response):
            yield from _equivalence(test, study, numbers, gaps)


def _has_interval(plan: Comparison, study: StudyDefinition) -> bool:
    """Whether a family comes with intervals: not by a stepwise method, nor where Holm takes all responses."""
    if plan.adjust in _STEPWISE:
        return False
    match plan:
        case Trend():
            rows = plan.degree
        case ContrastFamily():
            rows = len(plan.contrasts)
        case Contrast():
            rows = 1
        case _:
            rows = len(study.data.levels or ()) - 1
    return not (rows == 1 and _holm_across(study))


def _holm_across(study: StudyDefinition) -> bool:
    return study.design.across_responses == "holm" and len(study.data.response) > 1


def _comparison(plan: Comparison, numbers: PlanNumbers, gaps: list[NotReported]) -> Iterator[PlannedTest]:
    match plan:
        case AllPairs():
            yield from _pairs(plan, numbers, gaps)
        case AgainstReference():
            yield from _against(plan, numbers)
        case Contrast():
            yield _contrast(plan, plan.name, dict(plan.weights), 1, numbers)
        case ContrastFamily():
            for one in plan.contrasts:
                name = f"{plan.name}: {one.name}"
                yield _contrast(plan, name, dict(one.weights), len(plan.contrasts), numbers)
        case Trend():
            yield _trend(plan, numbers)


def _level(adjust: str, alpha: float, rows: int) -> float:
    """The level of each test; of a stepwise procedure that of its first step."""
    if adjust == "none":
        return alpha
    return sidak_level(alpha, rows) if adjust == "sidak" else alpha / rows


def _critical(adjust: str, alternative: str, alpha: float, rows: int, sizes: Sizes) -> float:
    """What t, or |t|, is held against, for the procedures that t and F tails belong to."""
    df = error_df(sizes)
    if adjust == "scheffe":
        k = len(sizes)
        return math.sqrt((k - 1) * float(f_isf(alpha, k - 1, df)))
    level = _level(adjust, alpha, rows)
    return float(t_isf(level / 2 if alternative == TWO_SIDED else level, df))


def _sought(plan: Comparison, of: str) -> str:
    first = "; at its first step, so at least this" if plan.adjust in _STEPWISE else ""
    return of + first


def _pairs(plan: AllPairs, numbers: PlanNumbers, gaps: list[NotReported]) -> Iterator[PlannedTest]:
    k, sigma, alpha = len(numbers.levels), numbers.sigma, numbers.alpha
    rows = k * (k - 1) // 2
    method = comparison_method(plan.adjust, "pooled")

    @cache
    def critical(sizes: Sizes) -> float:
        if plan.adjust == "tukey-kramer":
            return tukey_critical(k, error_df(sizes), alpha)
        return _critical(plan.adjust, TWO_SIDED, alpha, rows, sizes)

    def one(sizes: Sizes, difference: float) -> float:
        a, b = _smallest_pair(sizes)
        return pair_power(a, b, error_df(sizes), difference, sigma, critical(sizes), TWO_SIDED)

    def width(sizes: Sizes) -> float:
        a, b = _smallest_pair(sizes)
        return half_width(critical(sizes), Fraction(a + b, a * b), sigma)

    of_unequal = ", that with the fewest values," if len(set(numbers.replicates)) > 1 else ""
    words = _sought(plan, f"showing a given pair{of_unequal} that differs by the difference")
    yield PlannedTest(plan.name, method, words, one, width)
    if k == 2:
        return
    if len(set(numbers.replicates)) > 1 or len(set(numbers.sizes(2))) > 1:
        gaps.append(NotReported(f"power of any and of all pairs: {plan.name}", _UNEQUAL))
        return
    yield PlannedTest(
        plan.name,
        method,
        _sought(plan, "showing at least one of the pairs that differ, the extremes by the difference"),
        lambda sizes, difference: any_pair_power(sizes[0], k, difference, sigma, critical(sizes)),
        None,
    )
    yield PlannedTest(
        plan.name,
        method,
        _sought(plan, "showing every pair that differs, the extremes by the difference"),
        lambda sizes, difference: all_pairs_power(sizes[0], k, difference, sigma, critical(sizes)),
        None,
    )


def _smallest_pair(sizes: Sizes) -> tuple[int, int]:
    """The numbers of values of the pair whose difference is known least well."""
    return min(combinations(sizes, 2), key=lambda pair: Fraction(pair[0] * pair[1], pair[0] + pair[1]))


def _against(plan: AgainstReference, numbers: PlanNumbers) -> Iterator[PlannedTest]:
    sigma, alpha, at = numbers.sigma, numbers.alpha, numbers.at(plan.against)
    method = comparison_method(plan.adjust, "pooled")

    def parted(sizes: Sizes) -> tuple[int, Sizes]:
        return sizes[at], sizes[:at] + sizes[at + 1 :]

    @cache
    def critical(sizes: Sizes) -> float:
        control, others = parted(sizes)
        if plan.adjust.startswith("dunnett"):
            return dunnett_critical(control, others, alpha, plan.alternative)
        return _critical(plan.adjust, plan.alternative, alpha, len(others), sizes)

    def one(sizes: Sizes, difference: float) -> float:
        control, others = parted(sizes)
        hurdle = critical(sizes)
        return pair_power(control, min(others), error_df(sizes), difference, sigma, hurdle, plan.alternative)

    def at_least_one(sizes: Sizes, difference: float) -> float:
        control, others = parted(sizes)
        return any_reference_power(control, others, difference, sigma, critical(sizes), plan.alternative)

    def every(sizes: Sizes, difference: float) -> float:
        control, others = parted(sizes)
        return all_reference_power(control, others, difference, sigma, critical(sizes))

    def width(sizes: Sizes) -> float:
        control, others = parted(sizes)
        return half_width(critical(sizes), Fraction(1, control) + Fraction(1, min(others)), sigma)

    lies, lie = _LIES[plan.alternative]
    of_unequal = ", that with the fewest values," if len(set(parted(numbers.replicates)[1])) > 1 else ""
    words = f"showing a given level{of_unequal} that {lies} the reference by the difference"
    yield PlannedTest(plan.name, method, _sought(plan, words), one, width)
    if len(numbers.levels) > 2:
        words = f"showing at least one level, where all {lie} the reference by the difference"
        yield PlannedTest(plan.name, method, _sought(plan, words), at_least_one, None)
        words = f"showing every level, where all {lie} the reference by the difference"
        yield PlannedTest(plan.name, method, _sought(plan, words), every, None)


def _contrast(
    plan: Contrast | ContrastFamily,
    name: str,
    weights: dict[str, Fraction],
    rows: int,
    numbers: PlanNumbers,
) -> PlannedTest:
    ordered = [weights.get(level, Fraction(0)) for level in numbers.levels]
    factor_of = _variance_factor(ordered)

    def power(sizes: Sizes, difference: float) -> float:
        return _power_of_contrast(plan, ordered, sizes, difference, rows, numbers)

    def width(sizes: Sizes) -> float:
        critical = _critical(plan.adjust, plan.alternative, numbers.alpha, rows, sizes)
        return half_width(critical, factor_of(sizes), numbers.sigma)

    words = _sought(plan, f"showing the contrast, where its true value {_IS[plan.alternative]}")
    return PlannedTest(name, comparison_method(plan.adjust, "pooled"), words, power, width)


def _variance_factor(weights: list[Fraction]) -> Callable[[Sizes], Fraction]:
    return lambda sizes: sum((w**2 / n for w, n in zip(weights, sizes, strict=True)), Fraction(0))


def _power_of_contrast(
    plan: Contrast | ContrastFamily | Trend,
    weights: list[Fraction],
    sizes: Sizes,
    value: float,
    rows: int,
    numbers: PlanNumbers,
) -> float:
    signed = -value if plan.alternative == LESS else value
    if plan.adjust == "scheffe":
        critical = _critical(plan.adjust, plan.alternative, numbers.alpha, rows, sizes)
        se = numbers.sigma * math.sqrt(_variance_factor(weights)(sizes))
        return t_power(critical, error_df(sizes), signed / se, plan.alternative)
    level = _level(plan.adjust, numbers.alpha, rows)
    return contrast_power(weights, sizes, signed, numbers.sigma, level, plan.alternative)


def _trend(plan: Trend, numbers: PlanNumbers) -> PlannedTest:
    scores = [plan.score_of(level) for level in numbers.levels]
    rise = to_double(max(scores) - min(scores))

    def power(sizes: Sizes, difference: float) -> float:
        total = sum(sizes)
        centre = sum((n * x for n, x in zip(sizes, scores, strict=True)), Fraction(0)) / total
        norm = sum((n * (x - centre) ** 2 for n, x in zip(sizes, scores, strict=True)), Fraction(0))
        slope = [n * (x - centre) / norm for n, x in zip(sizes, scores, strict=True)]
        return _power_of_contrast(plan, slope, sizes, difference / rise, plan.degree, numbers)

    go = _GO[plan.alternative]
    words = f"showing the linear trend, where {go} by the difference from end to end"
    return PlannedTest(
        f"{plan.name}: linear",
        comparison_method(plan.adjust, "pooled"),
        _sought(plan, words),
        power,
        None,
    )


def _equivalence(
    test: EquivalencePlan, study: StudyDefinition, numbers: PlanNumbers, gaps: list[NotReported]
) -> Iterator[PlannedTest]:
    if test.percent:
        why = "its margin is in percent of a reference mean that the plan does not know"
        gaps.append(NotReported(f"power: {test.name}", why))
        return
    k = len(numbers.levels)
    rows = k - 1 if test.against is not None else k * (k - 1) // 2
    alpha = to_double((test.alpha or study.alpha) / numbers.responses)
    level = _level(test.adjust, alpha, rows)
    # With Holm each interval is for its own row, and over all responses for its own response.
    of_interval = alpha if test.adjust == "holm" else level
    if _holm_across(study) and test.response is None and (test.adjust == "holm" or rows == 1):
        of_interval = to_double(test.alpha or study.alpha)

    def pair(sizes: Sizes) -> tuple[int, int]:
        if test.against is None:
            return _smallest_pair(sizes)
        at = numbers.at(test.against)
        return sizes[at], min(sizes[:at] + sizes[at + 1 :])

    def power(sizes: Sizes, _: float) -> float:
        a, b = pair(sizes)
        df, true, sigma = error_df(sizes), numbers.true_difference, numbers.sigma
        if test.lower is not None and test.upper is not None:
            return equivalence_power(a, b, df, true, test.lower, test.upper, sigma, level)
        side, bound = (GREATER, test.lower) if test.lower is not None else (LESS, test.upper)
        if bound is None:
            raise NotComputableError("no margin is planned")
        return non_inferiority_power(a, b, df, true, bound, sigma, level, side)

    def width(sizes: Sizes) -> float:
        a, b = pair(sizes)
        return half_width(float(t_isf(of_interval, error_df(sizes))), Fraction(a + b, a * b), numbers.sigma)

    kind = "non-inferiority" if test.non_inferiority else "equivalence"
    first = "; at Holm's first step, so at least this" if test.adjust == "holm" and rows > 1 else ""
    compared = numbers.replicates
    if test.against is not None:
        at = numbers.at(test.against)
        compared = compared[:at] + compared[at + 1 :]
    of_unequal = ", that with the fewest values," if len(set(compared)) > 1 else ""
    words = f"showing {kind} of a given pair{of_unequal} at the true difference that is assumed{first}"
    yield PlannedTest(test.name, equivalence_method(test, "pooled"), words, power, width, grows=False)
