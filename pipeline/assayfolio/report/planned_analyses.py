"""The planned analyses line by line: what, by which method, and in which section."""

from assayfolio.report.analysis import BROWN_FORSYTHE_MEANS, WELCH
from assayfolio.report.basis import Basis
from assayfolio.report.equivalence_words import planned_margin
from assayfolio.report.methods import ADJUSTMENTS
from assayfolio.report.notation import decimal
from assayfolio.report.numbering import Part
from assayfolio.report.outliers import TEST_NAMES
from assayfolio.report.prose import Prose, Words, prose
from assayfolio.report.wording import counted
from assayfolio.study.plan import (
    AgainstReference,
    AllPairs,
    Comparison,
    Contrast,
    ContrastFamily,
    EquivalencePlan,
)

Rows = list[list[Words]]
_SIDES = {"greater": ", one-sided: greater", "less": ", one-sided: less"}
_DEGREES = {1: "linear", 2: "up to quadratic", 3: "up to cubic"}


def planned_rows(bases: tuple[Basis, ...]) -> Rows:
    """One row for each planned analysis, in the order of the report."""
    basis = bases[0]
    study = basis.study
    omnibus = {
        "f": prose("*F* test"),
        "welch": prose(WELCH),
        "brown-forsythe": prose(BROWN_FORSYTHE_MEANS),
    }[study.design.omnibus]
    rows: Rows = [["Analysis of variance", omnibus, _numbers(bases, Part.ANOVA)]]
    rows += [_comparison_row(bases, plan) for plan in study.comparisons]
    rows += [_equivalence_row(bases, plan) for plan in study.equivalence]
    if study.spread is not None:
        what = prose("Variances ~(each level against {against})~", against=study.spread.against)
        adjust = ADJUSTMENTS[study.spread.adjust].name
        found = [(one.place(Part.SPREAD).number, one.response.spread is not None) for one in bases]
        where = _where(found, basis.place(Part.NOT_REPORTED).number)
        rows.append([what, prose("*F* tests, {adjust}", adjust=adjust), where])
    rows += _check_rows(bases)
    if study.outliers is not None:
        tests = "; ".join(TEST_NAMES[test] for test in study.outliers.tests)
        rows.append(["Outlier proposals", tests, _numbers(bases, Part.OUTLIERS)])
    if study.precision is not None and study.precision.estimate:
        parts = "variance components" if basis.is_random else "repeatability"
        rows.append(["Precision", parts, _numbers(bases, Part.PRECISION)])
    if study.criteria:
        with_criteria = tuple(one for one in bases if one.criteria_plans)
        plans = [plan for one in with_criteria for plan in one.criteria_plans]
        limits = sum((plan.at_least is not None) + (plan.at_most is not None) for plan in plans)
        count = counted(limits, "limit")
        rows.append(["Acceptance criteria", count, _numbers(with_criteria, Part.CRITERIA)])
    return rows


def _numbers(bases: tuple[Basis, ...], part: Part) -> str:
    return ", ".join(str(one.place(part).number) for one in bases)


def _where(found: list[tuple[int, bool]], not_reported: int) -> str:
    """The sections of a family, or that of the reasons where it could not be given for any response."""
    reported = [str(number) for number, is_reported in found if is_reported]
    if len(reported) == len(found):
        return ", ".join(reported)
    return ", ".join([*reported, f"{not_reported} (not reported)"])


def _comparison_row(bases: tuple[Basis, ...], plan: Comparison) -> list[Words]:
    found = [
        (
            one.place(Part.COMPARISONS).number,
            any(family.name == plan.name for family in one.response.comparisons),
        )
        for one in bases
    ]
    number = bases[0].place(Part.NOT_REPORTED).number
    return [comparison_words(plan), ADJUSTMENTS[plan.adjust].name, _where(found, number)]


def comparison_words(comparison: Comparison) -> Prose:
    """A planned family of comparisons: its name, and what it compares."""
    if isinstance(comparison, AllPairs):
        what = "all pairs"
    elif isinstance(comparison, AgainstReference):
        what = f"each level against {comparison.against}{_SIDES.get(comparison.alternative, '')}"
    elif isinstance(comparison, Contrast):
        weights = "; ".join(f"{level} {decimal(weight)}" for level, weight in comparison.weights)
        what = f"weights {weights}{_SIDES.get(comparison.alternative, '')}"
    elif isinstance(comparison, ContrastFamily):
        what = f"{len(comparison.contrasts)} contrasts{_SIDES.get(comparison.alternative, '')}"
    else:
        degree = _DEGREES.get(comparison.degree, f"up to degree {comparison.degree}")
        what = f"trend, {degree}{_SIDES.get(comparison.alternative, '')}"
    return prose("{name} ~({what})~", name=comparison.name, what=what)


def _equivalence_row(bases: tuple[Basis, ...], plan: EquivalencePlan) -> list[Words]:
    asked = [one for one in bases if plan in one.equivalence_plans]
    found = [
        (
            one.place(Part.EQUIVALENCE).number,
            any(family.name == plan.name for family in one.response.equivalence),
        )
        for one in asked
    ]
    which = "all pairs" if plan.against is None else f"each level against {plan.against}"
    margin = planned_margin(plan, asked[0].response.unit)
    tests = "one one-sided *t* test" if plan.non_inferiority else "two one-sided *t* tests"
    adjust = ADJUSTMENTS[plan.adjust].name
    number = bases[0].place(Part.NOT_REPORTED).number
    return [
        prose("{name} ~({which}; {margin})~", name=plan.name, which=which, margin=margin),
        prose(tests + ", {adjust}", adjust=adjust),
        _where(found, number),
    ]


def _check_rows(bases: tuple[Basis, ...]) -> Rows:
    study = bases[0].study
    number = _numbers(bases, Part.CHECKS)
    rows: Rows = []
    for what, tests in (
        ("Check of equal variances", study.checks.equal_variances),
        ("Check of normality of residuals", study.checks.normality),
    ):
        if tests:
            rows.append([what, ", ".join(method_name(test) for test in tests), number])
    if study.data.order is not None:
        rows.append(["Check of the measuring order", "trend of residuals", number])
    return rows


def method_name(key: str) -> str:
    """A check by the names of its authors: "Brown–Forsythe"."""
    return "–".join(part.capitalize() for part in key.split("-"))
