"""The plan of a study as typed, frozen values: what a study definition says, no more.

Field names follow the keys of the study definition. A value that the definition leaves out is None or
empty; nothing is filled in from elsewhere.
"""

from dataclasses import dataclass
from fractions import Fraction
from typing import Literal

from assayfolio.errors import Place

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


@dataclass(frozen=True, slots=True)
class DataPlan:
    """`data:` - where the values stand and what they are."""

    file: str
    response: tuple[str, ...]
    factor: str
    unit: str | None = None
    levels: tuple[str, ...] | None = None
    replicates: int | tuple[tuple[str, int], ...] | None = None
    missing: Literal["refuse", "omit"] = "refuse"
    below_limit: Literal["refuse", "omit", "half-limit", "limit"] = "refuse"
    decimal_mark: Literal["point", "comma"] = "point"

    def planned_replicates(self, level: str) -> int | None:
        """How many values the plan wants at `level`, or None where it does not say."""
        if self.replicates is None or isinstance(self.replicates, int):
            return self.replicates
        return dict(self.replicates).get(level)


@dataclass(frozen=True, slots=True)
class DesignPlan:
    """`design:` - how the levels were chosen and whether they share one variance."""

    effects: Literal["fixed", "random"] = "fixed"
    variances: Literal["pooled", "separate"] = "pooled"


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


Comparison = AllPairs | AgainstReference | Contrast


@dataclass(frozen=True, slots=True)
class EquivalencePlan:
    """One entry of `equivalence:`; margins in units of the response, or in percent of the reference mean."""

    name: str
    against: str | None
    pairs: Literal["all"] | None
    lower: Fraction | None
    upper: Fraction | None
    margin_percent: Fraction | None
    margin_source: str | None
    adjust: Literal["none", "bonferroni", "holm"]
    alpha: Fraction | None
    place: Place


@dataclass(frozen=True, slots=True)
class OutlierPlan:
    """`outliers:` - which test proposes values for investigation."""

    test: Literal["grubbs", "cochran"]
    place: Place


@dataclass(frozen=True, slots=True)
class ChecksPlan:
    """`checks:` - checks that inform and never choose the analysis."""

    equal_variances: Literal["brown-forsythe", "levene", "bartlett", "cochran"] | None = None
    normality: Literal["shapiro-wilk", "anderson-darling"] | None = None


@dataclass(frozen=True, slots=True)
class PrecisionPlan:
    """`precision:` - estimates of repeatability and of the spread between levels."""

    estimate: bool
    confidence: Fraction
    varied: str | None
    place: Place


@dataclass(frozen=True, slots=True)
class PowerPlan:
    """`power:` - two extreme levels differ by `difference`, the rest lie midway."""

    difference: Fraction
    sigma: Fraction
    target: Fraction
    place: Place


@dataclass(frozen=True, slots=True)
class Criterion:
    """One entry of `criteria:` - a limit that was set in advance."""

    quantity: str
    at_most: Fraction | None
    at_least: Fraction | None
    unit: str | None
    place: Place


@dataclass(frozen=True, slots=True)
class SignOff:
    """One entry of `sign-off:` - who has to sign, and what the signature means."""

    role: Literal["author", "reviewer", "approver"]
    meaning: str


@dataclass(frozen=True, slots=True)
class StudyDefinition:
    """A whole study definition.

    `places` gives the place of each key that is present: the top-level keys, and under their full names
    (`data.levels`) those inside `data`, `design` and `checks`; in the order of the file.
    """

    study: str
    title: str
    purpose: str | None
    data: DataPlan
    design: DesignPlan
    alpha: Fraction
    comparisons: tuple[Comparison, ...]
    equivalence: tuple[EquivalencePlan, ...]
    outliers: OutlierPlan | None
    checks: ChecksPlan
    precision: PrecisionPlan | None
    power: PowerPlan | None
    criteria: tuple[Criterion, ...]
    sign_off: tuple[SignOff, ...]
    places: tuple[tuple[str, Place], ...]

    def place_of(self, key: str) -> Place | None:
        """Where `key` stands (`alpha`, `data.levels`), or None where it is absent."""
        return dict(self.places).get(key)


@dataclass(frozen=True, slots=True)
class Laboratory:
    """`lab.yaml` - who issues the reports, how they look, and what every study has to contain."""

    name: str
    address: tuple[str, ...] = ()
    note: str | None = None
    accent: str = "#0f5b66"
    paper: Literal["A4", "Letter"] = "A4"
    require: tuple[str, ...] = ()
    wait_seconds: int = 10
