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

MISSING: tuple[Literal["refuse", "omit"], ...] = ("refuse", "omit")
BELOW_LIMIT: tuple[Literal["refuse", "omit", "half-limit", "limit"], ...] = (
    "refuse",
    "omit",
    "half-limit",
    "limit",
)
DECIMAL_MARKS: tuple[Literal["point", "comma"], ...] = ("point", "comma")
EFFECTS: tuple[Literal["fixed", "random"], ...] = ("fixed", "random")
VARIANCES: tuple[Literal["pooled", "separate"], ...] = ("pooled", "separate")
PAIRS: tuple[Literal["all"], ...] = ("all",)
ADJUSTMENTS: tuple[Adjustment, ...] = get_args(Adjustment)
ALTERNATIVES: tuple[Alternative, ...] = get_args(Alternative)
EQUIVALENCE_ADJUSTMENTS: tuple[Literal["none", "bonferroni", "holm"], ...] = ("none", "bonferroni", "holm")
OUTLIER_TESTS: tuple[Literal["grubbs", "cochran"], ...] = ("grubbs", "cochran")
VARIANCE_CHECKS: tuple[Literal["brown-forsythe", "levene", "bartlett", "cochran"], ...] = (
    "brown-forsythe",
    "levene",
    "bartlett",
    "cochran",
)
NORMALITY_CHECKS: tuple[Literal["shapiro-wilk", "anderson-darling"], ...] = (
    "shapiro-wilk",
    "anderson-darling",
)
ROLES: tuple[Literal["author", "reviewer", "approver"], ...] = ("author", "reviewer", "approver")
PAPERS: tuple[Literal["A4", "Letter"], ...] = ("A4", "Letter")
REQUIREMENTS = ("unit", "purpose", "levels", "replicates", "comparisons", "checks", "sign-off")

LONGEST_TITLE = 200
LONGEST_LABEL = 80
LONGEST_SENTENCE = 200
LONGEST_NOTE = 300
LONGEST_PARAGRAPHS = 4000
LONGEST_PATH = 255
