"""The keys and fixed words of a study definition and of a laboratory's settings: the one table of each.

The readers, the suggestions for misspelt keys and the published JSON Schema all follow these tables.
"""

from typing import Literal, get_args

from assayfolio.study.plan import Adjustment, Alternative

STUDY_KEYS = (
    "study",
    "title",
    "purpose",
    "data",
    "design",
    "alpha",
    "comparisons",
    "equivalence",
    "outliers",
    "checks",
    "precision",
    "power",
    "criteria",
    "sign-off",
)
DATA_KEYS = (
    "file",
    "response",
    "factor",
    "unit",
    "levels",
    "replicates",
    "missing",
    "below-limit",
    "decimal-mark",
)
DESIGN_KEYS = ("effects", "variances")
COMPARISON_KEYS = ("name", "against", "pairs", "weights", "adjust", "alternative")
EQUIVALENCE_KEYS = (
    "name",
    "against",
    "pairs",
    "margin",
    "lower",
    "upper",
    "margin-percent",
    "margin-source",
    "adjust",
    "alpha",
)
OUTLIER_KEYS = ("test",)
CHECK_KEYS = ("equal-variances", "normality")
PRECISION_KEYS = ("estimate", "confidence", "varied")
POWER_KEYS = ("difference", "sigma", "target")
CRITERION_KEYS = ("quantity", "at-most", "at-least", "unit")
SIGN_OFF_KEYS = ("role", "meaning")
LABORATORY_KEYS = ("laboratory", "address", "note", "accent", "paper", "require", "wait-seconds")

Missing = Literal["refuse", "omit"]
BelowLimit = Literal["refuse", "omit", "half-limit", "limit"]
DecimalMark = Literal["point", "comma"]
Effects = Literal["fixed", "random"]
Variances = Literal["pooled", "separate"]
Pairs = Literal["all"]
EquivalenceAdjustment = Literal["none", "bonferroni", "holm"]
OutlierTest = Literal["grubbs", "cochran"]
VarianceCheck = Literal["brown-forsythe", "levene", "bartlett", "cochran"]
NormalityCheck = Literal["shapiro-wilk", "anderson-darling"]
Role = Literal["author", "reviewer", "approver"]
Paper = Literal["A4", "Letter"]
Requirement = Literal["unit", "purpose", "levels", "replicates", "comparisons", "checks", "sign-off"]

MISSING: tuple[Missing, ...] = get_args(Missing)
BELOW_LIMIT: tuple[BelowLimit, ...] = get_args(BelowLimit)
DECIMAL_MARKS: tuple[DecimalMark, ...] = get_args(DecimalMark)
EFFECTS: tuple[Effects, ...] = get_args(Effects)
VARIANCES: tuple[Variances, ...] = get_args(Variances)
PAIRS: tuple[Pairs, ...] = get_args(Pairs)
ADJUSTMENTS: tuple[Adjustment, ...] = get_args(Adjustment)
ALTERNATIVES: tuple[Alternative, ...] = get_args(Alternative)
EQUIVALENCE_ADJUSTMENTS: tuple[EquivalenceAdjustment, ...] = get_args(EquivalenceAdjustment)
OUTLIER_TESTS: tuple[OutlierTest, ...] = get_args(OutlierTest)
VARIANCE_CHECKS: tuple[VarianceCheck, ...] = get_args(VarianceCheck)
NORMALITY_CHECKS: tuple[NormalityCheck, ...] = get_args(NormalityCheck)
ROLES: tuple[Role, ...] = get_args(Role)
PAPERS: tuple[Paper, ...] = get_args(Paper)
REQUIREMENTS: tuple[Requirement, ...] = get_args(Requirement)

LONGEST_TITLE = 200
LONGEST_LABEL = 80
LONGEST_SENTENCE = 200
LONGEST_NOTE = 300
LONGEST_PARAGRAPHS = 4000
LONGEST_PATH = 255
