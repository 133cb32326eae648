"""Whether a plan can be applied to the observations at hand; cheap enough for every check of a study."""

from assayfolio.errors import DataError, Fault, Place
from assayfolio.observations.values import Observations
from assayfolio.study.plan import AllPairs, Comparison, Contrast, StudyDefinition


def check_fit(study: StudyDefinition, observations: Observations) -> None:
    """Raise DataError with all reasons why `study` cannot be applied to `observations`.

    Fewer than two levels, one value at every level (nothing from which the error could be estimated), and
    comparisons that name a level the data do not have.
    """
    place = Place(observations.file)
    faults = []
    if len(observations.levels) < 2:
        names = ", ".join(observations.levels)
        faults.append(
            Fault(
                place,
                f"the data have one level only ({names})",
                "a comparison needs at least two; check the factor column",
            )
        )
    elif len(observations.rows) == len(observations.levels):
        faults.append(
            Fault(
                place,
                "one value at every level: nothing varies within the levels, so no error can be estimated",
                "at least one level needs two or more values",
            )
        )
    faults.extend(_absent_levels(study, observations))
    if faults:
        raise DataError(f"{observations.file} does not fit the plan.", tuple(faults))


def _absent_levels(study: StudyDefinition, observations: Observations) -> list[Fault]:
    present = ", ".join(observations.levels)
    return [
        Fault(
            plan.place,
            f"comparison {plan.name!r} names the level {level!r}, which the data do not have",
            f"the data have: {present}",
        )
        for plan in study.comparisons
        for level in _named_levels(plan)
        if level not in observations.levels
    ]


def _named_levels(plan: Comparison) -> tuple[str, ...]:
    if isinstance(plan, AllPairs):
        return ()
    if isinstance(plan, Contrast):
        return tuple(level for level, _ in plan.weights)
    return (plan.against,)
