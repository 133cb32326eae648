"""Invented values in the millions, recorded to thousandths: figures and axes that have no room for digits."""

from collections.abc import Callable
from dataclasses import replace
from fractions import Fraction

from assayfolio.report.facts import ReportInput
from assayfolio.study.plan import ChecksPlan, DesignPlan
from report.samples import against, all_pairs, invented, observations, report_input, study
from report.samples_beyond import criterion, equivalence


def large_numbers(variances: str = "pooled") -> ReportInput:
    """Three lots near 1,240,000 whose differences are some thousands, with limits that are not met."""
    means = {"standard": 1245000.0, "new lot": 1239000.0, "old lot": 1251000.0}
    seen = observations(invented(means, 5200.0, dict.fromkeys(means, 6), 3, 1240), "activity", "lot")
    separate = variances == "separate"
    plan = study(
        seen,
        title="Activity of three lots",
        name="ACT-001",
        unit="IU",
        comparisons=(
            all_pairs("games-howell" if separate else "tukey-kramer"),
            against("standard", "bonferroni", "greater", "above the standard"),
        ),
        checks=ChecksPlan(("brown-forsythe", "levene"), ("shapiro-wilk",)),
    )
    limit = Fraction(1240000)
    plan = replace(
        plan,
        equivalence=(
            equivalence(
                "within 1 percent",
                against="standard",
                lower_percent=Fraction(-1),
                upper_percent=Fraction(1),
            ),
            equivalence("within 9000", against="standard", lower=Fraction(-9000), upper=Fraction(9000)),
        ),
        criteria=(
            criterion("largest-difference", at_most=Fraction(5000)),
            criterion("level-mean", level="new lot", at_least=limit, at_most=limit + 20000),
        ),
    )
    if separate:
        plan = replace(plan, design=DesignPlan(variances="separate", omnibus="welch"))
    return report_input(plan, seen)


CASES_LARGE: dict[str, Callable[[], ReportInput]] = {
    "large numbers": large_numbers,
    "large numbers, separate variances": lambda: large_numbers("separate"),
}
