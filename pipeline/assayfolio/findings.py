"""The findings of a run as typed values; `findings_document` turns them into `findings.json`.

Quantities that are rational, or the square root of a rational, stay exact here (`Fraction`, `Root`) and
become the correctly rounded double in the document. Quantities through a distribution function are floats
already rounded to 12 significant digits.
"""

from dataclasses import dataclass
from fractions import Fraction

from assayfolio.exact import Exact, ExactSums, Root
from assayfolio.findings_intake import CensoringFindings, Deviation, ExclusionFindings, FlowFindings

DIFFERENCE_SHOWN = "difference shown"
DIFFERENCE_NOT_SHOWN = "difference not shown"
EQUIVALENCE_SHOWN = "equivalence shown"
EQUIVALENCE_NOT_SHOWN = "equivalence not shown"
NON_INFERIORITY_SHOWN = "non-inferiority shown"
NON_INFERIORITY_NOT_SHOWN = "non-inferiority not shown"
CRITERION_MET = "criterion met"
CRITERION_NOT_MET = "criterion not met"
NOT_ASSESSABLE = "not assessable"
OUTLIER = "outlier"
STRAGGLER = "straggler"
NEITHER = "neither straggler nor outlier"

Interval = tuple[float | None, float | None]


@dataclass(frozen=True, slots=True)
class LevelFindings:
    """One level: n, mean, standard deviation and their intervals.

    The interval of the mean uses the error that the plan names: pooled, on N - k degrees of freedom, or the
    level's own on n - 1. `sd_ci` is the chi-square interval of this level's own standard deviation with n - 1
    degrees of freedom. `sd` and `sd_ci` are None where n = 1, `sd_ci` also where all values of the level are
    equal; `ci` is None where inference is not reported. These intervals are at 1 - alpha each, whatever
    adjustment over several responses is planned.
    """

    level: str
    n: int
    mean: Fraction
    sd: Root | None
    sd_ci: Interval | None
    minimum: Fraction
    maximum: Fraction
    ci: Interval | None
    sums: ExactSums


@dataclass(frozen=True, slots=True)
class Source:
    """One source of variation: sum of squares, degrees of freedom, mean square (None where df = 0)."""

    ss: Fraction
    df: int
    ms: Fraction | None


@dataclass(frozen=True, slots=True)
class AnovaFindings:
    """The analysis of variance with its F test.

    `f` and what follows from it are None where inference is not reported. `p_adjusted` is p adjusted for the
    number of responses, p itself where no such adjustment is planned; the verdict follows it. `f_critical` is
    at the level that one response is tested at, and None with Holm over the responses, which has no such
    level.
    """

    between: Source
    within: Source
    total: Source
    residual_sd: Root | None
    r_squared: Fraction | None
    f: Fraction | None
    p: float | None
    log10_p: float | None
    p_adjusted: float | None
    f_critical: float | None
    verdict: str


@dataclass(frozen=True, slots=True)
class WelchFindings:
    """Welch's test of equal means with a variance for each level."""

    f: Fraction
    df1: int
    df2: Fraction
    p: float
    log10_p: float
    p_adjusted: float
    verdict: str


@dataclass(frozen=True, slots=True)
class BrownForsytheMeansFindings:
    """The Brown-Forsythe test of equal means (F*), with its own and with Mehrotra's first degrees of freedom.

    The verdict follows the test as published by Brown and Forsythe, on k - 1.
    """

    f: Fraction
    df1: int
    df2: Fraction
    p: float
    log10_p: float
    p_adjusted: float
    df1_mehrotra: Fraction
    p_mehrotra: float
    verdict: str


@dataclass(frozen=True, slots=True)
class EffectFindings:
    """Effect sizes, with the interval of Cohen's f at `confidence`; None where it cannot be given."""

    eta_squared: Fraction
    omega_squared: Fraction
    epsilon_squared: Fraction
    cohen_f: Root | None
    cohen_f_ci: Interval | None
    confidence: Fraction


@dataclass(frozen=True, slots=True)
class ComparisonRow:
    """One comparison. `ci` is None where the method has no interval; an open end is None.

    `critical` is what `se` is multiplied by for the interval, None with it.

    `df` is a whole number with the pooled error, Welch-Satterthwaite's number with separate variances.
    """

    label: str
    estimate: Fraction
    se: Root
    df: int | float
    statistic: Exact
    p: float
    p_adjusted: float
    log10_p_adjusted: float
    ci: Interval | None
    verdict: str
    critical: float | None = None


@dataclass(frozen=True, slots=True)
class ComparisonFamily:
    """A family of comparisons with its own error rate.

    `kind` is pairs, against, contrast, contrasts or trend, `against` the reference of the second kind;
    `method` the standard name of the procedure. `family_size` is the number of planned rows: those that
    cannot be given stand in what is not reported and count as p = 1 in the adjustment. `critical` is what the
    standard errors are multiplied by for the intervals; None without intervals, and with separate variances,
    where each row has its own.
    `responses` is over how many responses the family is adjusted as well, `across_responses` how: none,
    bonferroni or holm.
    """

    name: str
    kind: str
    adjust: str
    method: str
    alternative: str
    registered: bool
    family_size: int
    responses: int
    rows: tuple[ComparisonRow, ...]
    across_responses: str = "none"
    against: str | None = None
    critical: float | None = None


@dataclass(frozen=True, slots=True)
class BoundaryFindings:
    """The one-sided test against one margin, so that it can be recomputed: p is its unadjusted tail.

    `t` is positive above the lower margin, negative below the upper one; `se` and `df` are those of the test.
    With a percent margin m, t is that of mean_X - (1 + m/100) mean_R in the unit of the response, its sign
    turned where mean_R is negative.
    """

    margin: Fraction
    t: Root
    se: Root
    df: int | float
    p: float


@dataclass(frozen=True, slots=True)
class EquivalenceRow:
    """One pair: two one-sided tests, or one of them for non-inferiority (the other p is None).

    With percent margins estimate and interval are 100 (mean_X / mean_R - 1), and `se` and `df` are None.
    `t_lower` and `t_upper` are the statistics of the tests, `boundaries` the tests in full, lower margin
    first; `critical` is what `se` is multiplied by for the interval, None with percent margins.
    """

    label: str
    estimate: Fraction
    se: Root | None
    df: int | float | None
    ci: Interval
    p_lower: float | None
    p_upper: float | None
    p: float
    p_adjusted: float
    log10_p_adjusted: float
    verdict: str
    t_lower: Root | None = None
    t_upper: Root | None = None
    boundaries: tuple[BoundaryFindings, ...] = ()
    critical: float | None = None


@dataclass(frozen=True, slots=True)
class EquivalenceFamily:
    """A family of equivalence or non-inferiority tests.

    `claim` is equivalence or non-inferiority, `scale` units or percent (of the reference mean): that of
    `lower` and `upper`, None where that side is open. `against` is the reference, None for all pairs. `alpha`
    is the level of each one-sided test; `family_size`, `critical`, `responses` and `across_responses` as in
    ComparisonFamily.
    """

    name: str
    claim: str
    scale: str
    lower: Fraction | None
    upper: Fraction | None
    margin_source: str | None
    adjust: str
    method: str
    alpha: Fraction
    registered: bool
    family_size: int
    responses: int
    rows: tuple[EquivalenceRow, ...]
    across_responses: str = "none"
    against: str | None = None
    critical: float | None = None


@dataclass(frozen=True, slots=True)
class SpreadRow:
    """The variance of one level divided by that of the reference."""

    label: str
    ratio: Fraction
    df: tuple[int, int]
    p: float
    p_adjusted: float
    ci: Interval | None
    verdict: str


@dataclass(frozen=True, slots=True)
class SpreadFindings:
    """Variance ratios against the reference; `responses` and `across_responses` as in ComparisonFamily."""

    against: str
    adjust: str
    method: str
    rows: tuple[SpreadRow, ...]
    responses: int = 1
    across_responses: str = "none"


@dataclass(frozen=True, slots=True)
class CheckFindings:
    """A check that informs and never chooses: statistic, degrees of freedom, p, and a note.

    `statistic` and `p` are None where the check is not assessable; the note then says why.
    """

    name: str
    statistic: Exact | float | None
    df: tuple[int | float, ...] | None
    p: float | None
    note: str


@dataclass(frozen=True, slots=True)
class OutlierFindings:
    """One outlier test: what it proposes to look into; nothing is removed.

    `test` is the word of the plan, `about` what it tests: values (of one level), variance (of one level among
    the others), or level means. `levels` are the levels concerned: that of the values or the variance, those
    whose means are in question. `level` is the single one, empty for means and where a test of the variances
    is not assessable. `lines` and `values` are the values in question with their lines in the data file (that
    of the first repeat for a mean), empty unless `about` is values; `files` names the file of each where the
    study has several. `p` is a bound, never too small. Statistic, limits and p are None where the test is not
    assessable, and `note` says why; where only the resolution stands in the way, `lines` and `values` (or
    `levels`) still name what would have been tested.
    """

    test: str
    level: str
    lines: tuple[int, ...]
    values: tuple[Fraction, ...]
    statistic: Exact | float | None
    straggler_limit: float | None
    outlier_limit: float | None
    verdict: str
    note: str
    p: float | None = None
    files: tuple[str, ...] = ()
    about: str = "values"
    levels: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class MeanUncertaintyFindings:
    """A mean with its standard uncertainty and interval, one of the two ways of GUM H.5.

    `way` is "between levels" or "pooled"; `ci` is None where the uncertainty is zero.
    """

    way: str
    mean: Fraction
    u: Root
    df: int
    ci: Interval | None


@dataclass(frozen=True, slots=True)
class PrecisionFindings:
    """Precision from the one-way layout, intervals at `confidence`.

    With fixed levels only the repeatability part is there and the rest is None. `total_name` says what the
    total is called: intermediate precision, reproducibility, or total. Limits for two values are exactly 2.8
    standard deviations (2.8 s). Relative quantities are in percent of the absolute `relative_mean`, and
    `relative_to` says which mean that is; they are None where it is zero. It is `mean` wherever that is
    stated. `interval_method` names how `total_sd_ci` was formed, `total_sd_ci_satterthwaite` is the second
    way, on `total_df`; `between_interval_method` how `between_sd_ci` was. With unequal n that rests on the
    level means without weights, and may then leave out `between_sd`. `mean` and what follows are the one to
    state of `mean_ways`.
    """

    confidence: Fraction
    varied: str | None
    repeatability_sd: Root
    repeatability_sd_ci: Interval | None
    repeatability_rsd: Root | None
    repeatability_limit: Root
    total_name: str | None = None
    between_sd: Root | None = None
    between_variance_raw: Fraction | None = None
    between_rsd: Root | None = None
    total_sd: Root | None = None
    total_sd_ci: Interval | None = None
    total_sd_ci_satterthwaite: Interval | None = None
    total_df: float | None = None
    total_rsd: Root | None = None
    total_limit: Root | None = None
    interval_method: str | None = None
    n0: Fraction | None = None
    icc: Fraction | None = None
    icc_ci: Interval | None = None
    icc_method: str | None = None
    mean: Fraction | None = None
    mean_u: Root | None = None
    mean_df: float | None = None
    mean_method: str | None = None
    mean_ci: Interval | None = None
    mean_ways: tuple[MeanUncertaintyFindings, ...] = ()
    relative_mean: Fraction | None = None
    relative_to: str | None = None
    between_sd_ci: Interval | None = None
    between_interval_method: str | None = None


@dataclass(frozen=True, slots=True)
class CriterionFindings:
    """One limit set in advance: `relation` is "at most" or "at least"; compared on the exact value.

    The value of `repeatability-limit` is exactly 2.8 s, s the repeatability standard deviation.
    """

    quantity: str
    level: str | None
    value: Exact | None
    relation: str
    limit: Fraction
    unit: str | None
    verdict: str


@dataclass(frozen=True, slots=True)
class PowerRow:
    """One planned test: its power at the planned numbers, and what would reach the target.

    `n_for_target` is by level, None where no number up to the limit of the search reaches it;
    `detectable_difference` the smallest difference with the target power at the planned numbers;
    `half_width` that of the interval where s equals the planning sigma.
    """

    question: str
    method: str
    meaning: str
    power: float
    n_for_target: tuple[int, ...] | None
    detectable_difference: float | None
    half_width: float | None


@dataclass(frozen=True, slots=True)
class PowerFindings:
    """The power of the plan, from the plan alone; never from the data."""

    response: str
    unit: str | None
    levels: tuple[str, ...]
    replicates: tuple[int, ...]
    alpha: Fraction
    difference: Fraction
    sigma: Fraction
    target: Fraction
    true_difference: Fraction
    allocation: str
    rows: tuple[PowerRow, ...]


@dataclass(frozen=True, slots=True)
class NotReported:
    """Something that was asked for and cannot be given, with the reason; `response` where it is about one."""

    what: str
    reason: str
    response: str | None = None


@dataclass(frozen=True, slots=True)
class ResponseFindings:
    """All findings on one response. `comparisons` and `equivalence` keep the order of the plan.

    `omnibus` names the overall test that was planned (f, welch, brown-forsythe), whose verdict answers the
    overall question. `without_exclusions` is the whole analysis as if nothing had been excluded, None where
    nothing was; within it `flow`, `censoring` and itself are absent. `censoring` is None where no value lies
    beyond a limit.
    """

    response: str
    unit: str | None
    alpha: Fraction
    levels: tuple[LevelFindings, ...]
    anova: AnovaFindings
    omnibus: str = "f"
    welch: WelchFindings | None = None
    brown_forsythe_means: BrownForsytheMeansFindings | None = None
    effect: EffectFindings | None = None
    comparisons: tuple[ComparisonFamily, ...] = ()
    equivalence: tuple[EquivalenceFamily, ...] = ()
    spread: SpreadFindings | None = None
    checks: tuple[CheckFindings, ...] = ()
    outliers: tuple[OutlierFindings, ...] = ()
    precision: PrecisionFindings | None = None
    criteria: tuple[CriterionFindings, ...] = ()
    flow: tuple[FlowFindings, ...] = ()
    censoring: CensoringFindings | None = None
    without_exclusions: "ResponseFindings | None" = None

    @property
    def overall_test(self) -> AnovaFindings | WelchFindings | BrownForsytheMeansFindings | None:
        """The overall test that was planned; None where it could not be formed."""
        if self.omnibus == "welch":
            return self.welch
        return self.anova if self.omnibus == "f" else self.brown_forsythe_means

    @property
    def overall_verdict(self) -> str:
        """The answer to the overall question: the verdict of the overall test that was planned."""
        planned = self.overall_test
        return NOT_ASSESSABLE if planned is None else planned.verdict


@dataclass(frozen=True, slots=True)
class Findings:
    """The findings of a study: one entry a response, the power of the plan, what could not be reported.

    `exclusions` are in the order of the responses and of the files.
    """

    study: str
    responses: tuple[ResponseFindings, ...]
    not_reported: tuple[NotReported, ...] = ()
    power: PowerFindings | None = None
    exclusions: tuple[ExclusionFindings, ...] = ()
    deviations: tuple[Deviation, ...] = ()
