"""What the findings say about values as received: counts, exclusions, departures from numbers and order."""

from collections.abc import Iterator, Sequence

from assayfolio.findings_intake import Deviation, ExclusionFindings, FlowFindings
from assayfolio.observations.values import CountFlow, Observations
from assayfolio.study.plan import DataPlan, StudyDefinition
from assayfolio.worksheet.deviations import study_deviations


def flow_findings(observations: Observations) -> tuple[FlowFindings, ...]:
    """The counts of each level from received to analysed."""
    return tuple(
        FlowFindings(
            level=counts.level,
            received=counts.received,
            missing=counts.missing,
            below_limit=counts.below_limit,
            above_limit=counts.above_limit,
            excluded=counts.excluded,
            merged=counts.merged,
            analysed=counts.analysed,
        )
        for counts in observations.flow
    )


def exclusion_findings(observations: Sequence[Observations]) -> tuple[ExclusionFindings, ...]:
    """Every value that a person left out, response by response in the order of the files."""
    return tuple(
        ExclusionFindings(
            response=observed.response,
            file=observed.files[aside.file].file,
            line=aside.line,
            level=aside.level,
            text=aside.text,
            value=None if aside.value is None else aside.value.fraction,
            reason=aside.reason,
            decided_by=aside.decided_by,
            decided_at=aside.decided_at,
            approved_by=aside.approved_by or None,
        )
        for observed in observations
        for aside in observed.set_aside
        if aside.cause == "excluded"
    )


def count_deviations(plan: DataPlan, observations: Sequence[Observations]) -> tuple[Deviation, ...]:
    """One deviation for each level of which fewer values are analysed than were planned.

    As many as planned were received, or the data would have been refused.
    """
    return tuple(deviation for observed in observations for deviation in _short_levels(plan, observed))


def order_deviations(study: StudyDefinition, observations: Sequence[Observations]) -> tuple[Deviation, ...]:
    """Each departure from the worksheet of the study; none where it has none."""
    return tuple(
        Deviation(found.detail, f"worksheet: {found.what}", lines=found.lines)
        for found in study_deviations(study, observations)
    )


def _short_levels(plan: DataPlan, observed: Observations) -> Iterator[Deviation]:
    for counts in observed.flow:
        planned = plan.planned_replicates(counts.level)
        if planned is not None and counts.analysed < planned:
            values = "value" if counts.analysed == 1 else "values"
            what = f"{counts.level}: {counts.analysed} {values} analysed, {planned} planned"
            yield Deviation(what, "; ".join(_causes(counts)), observed.response)


def _causes(counts: CountFlow) -> Iterator[str]:
    words = (
        (counts.missing, "missing"),
        (counts.below_limit, "below a limit and omitted"),
        (counts.above_limit, "above a limit and omitted"),
        (counts.excluded, "excluded with a reason"),
    )
    return (f"{number} {word}" for number, word in words if number)
