"""The plan of a study as typed, frozen values: what a study definition says, no more.

Field names follow the keys of the study definition. A value that the definition leaves out is None or
empty; nothing is filled in from elsewhere.
"""

from dataclasses import dataclass
from fractions import Fraction
from typing import Literal

from assayfolio.errors import Place
from assayfolio.exact import NotADecimalError, parse_decimal
from assayfolio.study.laboratory import Laboratory as Laboratory
from assayfolio.study.laboratory import Person as Person
from assayfolio.study.trend_plan import TrendPlan as TrendPlan

Adjustment = Literal[
    "none",
    "bonferroni",
    "sidak",
    "holm",
    "hochberg",
    "scheffe",
    "tukey-kramer",
    "games-howell",
    "dunnett",
    "dunnett-step-down",
]
Alternative = Literal["two-sided", "greater", "less"]
Omnibus = Literal["f", "welch", "brown-forsythe"]
AcrossResponses = Literal["none", "bonferroni", "holm"]
VarianceCheck = Literal["brown-forsythe", "levene", "bartlett", "cochran"]
NormalityCheck = Literal["shapiro-wilk", "anderson-darling"]
OutlierTest = Literal["grubbs", "grubbs-double", "cochran"]
Encoding = Literal["utf-8", "utf-16", "windows-1252", "iso-8859-1", "iso-8859-15"]
MeasurementKey = Literal[
    "measurand",
    "method",
    "method-version",
    "item",
    "lot",
    "instrument",
    "operator",
    "measured-at",
    "supplied-by",
]
Quantity = Literal[
    "repeatability-sd",
    "repeatability-rsd",
    "repeatability-limit",
    "between-sd",
    "between-rsd",
    "total-sd",
    "total-rsd",
    "largest-difference",
    "largest-difference-percent",
    "level-mean",
    "level-sd",
    "level-rsd",
]
PrecisionConditions = Literal["intermediate-precision", "reproducibility"]


@dataclass(frozen=True, slots=True)
class DataPlan:
    """`data:` - where the values stand and what they are.

    `unit` holds for every response; `units` are those given response by response. `order` names the column
    with the measuring order.

    `file` is the one raw data file, or the first name or pattern of `files`. `header_row` is the row of the
    column names; rows above it are kept in the record. With the layout "wide" every level has a column of its
    own, named by the level. `unit_column` names the column with each value's unit; `convert` gives exact
    factors from other units to the plan's. `missing_codes` are entries that stand for a missing value,
    `limit_codes` entries that stand for a value below the limit beside them. Rows of one level with the same
    entry in the column `replicate_unit` are repeats of one replicate and are averaged. `exclusions` is the
    file that names rows to be left out, with reasons.
    """

    file: str
    response: tuple[str, ...]
    factor: str
    files: tuple[str, ...] = ()
    encoding: Encoding = "utf-8"
    sheet: str | None = None
    header_row: int = 1
    layout: Literal["long", "wide"] = "long"
    unit: str | None = None
    units: tuple[tuple[str, str], ...] = ()
    unit_column: str | None = None
    convert: tuple[tuple[str, Fraction], ...] = ()
    order: str | None = None
    levels: tuple[str, ...] | None = None
    replicates: int | tuple[tuple[str, int], ...] | None = None
    missing: Literal["refuse", "omit"] = "refuse"
    missing_codes: tuple[str, ...] = ()
    below_limit: Literal["refuse", "omit", "half-limit", "limit"] = "refuse"
    limit_codes: tuple[tuple[str, Fraction], ...] = ()
    above_limit: Literal["refuse", "omit", "limit"] = "refuse"
    decimal_mark: Literal["point", "comma"] = "point"
    replicate_unit: str | None = None
    exclusions: str | None = None

    @property
    def sources(self) -> tuple[str, ...]:
        """The names or patterns of the raw data files, in the order of the plan."""
        return self.files or (self.file,)

    def unit_of(self, response: str) -> str | None:
        """The unit of one response, or None where the plan does not say."""
        return dict(self.units).get(response, self.unit)

    def planned_replicates(self, level: str) -> int | None:
        """How many values the plan wants at `level`, or None where it does not say."""
        if self.replicates is None or isinstance(self.replicates, int):
            return self.replicates
        return dict(self.replicates).get(level)


@dataclass(frozen=True, slots=True)
class DesignPlan:
    """`design:` - how the levels were chosen, whether they share one variance, and the planned overall test.

    `across_responses` is how p-values are adjusted for the number of responses.
    """

    effects: Literal["fixed", "random"] = "fixed"
    variances: Literal["pooled", "separate"] = "pooled"
    omnibus: Omnibus = "f"
    across_responses: AcrossResponses = "none"


@dataclass(frozen=True, slots=True)
class AllPairs:
    """A family of comparisons: every pair of levels."""

    name: str
    adjust: Adjustment
    place: Place


@dataclass(frozen=True, slots=True)
class AgainstReference:
    """A family of comparisons: every other level minus the reference."""

    name: str
    against: str
    adjust: Adjustment
    alternative: Alternative
    place: Place


@dataclass(frozen=True, slots=True)
class Contrast:
    """One comparison: a weighted sum of level means; the weights sum to zero."""

    name: str
    weights: tuple[tuple[str, Fraction], ...]
    adjust: Adjustment
    alternative: Alternative
    place: Place


@dataclass(frozen=True, slots=True)
class WeightedSum:
    """One contrast of a family of several: its name, and weights that sum to zero."""

    name: str
    weights: tuple[tuple[str, Fraction], ...]


@dataclass(frozen=True, slots=True)
class ContrastFamily:
    """A family of several contrasts with one error rate."""

    name: str
    contrasts: tuple[WeightedSum, ...]
    adjust: Adjustment
    alternative: Alternative
    place: Place


@dataclass(frozen=True, slots=True)
class Trend:
    """Orthogonal polynomial contrasts over numeric levels, linear first, up to `degree`.

    `scores` gives the number of each level; empty where the names of the levels are the numbers.
    """

    name: str
    degree: int
    scores: tuple[tuple[str, Fraction], ...]
    adjust: Adjustment
    alternative: Alternative
    place: Place

    def score_of(self, level: str) -> Fraction:
        """The number of a level. Raises KeyError where it has none."""
        if self.scores:
            return dict(self.scores)[level]
        try:
            return parse_decimal(level).fraction
        except NotADecimalError:
            raise KeyError(level) from None


Comparison = AllPairs | AgainstReference | Contrast | ContrastFamily | Trend


@dataclass(frozen=True, slots=True)
class EquivalencePlan:
    """One entry of `equivalence:` - two one-sided tests, or one of them for non-inferiority.

    `lower` and `upper` are the limits of the difference in units of the response, `lower_percent` and
    `upper_percent` in percent of the reference mean; exactly one kind is given. A limit that is None leaves
    that side open (non-inferiority). `response` names the one response it is about, where it is not all.
    """

    name: str
    against: str | None
    pairs: Literal["all"] | None
    lower: Fraction | None
    upper: Fraction | None
    lower_percent: Fraction | None
    upper_percent: Fraction | None
    margin_source: str | None
    adjust: Literal["none", "bonferroni", "holm"]
    alpha: Fraction | None
    response: str | None
    place: Place

    @property
    def percent(self) -> bool:
        """Whether the margins are in percent of the reference mean."""
        return self.lower_percent is not None or self.upper_percent is not None

    @property
    def non_inferiority(self) -> bool:
        """Whether one side is left open."""
        limits = (self.lower, self.upper, self.lower_percent, self.upper_percent)
        return sum(limit is not None for limit in limits) == 1


@dataclass(frozen=True, slots=True)
class SpreadPlan:
    """`spread:` - the variance of each level against that of a reference."""

    against: str
    adjust: Literal["none", "bonferroni", "holm"]
    place: Place


@dataclass(frozen=True, slots=True)
class OutlierPlan:
    """`outliers:` - which tests propose values or levels for investigation; nothing is removed."""

    tests: tuple[OutlierTest, ...]
    place: Place


@dataclass(frozen=True, slots=True)
class ChecksPlan:
    """`checks:` - checks that inform and never choose the analysis."""

    equal_variances: tuple[VarianceCheck, ...] = ()
    normality: tuple[NormalityCheck, ...] = ()


@dataclass(frozen=True, slots=True)
class PrecisionPlan:
    """`precision:` - estimates of repeatability and of the spread between levels.

    `varied` says in words what changed from level to level, `conditions` what the total is therefore called;
    None where the plan does not say.
    """

    estimate: bool
    confidence: Fraction
    varied: str | None
    conditions: PrecisionConditions | None
    place: Place


@dataclass(frozen=True, slots=True)
class PowerPlan:
    """`power:` - what the plan has to be able to show.

    Two extreme levels differ by `difference`, the rest lie midway; every other level differs from a reference
    by it; a contrast has it as its value. `true_difference` is what equivalence is computed at. `allocation`
    is how the sample sizes that are looked for divide among the levels. `response` names the one response
    that difference and sigma are about, where the study has several.
    """

    difference: Fraction
    sigma: Fraction
    target: Fraction
    true_difference: Fraction
    allocation: Literal["equal", "control"]
    response: str | None
    place: Place


@dataclass(frozen=True, slots=True)
class Criterion:
    """One entry of `criteria:` - a limit that was set in advance.

    `level` names the level a criterion on one level is about; `response` as in EquivalencePlan.
    """

    quantity: Quantity
    at_most: Fraction | None
    at_least: Fraction | None
    unit: str | None
    level: str | None
    response: str | None
    place: Place


@dataclass(frozen=True, slots=True)
class SignOff:
    """One entry of `sign-off:` - who has to sign, and what the signature means."""

    role: Literal["author", "reviewer", "approver"]
    meaning: str


@dataclass(frozen=True, slots=True)
class MeasurementFact:
    """One entry of `measurement:` - a fact about the measurements: one text, or a column of the data file."""

    key: MeasurementKey
    text: str | None
    column: str | None


@dataclass(frozen=True, slots=True)
class WorksheetPlan:
    """`worksheet:` - how the measuring order is drawn.

    `seed` starts the shuffle; `block` is what the order is blocked by (day, operator), None for a complete
    shuffle; `blocks` are the names of the blocks, each of which gets an equal share of every level;
    `item` is how items are labelled.
    """

    seed: int
    block: str | None
    blocks: tuple[str, ...]
    item: str | None
    place: Place


@dataclass(frozen=True, slots=True)
class StudyDefinition:
    """A whole study definition.

    `places` gives the place of each key that is present: the top-level keys, and under their full names
    (`data.levels`) those inside `data`, `measurement`, `design` and `checks`; in the order of the file.
    """

    study: str
    title: str
    purpose: str | None
    data: DataPlan
    design: DesignPlan
    alpha: Fraction
    comparisons: tuple[Comparison, ...]
    equivalence: tuple[EquivalencePlan, ...]
    spread: SpreadPlan | None
    outliers: OutlierPlan | None
    checks: ChecksPlan
    precision: PrecisionPlan | None
    power: PowerPlan | None
    criteria: tuple[Criterion, ...]
    sign_off: tuple[SignOff, ...]
    places: tuple[tuple[str, Place], ...]
    measurement: tuple[MeasurementFact, ...] = ()
    worksheet: WorksheetPlan | None = None
    trend: TrendPlan | None = None

    def place_of(self, key: str) -> Place | None:
        """Where `key` stands (`alpha`, `data.levels`), or None where it is absent."""
        return dict(self.places).get(key)
