"""Applying the plan to the observations: the one place where a study meets statistics.

No file, clock or environment is read. A plan that cannot be applied to these observations at all is a
DataError; a part that was asked for and cannot be given is a finding with its reason.
"""

from assayfolio.exact import Decimal10, ExactSums, Root, round_significant, to_double
from assayfolio.findings import (
    DIFFERENCE_NOT_SHOWN,
    DIFFERENCE_SHOWN,
    NOT_ASSESSABLE,
    AnovaFindings,
    CheckFindings,
    ComparisonFamily,
    ComparisonRow,
    Findings,
    LevelFindings,
    NotReported,
    ResponseFindings,
    Source,
)
from assayfolio.fit import check_fit
from assayfolio.observations.values import Observations
from assayfolio.statistics.adjustment import stated
from assayfolio.statistics.checks import brown_forsythe_variances, residuals, shapiro_wilk
from assayfolio.statistics.comparisons import (
    TWO_SIDED,
    ComparisonResult,
    compare,
    compare_tukey_kramer,
    contrast_estimate,
    pair_estimates,
    reference_estimates,
)
from assayfolio.statistics.inference import mean_interval, omnibus_test, sd_interval
from assayfolio.statistics.oneway import LevelSummary, NotComputableError, OneWay, one_way
from assayfolio.study.plan import AllPairs, Comparison, Contrast, StudyDefinition

BROWN_FORSYTHE = "Brown-Forsythe test of equal variances"
SHAPIRO_WILK = "Shapiro-Wilk test on residuals"

Groups = tuple[tuple[str, tuple[Decimal10, ...]], ...]


def evaluate(study: StudyDefinition, observations: Observations) -> Findings:
    """The findings of `study` on `observations`.

    Raises DataError where the plan cannot be applied to them at all (see `check_fit`).
    """
    check_fit(study, observations)
    groups = _groups(observations)
    analysis = one_way([(level, ExactSums.of(values)) for level, values in groups])
    not_reported: list[NotReported] = []
    alpha = to_double(study.alpha)
    response = ResponseFindings(
        response=observations.response,
        unit=study.data.unit,
        alpha=study.alpha,
        levels=tuple(
            _level(analysis, level, values, alpha)
            for level, (_, values) in zip(analysis.levels, groups, strict=True)
        ),
        anova=_anova(analysis, alpha, not_reported),
        comparisons=_comparisons(study, analysis, alpha, not_reported),
        checks=_checks(study, groups, alpha),
    )
    return Findings(study.study, (response,), tuple(not_reported))


def _groups(observations: Observations) -> Groups:
    values: dict[str, list[Decimal10]] = {level: [] for level in observations.levels}
    for row in observations.rows:
        values[row.level].append(row.value)
    return tuple((level, tuple(listed)) for level, listed in values.items())


def _level(
    analysis: OneWay, level: LevelSummary, values: tuple[Decimal10, ...], alpha: float
) -> LevelFindings:
    fractions = [value.fraction for value in values]
    return LevelFindings(
        level=level.level,
        n=level.n,
        mean=level.mean,
        sd=level.sd,
        sd_ci=sd_interval(level, alpha),
        minimum=min(fractions),
        maximum=max(fractions),
        ci=mean_interval(analysis, level, alpha) if analysis.ss_within else None,
        sums=level.sums,
    )


def _anova(analysis: OneWay, alpha: float, not_reported: list[NotReported]) -> AnovaFindings:
    try:
        test = omnibus_test(analysis, alpha)
    except NotComputableError as error:
        test = None
        not_reported.append(_no_omnibus_test(analysis, str(error)))
    tail = None if test is None else stated(test.tail)
    return AnovaFindings(
        between=Source(analysis.ss_between, analysis.df_between, analysis.ms_between),
        within=Source(analysis.ss_within, analysis.df_within, analysis.ms_within),
        total=Source(analysis.ss_total, analysis.n_total - 1, None),
        residual_sd=Root.of(analysis.ms_within),
        r_squared=analysis.r_squared,
        f=None if test is None else analysis.f,
        p=None if tail is None else tail.p,
        log10_p=None if tail is None else tail.log10_p,
        f_critical=None if test is None else round_significant(test.f_critical),
        verdict=NOT_ASSESSABLE if tail is None else _verdict(tail.p, alpha),
    )


def _no_omnibus_test(analysis: OneWay, reason: str) -> NotReported:
    if analysis.ss_within:
        return NotReported("F test", reason)
    equal = "all values are equal" if not analysis.ss_between else "the values do not vary within any level"
    return NotReported(
        "F test and intervals for means",
        f"{equal}, so there is no error with which to compare the means; "
        "look at the resolution and the recording of the data",
    )


def _verdict(p: float, alpha: float) -> str:
    return DIFFERENCE_SHOWN if p <= alpha else DIFFERENCE_NOT_SHOWN


def _comparisons(
    study: StudyDefinition, analysis: OneWay, alpha: float, not_reported: list[NotReported]
) -> tuple[ComparisonFamily, ...]:
    families = []
    for plan in study.comparisons:
        try:
            families.append(_family(plan, analysis, alpha))
        except NotComputableError as error:
            not_reported.append(NotReported(f"comparison: {plan.name}", str(error)))
    return tuple(families)


def _family(plan: Comparison, analysis: OneWay, alpha: float) -> ComparisonFamily:
    alternative = TWO_SIDED if isinstance(plan, AllPairs) else plan.alternative
    if isinstance(plan, AllPairs):
        estimates = pair_estimates(analysis)
    elif isinstance(plan, Contrast):
        estimates = (contrast_estimate(analysis, plan.name, dict(plan.weights)),)
    else:
        estimates = reference_estimates(analysis, plan.against)
    if plan.adjust == "tukey-kramer":
        results = compare_tukey_kramer(analysis, estimates, alpha)
    else:
        results = compare(analysis, estimates, plan.adjust, alternative, alpha)
    return ComparisonFamily(
        name=plan.name,
        adjust=plan.adjust,
        alternative=alternative,
        registered=False,
        family_size=len(results),
        rows=tuple(_row(result, alpha) for result in results),
    )


def _row(result: ComparisonResult, alpha: float) -> ComparisonRow:
    adjusted = stated(result.adjusted)
    return ComparisonRow(
        label=result.label,
        estimate=result.estimate,
        se=result.se,
        df=result.df,
        statistic=result.statistic,
        p=round_significant(result.tail.p),
        p_adjusted=adjusted.p,
        log10_p_adjusted=adjusted.log10_p,
        ci=result.interval,
        verdict=_verdict(adjusted.p, alpha),
    )


def _checks(study: StudyDefinition, groups: Groups, alpha: float) -> tuple[CheckFindings, ...]:
    found = []
    if study.checks.equal_variances == "brown-forsythe":
        found.append(_equal_variances(groups, alpha))
    if study.checks.normality == "shapiro-wilk":
        found.append(_normality(groups, alpha))
    return tuple(found)


def _equal_variances(groups: Groups, alpha: float) -> CheckFindings:
    try:
        check = brown_forsythe_variances(groups)
    except NotComputableError as error:
        return CheckFindings(BROWN_FORSYTHE, None, None, None, f"{NOT_ASSESSABLE}: {error}")
    p = round_significant(check.tail.p)
    note = _note(p, alpha, "unequal variances")
    return CheckFindings(BROWN_FORSYTHE, check.f, check.df, p, note)


def _normality(groups: Groups, alpha: float) -> CheckFindings:
    try:
        check = shapiro_wilk(residuals(groups))
    except NotComputableError as error:
        return CheckFindings(SHAPIRO_WILK, None, None, None, f"{NOT_ASSESSABLE}: {error}")
    p = round_significant(check.p)
    note = _note(p, alpha, "a departure of the residuals from normality")
    return CheckFindings(SHAPIRO_WILK, round_significant(check.w), None, p, note)


def _note(p: float, alpha: float, departure: str) -> str:
    shown = f"the data show {departure}" if p <= alpha else f"the data do not show {departure}"
    return f"{shown} at level {alpha}; the check informs and does not choose the analysis"
