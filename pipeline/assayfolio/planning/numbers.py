"""The numbers of a plan that its power follows from."""

from dataclasses import dataclass

from assayfolio.exact import to_double
from assayfolio.statistics.sample_size import control_size
from assayfolio.study.plan import AgainstReference, PowerPlan, StudyDefinition

Sizes = tuple[int, ...]


@dataclass(frozen=True, slots=True)
class PlanNumbers:
    """Levels, planned numbers of values at each, and what is assumed; `alpha` is that of each response."""

    levels: tuple[str, ...]
    replicates: Sizes
    alpha: float
    sigma: float
    difference: float
    true_difference: float
    target: float
    reference: int | None
    by_control: bool
    responses: int

    def sizes(self, n: int) -> Sizes:
        """The numbers of values with `n` at each level, the reference's share apart where so planned."""
        if not self.by_control or self.reference is None:
            return (n,) * len(self.levels)
        share = control_size(n, len(self.levels))
        return tuple(share if at == self.reference else n for at in range(len(self.levels)))

    def at(self, level: str) -> int:
        """The position of a level."""
        return self.levels.index(level)


def numbers_of(study: StudyDefinition, plan: PowerPlan) -> PlanNumbers | None:
    """The numbers of `study`; None where it declares no levels or no replicates for one of them."""
    levels = study.data.levels
    if levels is None:
        return None
    replicates = tuple(study.data.planned_replicates(level) for level in levels)
    planned = tuple(n for n in replicates if n is not None)
    if len(planned) != len(levels):
        return None
    responses = 1 if study.design.across_responses == "none" else len(study.data.response)
    return PlanNumbers(
        levels=levels,
        replicates=planned,
        alpha=to_double(study.alpha / responses),
        sigma=to_double(plan.sigma),
        difference=to_double(plan.difference),
        true_difference=to_double(plan.true_difference),
        target=to_double(plan.target),
        reference=_reference(study, levels),
        by_control=plan.allocation == "control",
        responses=responses,
    )


def _reference(study: StudyDefinition, levels: tuple[str, ...]) -> int | None:
    named = [plan.against for plan in study.comparisons if isinstance(plan, AgainstReference)]
    named += [test.against for test in study.equivalence if test.against is not None]
    return levels.index(named[0]) if named else None
