"""A planned margin in words."""

from assayfolio.report.wording import limits_words
from assayfolio.study.plan import EquivalencePlan


def planned_margin(plan: EquivalencePlan, unit: str | None) -> str:
    """The margin of a planned family: "-0.5 to 0.5 mg/L", or in percent of the reference mean."""
    if plan.percent:
        return f"{limits_words(plan.lower_percent, plan.upper_percent, '%')} of the reference mean"
    return limits_words(plan.lower, plan.upper, unit)
