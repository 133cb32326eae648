"""The precision of the measurement, as planned: all of it for random levels, repeatability for fixed ones."""

from assayfolio.evaluation.subject import Subject
from assayfolio.exact import to_double
from assayfolio.findings import MeanUncertaintyFindings, NotReported, PrecisionFindings
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.statistics.precision import (
    BETWEEN_LEVELS,
    POOLED,
    MeanUncertainty,
    Precision,
    precision,
    repeatability,
    unavailable,
)
from assayfolio.study.plan import PrecisionPlan, StudyDefinition

PRECISION = "precision"
_TOTAL_NAMES = {
    "intermediate-precision": "intermediate precision",
    "reproducibility": "reproducibility",
    None: "total",
}
MEAN_OF_VALUES = "mean of all values"
_RELATIVE_TO = {BETWEEN_LEVELS: "mean of the level means", POOLED: MEAN_OF_VALUES}


def precision_findings(
    study: StudyDefinition, subject: Subject, not_reported: list[NotReported]
) -> PrecisionFindings | None:
    """The precision of one response; None where it is not planned or, with its reason, cannot be given."""
    plan = study.precision
    if plan is None or not plan.estimate:
        return None
    if study.design.effects == "fixed":
        return _repeatability(plan, subject, not_reported)
    try:
        found = precision(subject.analysis, plan.confidence)
    except NotComputableError as error:
        not_reported.append(subject.unreported(PRECISION, error))
        return None
    not_reported.extend(
        subject.unreported(f"{PRECISION}: {what}", reason) for what, reason in unavailable(found)
    )
    return _precision(plan, found)


def _repeatability(
    plan: PrecisionPlan, subject: Subject, not_reported: list[NotReported]
) -> PrecisionFindings:
    found = repeatability(subject.analysis, plan.confidence)
    if found.interval is None:
        reason = "nothing varies within the levels"
        what = f"{PRECISION}: interval of the repeatability standard deviation"
        not_reported.append(subject.unreported(what, reason))
    if found.relative_percent is None:
        what = f"{PRECISION}: relative standard deviation"
        not_reported.append(subject.unreported(what, "the mean of all values is zero"))
    return PrecisionFindings(
        confidence=plan.confidence,
        varied=plan.varied,
        repeatability_sd=found.sd,
        repeatability_sd_ci=found.interval,
        repeatability_rsd=found.relative_percent,
        repeatability_limit=found.limit,
        relative_mean=subject.analysis.grand_mean,
        relative_to=MEAN_OF_VALUES,
    )


def _precision(plan: PrecisionPlan, found: Precision) -> PrecisionFindings:
    total, mean = found.total, found.mean
    return PrecisionFindings(
        confidence=plan.confidence,
        varied=plan.varied,
        repeatability_sd=found.repeatability.sd,
        repeatability_sd_ci=found.repeatability.interval,
        repeatability_rsd=found.repeatability.relative_percent,
        repeatability_limit=found.repeatability.limit,
        total_name=_TOTAL_NAMES[plan.conditions],
        between_sd=found.between.sd,
        between_variance_raw=found.between.raw_variance,
        between_rsd=found.between.relative_percent,
        total_sd=total.sd,
        total_sd_ci=total.interval,
        total_sd_ci_satterthwaite=total.satterthwaite_interval,
        total_df=None if total.df is None else to_double(total.df),
        total_rsd=total.relative_percent,
        total_limit=total.limit,
        interval_method=_interval_method(found),
        n0=found.n0,
        icc=found.icc,
        icc_ci=found.icc_interval,
        icc_method="F" if found.balanced else "Wald",
        mean=mean.mean,
        mean_u=mean.u,
        mean_df=mean.df,
        mean_method=mean.way,
        mean_ci=mean.interval,
        mean_ways=tuple(_way(way) for way in found.mean_ways),
        relative_mean=mean.mean,
        relative_to=_RELATIVE_TO[mean.way],
        between_sd_ci=found.between.interval,
        between_interval_method=None if found.between.interval is None else _between_method(found),
    )


def _interval_method(found: Precision) -> str:
    method = "modified large sample (Graybill-Wang)"
    return method if found.balanced else f"{method}, n0 in the place of n"


def _between_method(found: Precision) -> str:
    method = "Williams-Tukey"
    return (
        method if found.balanced else f"{method} on unweighted means, harmonic mean of n (Thomas-Hultquist)"
    )


def _way(way: MeanUncertainty) -> MeanUncertaintyFindings:
    return MeanUncertaintyFindings(way.way, way.mean, way.u, way.df, way.interval)
