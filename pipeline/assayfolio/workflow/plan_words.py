"""A plan in words, a line for each thing it asks for: what a check shows that it understood."""

from collections.abc import Iterator

from assayfolio.exact import to_double
from assayfolio.study.plan import (
    AgainstReference,
    AllPairs,
    Comparison,
    Contrast,
    ContrastFamily,
    Criterion,
    EquivalencePlan,
    StudyDefinition,
)


def plan_words(study: StudyDefinition) -> Iterator[str]:
    """What `study` plans beyond its data: design, comparisons, equivalence and the rest, as it was read."""
    yield from _data_words(study)
    design = study.design
    if design.effects == "random":
        yield "levels are a sample (random effects)"
    elif design.variances == "separate":
        yield f"a variance for each level; overall test {design.omnibus}"
    if design.across_responses != "none":
        yield f"adjusted over {len(study.data.response)} responses by {design.across_responses}"
    yield from map(_described, study.comparisons)
    yield from map(_test_described, study.equivalence)
    if study.spread is not None:
        yield f"variances against {study.spread.against}, {study.spread.adjust}"
    if study.precision is not None and study.precision.estimate:
        yield _precision_described(study)
    if study.outliers is not None:
        yield f"outlier proposals: {', '.join(study.outliers.tests)}"
    checks = (*study.checks.equal_variances, *study.checks.normality)
    if checks:
        yield f"checks: {', '.join(checks)}"
    yield from map(_criterion_described, study.criteria)
    if study.trend is not None:
        plan = study.trend
        base = f"the first {plan.first} lots" if plan.first is not None else f"{len(plan.lots)} named lots"
        what, rules = ", ".join(plan.quantities), ", ".join(plan.rules)
        yield f"charts over lots: {what}; limits from {base}; rules {rules}"
    if study.power is not None:
        yield f"power: target {to_double(study.power.target):g}; `power` shows what the plan reaches"


def _data_words(study: StudyDefinition) -> Iterator[str]:
    """What the plan says is to be done with the data before they are analysed, where it says so."""
    data = study.data
    policies = (
        ("missing", data.missing),
        ("below a limit", data.below_limit),
        ("above a limit", data.above_limit),
    )
    planned = [f"{what}: {policy}" for what, policy in policies if policy != "refuse"]
    if planned:
        yield f"values {', '.join(planned)}"
    if data.convert:
        yield f"units converted: {', '.join(f'{unit} times {factor}' for unit, factor in data.convert)}"
    if data.replicate_unit is not None:
        yield f"repeats with one entry in {data.replicate_unit} are averaged"
    if data.exclusions is not None:
        yield f"exclusions by {data.exclusions}"
    if study.worksheet is not None:
        yield f"measuring order drawn from the seed {study.worksheet.seed}"


def _described(comparison: Comparison) -> str:
    if isinstance(comparison, AllPairs):
        return f"{comparison.name}: all pairs, {comparison.adjust}"
    if isinstance(comparison, AgainstReference):
        what = f"against {comparison.against}, {comparison.adjust}"
    elif isinstance(comparison, Contrast):
        what = ", ".join(f"{weight} {level}" for level, weight in comparison.weights)
        return f"{comparison.name}: {what}; {comparison.alternative}"
    elif isinstance(comparison, ContrastFamily):
        what = f"{len(comparison.contrasts)} contrasts, {comparison.adjust}"
    else:
        kind = "linear trend" if comparison.degree == 1 else f"trend up to degree {comparison.degree}"
        what = f"{kind}, {comparison.adjust}"
    return f"{comparison.name}: {what}, {comparison.alternative}"


def _test_described(test: EquivalencePlan) -> str:
    kind = "non-inferiority" if test.non_inferiority else "equivalence"
    of = "all pairs" if test.against is None else f"against {test.against}"
    only = f", {test.response} only" if test.response is not None else ""
    return f"{test.name}: {kind}, {of}, {test.adjust}{only}"


def _precision_described(study: StudyDefinition) -> str:
    assert study.precision is not None, "asked for by its caller"
    what = "repeatability"
    if study.design.effects == "random":
        total = (study.precision.conditions or "total").replace("-", " ")
        what = f"repeatability, between levels, {total}"
    return f"precision: {what}, intervals at {to_double(study.precision.confidence):g}"


def _criterion_described(criterion: Criterion) -> str:
    limits = []
    if criterion.at_least is not None:
        limits.append(f"at least {to_double(criterion.at_least):g}")
    if criterion.at_most is not None:
        limits.append(f"at most {to_double(criterion.at_most):g}")
    of_level = f" of {criterion.level}" if criterion.level is not None else ""
    only = f" ({criterion.response})" if criterion.response is not None else ""
    return f"criterion: {criterion.quantity}{of_level} {' and '.join(limits)}{only}"
