"""From a plan and its observations to the findings.

No file, clock or environment is read. A plan that cannot be applied to these observations at all is a
DataError; a part that was asked for and cannot be given is a finding with its reason.
"""

from collections.abc import Sequence

from assayfolio.evaluation.checks import check_findings
from assayfolio.evaluation.criteria import criterion_findings
from assayfolio.evaluation.effects import effect_findings
from assayfolio.evaluation.equivalence import equivalence_families
from assayfolio.evaluation.families import comparison_families
from assayfolio.evaluation.levels import level_findings
from assayfolio.evaluation.omnibus import anova_findings, brown_forsythe_findings, welch_findings
from assayfolio.evaluation.outliers import outlier_findings
from assayfolio.evaluation.precision import precision_findings
from assayfolio.evaluation.spread import spread_findings
from assayfolio.evaluation.subject import Subject, subject_of
from assayfolio.exact import to_double
from assayfolio.findings import (
    BrownForsytheMeansFindings,
    Findings,
    NotReported,
    ResponseFindings,
    WelchFindings,
)
from assayfolio.fit import check_fit
from assayfolio.observations.values import Observations
from assayfolio.planning.plan_power import plan_power
from assayfolio.study.plan import StudyDefinition


def evaluate(study: StudyDefinition, observations: tuple[Observations, ...]) -> Findings:
    """The findings of `study` on `observations`, one entry a response, and the power that its plan has.

    Raises DataError where the plan cannot be applied to them at all (see `check_fit`).
    """
    check_fit(study, observations)
    subjects = [subject_of(one, study.data.unit_of(one.response)) for one in observations]
    gaps: list[NotReported] = []
    anovas = anova_findings(study, subjects, gaps)
    welch, brown_forsythe = _separate_tests(study, subjects, gaps)
    comparisons = comparison_families(study, subjects, gaps)
    equivalence = equivalence_families(study, subjects, gaps)
    spread = spread_findings(study, subjects, gaps)
    responses = []
    for at, subject in enumerate(subjects):
        precision = precision_findings(study, subject, gaps)
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
                checks=check_findings(study, subject),
                outliers=outlier_findings(study, subject),
                precision=precision,
                criteria=criterion_findings(study.criteria, subject, precision, gaps),
            )
        )
    power, power_gaps = plan_power(study)
    return Findings(study.study, tuple(responses), (*_in_order(gaps, subjects), *power_gaps), power)


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
