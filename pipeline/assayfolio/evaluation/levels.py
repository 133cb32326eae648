"""The levels as findings: description, and intervals with the error that the plan names."""

from fractions import Fraction

from assayfolio.evaluation.subject import Subject
from assayfolio.findings import Interval, LevelFindings, NotReported
from assayfolio.statistics.inference import mean_interval, sd_interval
from assayfolio.statistics.oneway import LevelSummary
from assayfolio.statistics.welch import separate_mean_interval


def level_findings(
    subject: Subject, variances: str, alpha: float, not_reported: list[NotReported]
) -> tuple[LevelFindings, ...]:
    """Every level of `subject`, intervals at 1 - `alpha`; `variances` is pooled or separate."""
    analysis = subject.analysis
    found = []
    for level, extremes in zip(analysis.levels, subject.extremes, strict=True):
        if variances == "separate":
            interval: Interval | None = separate_mean_interval(level, alpha)
        else:
            interval = mean_interval(analysis, level, alpha) if analysis.ss_within else None
        found.append(_level(level, extremes, interval, alpha))
    without = [level.level for level in found if level.ci is None]
    if without and analysis.ss_within:
        reason = "a level's own error needs two or more values that are not all equal"
        not_reported.append(subject.unreported(f"interval for the mean: {', '.join(without)}", reason))
    return tuple(found)


def _level(
    level: LevelSummary, extremes: tuple[Fraction, Fraction], interval: Interval | None, alpha: float
) -> LevelFindings:
    return LevelFindings(
        level=level.level,
        n=level.n,
        mean=level.mean,
        sd=level.sd,
        sd_ci=sd_interval(level, alpha),
        minimum=extremes[0],
        maximum=extremes[1],
        ci=interval,
        sums=level.sums,
    )
