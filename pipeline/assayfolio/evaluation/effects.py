"""Effect sizes, for fixed levels with one variance: wherever the F test could be given."""

from assayfolio.evaluation.subject import Subject
from assayfolio.exact import to_double
from assayfolio.findings import AnovaFindings, EffectFindings, NotReported
from assayfolio.statistics.effects import effect_sizes
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.study.plan import StudyDefinition


def effect_findings(
    study: StudyDefinition, subject: Subject, anova: AnovaFindings, not_reported: list[NotReported]
) -> EffectFindings | None:
    """The effect sizes of one response, the interval at 1 - alpha.

    None for random levels, without F, and with separate variances: all of them rest on the pooled one.
    """
    design = study.design
    if design.effects == "random" or design.variances == "separate" or anova.f is None:
        return None
    confidence = 1 - study.alpha
    try:
        sizes = effect_sizes(subject.analysis, to_double(confidence))
    except NotComputableError as error:
        not_reported.append(subject.unreported("effect sizes", error))
        return None
    return EffectFindings(
        eta_squared=sizes.eta_squared,
        omega_squared=sizes.omega_squared,
        epsilon_squared=sizes.epsilon_squared,
        cohen_f=sizes.cohen_f,
        cohen_f_ci=sizes.cohen_f_ci,
        confidence=confidence,
    )
