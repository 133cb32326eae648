"""From a plan and its observations to the findings.

No file, clock or environment is read. A plan that cannot be applied to these observations at all is a
DataError; a part that was asked for and cannot be given is a finding with its reason.
"""

from collections.abc import Iterator, Sequence
from dataclasses import replace
from functools import partial

from assayfolio.errors import MachineError
from assayfolio.evaluation.alternatives import censoring_findings, unexcluded_findings
from assayfolio.evaluation.checks import check_findings
from assayfolio.evaluation.criteria import criterion_findings
from assayfolio.evaluation.effects import effect_findings
from assayfolio.evaluation.equivalence import equivalence_families
from assayfolio.evaluation.families import comparison_families
from assayfolio.evaluation.intake import count_deviations, exclusion_findings, flow_findings, order_deviations
from assayfolio.evaluation.levels import level_findings
from assayfolio.evaluation.omnibus import anova_findings, brown_forsythe_findings, welch_findings
from assayfolio.evaluation.outliers import outlier_findings
from assayfolio.evaluation.precision import precision_findings
from assayfolio.evaluation.spread import spread_findings
from assayfolio.evaluation.subject import Subject, subject_of
from assayfolio.exact import to_double
from assayfolio.findings import (
    BrownForsytheMeansFindings,
    CheckFindings,
    Findings,
    NotReported,
    OutlierFindings,
    ResponseFindings,
    WelchFindings,
)
from assayfolio.findings_intake import FlowFindings
from assayfolio.fit import check_fit
from assayfolio.observations.values import Observations
from assayfolio.planning.plan_power import plan_power
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.study.plan import StudyDefinition


def evaluate(study: StudyDefinition, observations: tuple[Observations, ...]) -> Findings:
    """The findings of `study` on `observations`, one entry a response, and the power that its plan has.

    Raises DataError where the plan cannot be applied to them at all (see `check_fit`).
    """
    check_fit(study, observations)
    subjects = [subject_of(one, study.data.unit_of(one.response)) for one in observations]
    analyse = partial(_analysed, study)
    gaps: list[NotReported] = []
    analysed = analyse(subjects, gaps)
    unexcluded = unexcluded_findings(study, observations, analyse, gaps)
    censoring = censoring_findings(study, observations, subjects, analyse, gaps)
    responses = tuple(
        replace(found, flow=_flow(found, observed), censoring=censored, without_exclusions=nothing_excluded)
        for found, observed, censored, nothing_excluded in zip(
            analysed, observations, censoring, unexcluded, strict=True
        )
    )
    power, power_gaps = plan_power(study)
    return Findings(
        study=study.study,
        responses=responses,
        not_reported=(*_in_order(gaps, subjects), *power_gaps),
        power=power,
        exclusions=exclusion_findings(observations),
        deviations=(*count_deviations(study.data, observations), *order_deviations(study, observations)),
    )


def _flow(found: ResponseFindings, observed: Observations) -> tuple[FlowFindings, ...]:
    """The counts of each level, the last of which are those that were analysed."""
    flow = flow_findings(observed)
    counted = {counts.level: counts.analysed for counts in flow}
    if flow and counted != {level.level: level.n for level in found.levels}:
        raise MachineError(f"{found.response}: other numbers of values were analysed than were counted")
    return flow


def _analysed(
    study: StudyDefinition, subjects: Sequence[Subject], gaps: list[NotReported]
) -> tuple[ResponseFindings, ...]:
    """The whole analysis of all responses, as planned; what cannot be given is added to `gaps`."""
    anovas = anova_findings(study, subjects, gaps)
    welch, brown_forsythe = _separate_tests(study, subjects, gaps)
    comparisons = comparison_families(study, subjects, gaps)
    equivalence = equivalence_families(study, subjects, gaps)
    spread = spread_findings(study, subjects, gaps)
    responses = []
    for at, subject in enumerate(subjects):
        precision = precision_findings(study, subject, gaps)
        checks, outliers = check_findings(study, subject), outlier_findings(study, subject)
        gaps.extend(_without_single_values(subject, checks, outliers))
        responses.append(
            ResponseFindings(
                response=subject.response,
                unit=subject.unit,
                alpha=study.alpha,
                levels=level_findings(subject, study.design.variances, to_double(study.alpha), gaps),
                anova=anovas[at],
                effect=effect_findings(study, subject, anovas[at], gaps),
                omnibus=study.design.omnibus,
                welch=welch[at],
                brown_forsythe_means=brown_forsythe[at],
                comparisons=comparisons[at],
                equivalence=equivalence[at],
                spread=spread[at],
                checks=checks,
                outliers=outliers,
                precision=precision,
                criteria=criterion_findings(study.criteria, subject, precision, gaps),
            )
        )
    return tuple(responses)


def _without_single_values(
    subject: Subject, checks: Sequence[CheckFindings], outliers: Sequence[OutlierFindings]
) -> Iterator[NotReported]:
    """The checks and outlier tests that could not be made because the single values were not kept."""
    try:
        subject.require_values()
    except NotComputableError as error:
        for check in checks:
            if check.statistic is None:
                yield subject.unreported(f"check: {check.name}", error)
        for test in outliers:
            if test.statistic is None:
                yield subject.unreported(f"outlier test: {test.test}", error)


def _separate_tests(
    study: StudyDefinition, subjects: Sequence[Subject], gaps: list[NotReported]
) -> tuple[Sequence[WelchFindings | None], Sequence[BrownForsytheMeansFindings | None]]:
    """The tests of equal means that belong to separate variances; none with a pooled one."""
    if study.design.variances == "pooled":
        return [None] * len(subjects), [None] * len(subjects)
    return welch_findings(study, subjects, gaps), brown_forsythe_findings(study, subjects, gaps)


def _in_order(gaps: list[NotReported], subjects: Sequence[Subject]) -> tuple[NotReported, ...]:
    """What is not reported, response by response."""
    place = {subject.response: at for at, subject in enumerate(subjects)}
    return tuple(sorted(gaps, key=lambda gap: place.get(gap.response or "", len(place))))
