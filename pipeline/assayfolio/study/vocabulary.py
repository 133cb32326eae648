"""The keys and fixed words of a study definition and the files beside it: the one table of each.

The readers, the suggestions for misspelt keys and the published JSON Schema all follow these tables.
"""

from typing import Literal, get_args

from assayfolio.study.plan import (
    AcrossResponses,
    Adjustment,
    Alternative,
    Encoding,
    MeasurementKey,
    NormalityCheck,
    Omnibus,
    OutlierTest,
    PrecisionConditions,
    Quantity,
    VarianceCheck,
)
from assayfolio.study.trend_plan import BASELINE_KEYS as BASELINE_KEYS
from assayfolio.study.trend_plan import CHART_QUANTITIES as CHART_QUANTITIES
from assayfolio.study.trend_plan import RUN_RULES as RUN_RULES
from assayfolio.study.trend_plan import TREND_CRITERION_KEYS as TREND_CRITERION_KEYS
from assayfolio.study.trend_plan import TREND_KEYS as TREND_KEYS

STUDY_KEYS = (
    "study",
    "title",
    "purpose",
    "data",
    "measurement",
    "worksheet",
    "design",
    "alpha",
    "comparisons",
    "equivalence",
    "spread",
    "outliers",
    "checks",
    "precision",
    "power",
    "criteria",
    "trend",
    "sign-off",
)
DATA_KEYS = (
    "file",
    "encoding",
    "sheet",
    "header-row",
    "layout",
    "response",
    "factor",
    "unit",
    "unit-column",
    "convert",
    "order",
    "levels",
    "replicates",
    "replicate-unit",
    "missing",
    "missing-codes",
    "below-limit",
    "limit-codes",
    "above-limit",
    "decimal-mark",
    "exclusions",
)
MEASUREMENT_KEYS: tuple[MeasurementKey, ...] = get_args(MeasurementKey)
FACT_KEYS = ("column",)
WORKSHEET_KEYS = ("seed", "block", "blocks", "item")
DESIGN_KEYS = ("effects", "variances", "omnibus", "across-responses")
COMPARISON_KEYS = (
    "name",
    "against",
    "pairs",
    "weights",
    "contrasts",
    "trend",
    "degree",
    "scores",
    "adjust",
    "alternative",
)
CONTRAST_KEYS = ("name", "weights")
EQUIVALENCE_KEYS = (
    "name",
    "against",
    "pairs",
    "margin",
    "lower",
    "upper",
    "margin-percent",
    "lower-percent",
    "upper-percent",
    "non-inferiority",
    "margin-source",
    "adjust",
    "alpha",
    "response",
)
SPREAD_KEYS = ("against", "adjust")
OUTLIER_KEYS = ("test",)
CHECK_KEYS = ("equal-variances", "normality")
PRECISION_KEYS = ("estimate", "confidence", "varied", "conditions")
POWER_KEYS = ("difference", "sigma", "target", "true-difference", "allocation", "response")
CRITERION_KEYS = ("quantity", "at-most", "at-least", "unit", "level", "response")
SIGN_OFF_KEYS = ("role", "meaning")
EXCLUSION_FILE_KEYS = ("exclusions",)
EXCLUSION_KEYS = ("row", "file", "value", "reason", "decided-by", "decided-at", "approved-by")
LABORATORY_KEYS = (
    "laboratory",
    "address",
    "note",
    "accent",
    "paper",
    "require",
    "wait-seconds",
    "profile",
    "one-person",
    "log-reading",
    "review-before-approval",
    "separation",
    "witnesses",
    "retention",
    "signatures",
)

Layout = Literal["long", "wide"]
Missing = Literal["refuse", "omit"]
BelowLimit = Literal["refuse", "omit", "half-limit", "limit"]
AboveLimit = Literal["refuse", "omit", "limit"]
DecimalMark = Literal["point", "comma"]
Effects = Literal["fixed", "random"]
Variances = Literal["pooled", "separate"]
Pairs = Literal["all"]
TrendKind = Literal["linear", "polynomial"]
EquivalenceAdjustment = Literal["none", "bonferroni", "holm"]
NonInferiority = Literal["not-lower", "not-higher"]
Allocation = Literal["equal", "control"]
Role = Literal["author", "reviewer", "approver"]
Paper = Literal["A4", "Letter"]
Requirement = Literal[
    "unit",
    "order",
    "levels",
    "replicates",
    "measurand",
    "method",
    "method-version",
    "item",
    "lot",
    "instrument",
    "operator",
    "measured-at",
    "supplied-by",
    "purpose",
    "comparisons",
    "equivalence",
    "margin-source",
    "checks",
    "precision",
    "power",
    "sign-off",
]

ENCODINGS: tuple[Encoding, ...] = get_args(Encoding)
LAYOUTS: tuple[Layout, ...] = get_args(Layout)
MISSING: tuple[Missing, ...] = get_args(Missing)
BELOW_LIMIT: tuple[BelowLimit, ...] = get_args(BelowLimit)
ABOVE_LIMIT: tuple[AboveLimit, ...] = get_args(AboveLimit)
DECIMAL_MARKS: tuple[DecimalMark, ...] = get_args(DecimalMark)
EFFECTS: tuple[Effects, ...] = get_args(Effects)
VARIANCES: tuple[Variances, ...] = get_args(Variances)
OMNIBUS_TESTS: tuple[Omnibus, ...] = get_args(Omnibus)
ACROSS_RESPONSES: tuple[AcrossResponses, ...] = get_args(AcrossResponses)
PAIRS: tuple[Pairs, ...] = get_args(Pairs)
TRENDS: tuple[TrendKind, ...] = get_args(TrendKind)
ADJUSTMENTS: tuple[Adjustment, ...] = get_args(Adjustment)
ALTERNATIVES: tuple[Alternative, ...] = get_args(Alternative)
EQUIVALENCE_ADJUSTMENTS: tuple[EquivalenceAdjustment, ...] = get_args(EquivalenceAdjustment)
NON_INFERIORITY: tuple[NonInferiority, ...] = get_args(NonInferiority)
OUTLIER_TESTS: tuple[OutlierTest, ...] = get_args(OutlierTest)
VARIANCE_CHECKS: tuple[VarianceCheck, ...] = get_args(VarianceCheck)
NORMALITY_CHECKS: tuple[NormalityCheck, ...] = get_args(NormalityCheck)
PRECISION_CONDITIONS: tuple[PrecisionConditions, ...] = get_args(PrecisionConditions)
ALLOCATIONS: tuple[Allocation, ...] = get_args(Allocation)
QUANTITIES: tuple[Quantity, ...] = get_args(Quantity)
ROLES: tuple[Role, ...] = get_args(Role)
PAPERS: tuple[Paper, ...] = get_args(Paper)
REQUIREMENTS: tuple[Requirement, ...] = get_args(Requirement)

# Words for methods that control the rate of false discoveries: known, and refused with a reason.
FALSE_DISCOVERY_WORDS = (
    "benjamini-hochberg",
    "benjamini-yekutieli",
    "bh",
    "by",
    "fdr",
    "fdr-bh",
    "fdr-by",
    "false-discovery-rate",
    "storey",
    "q-value",
)

LONGEST_TITLE = 200
LONGEST_LABEL = 80
LONGEST_SENTENCE = 200
LONGEST_NOTE = 300
LONGEST_REASON = 500
LONGEST_PARAGRAPHS = 4000
LONGEST_PATH = 255
