"""Whether a plan can be applied to the observations at hand; cheap enough for every check of a study."""

from collections.abc import Iterator, Sequence

from assayfolio.errors import DataError, Fault, Place
from assayfolio.observations.values import CountFlow, Observations
from assayfolio.study.labels import shared_label
from assayfolio.study.plan import (
    AgainstReference,
    AllPairs,
    Comparison,
    Contrast,
    ContrastFamily,
    StudyDefinition,
    Trend,
)
from assayfolio.study.scores import trend_misfits


def check_fit(study: StudyDefinition, observations: Sequence[Observations]) -> None:
    """Raise DataError with all reasons why `study` cannot be applied to `observations`, one set a response.

    Fewer than two levels, levels without any value left, one value at every level (nothing from which the
    error could be estimated), levels that are named in the plan and absent from the data, trends over levels
    that have no number each, and levels of which two pairs would bear the same label. All responses stand in
    the same rows, so that the levels of the first are those of all; what is left of them is looked at
    response by response.
    """
    observed = observations[0]
    faults = [
        *dict.fromkeys(fault for one in observations for fault in _layout_faults(one)),
        *_absent_levels(study, observed.levels),
        *_trend_faults(study, observed.levels),
        *_label_faults(study, observed),
    ]
    if faults:
        raise DataError(f"{observed.file} does not fit the plan.", tuple(faults))


def _layout_faults(observed: Observations) -> Iterator[Fault]:
    place = Place(observed.file)
    if len(observed.levels) < 2:
        names = ", ".join(observed.levels)
        found = f"the data have one level only ({names})"
        yield Fault(place, found, "a comparison needs at least two; check the factor column")
        return
    empty = [counts for counts in observed.flow if not counts.analysed]
    for counts in empty:
        found = f"no value of {observed.response!r} is left at level {counts.level!r}: {_left_out(counts)}"
        yield Fault(place, found, "an analysis needs a value at every level")
    if not empty and observed.n == len(observed.levels):
        found = "one value at every level: nothing varies within the levels, so no error can be estimated"
        yield Fault(place, found, "at least one level needs two or more values")


def _left_out(counts: CountFlow) -> str:
    causes = (
        (counts.missing, "missing"),
        (counts.below_limit, "below a limit"),
        (counts.above_limit, "above a limit"),
        (counts.excluded, "excluded"),
    )
    return ", ".join(f"{number} {cause}" for number, cause in causes if number)


def _absent_levels(study: StudyDefinition, levels: tuple[str, ...]) -> Iterator[Fault]:
    present = frozenset(levels)
    for what, level, place in _named_levels(study):
        if level not in present:
            found = f"{what} names the level {level!r}, which the data do not have"
            yield Fault(place, found, f"the data have: {', '.join(levels)}")


def _named_levels(study: StudyDefinition) -> Iterator[tuple[str, str, Place]]:
    """Each level that the plan names, with what names it and where that stands."""
    for plan in study.comparisons:
        for level in dict.fromkeys(_levels_in(plan)):
            yield f"comparison {plan.name!r}", level, plan.place
    for test in study.equivalence:
        if test.against is not None:
            yield f"equivalence test {test.name!r}", test.against, test.place
    if study.spread is not None:
        yield "`spread`", study.spread.against, study.spread.place
    for criterion in study.criteria:
        if criterion.level is not None:
            yield f"the criterion on {criterion.quantity}", criterion.level, criterion.place


def _levels_in(plan: Comparison) -> tuple[str, ...]:
    if isinstance(plan, AgainstReference):
        return (plan.against,)
    if isinstance(plan, Contrast):
        return tuple(level for level, _ in plan.weights)
    if isinstance(plan, ContrastFamily):
        return tuple(level for contrast in plan.contrasts for level, _ in contrast.weights)
    if isinstance(plan, Trend):
        return tuple(level for level, _ in plan.scores)
    return ()


def _trend_faults(study: StudyDefinition, levels: tuple[str, ...]) -> Iterator[Fault]:
    for plan in study.comparisons:
        if isinstance(plan, Trend) and len(levels) > 1:
            for misfit in trend_misfits(plan, levels):
                found = f"comparison {plan.name!r}: `{misfit.key}` {misfit.found}"
                yield Fault(plan.place, found, f"expected {misfit.expected}")


def _label_faults(study: StudyDefinition, observed: Observations) -> Iterator[Fault]:
    of_pairs = any(isinstance(plan, AllPairs) for plan in study.comparisons)
    if of_pairs or any(test.pairs for test in study.equivalence):
        both = shared_label(observed.levels)
        if both is not None:
            found = f"two pairs of levels would bear the same label {both!r}"
            yield Fault(Place(observed.file), found, "rename the levels, without ' - ' in the names")
