"""Studies that together ask for everything the evaluation can give, with invented data."""

from collections.abc import Mapping, Sequence

from assayfolio.evaluation.apply import evaluate
from assayfolio.findings import Findings
from assayfolio.observations.values import Observations
from assayfolio.study.plan import StudyDefinition
from support.studies import observations_of_each, study_of

Values = Mapping[str, Sequence[str]]

ASH: Values = {
    "10": ["1.521", "1.553", "1.502", "1.494", "1.537"],
    "20": ["1.594", "1.571", "1.613", "1.582"],
    "35": ["1.536", "1.562", "1.517", "1.548", "1.529", "1.541"],
    "50": ["1.611", "1.587", "1.574", "1.702", "1.598"],
}
PROTEIN: Values = {
    "10": ["11.21", "11.93", "11.62", "11.44", "11.38"],
    "20": ["11.82", "12.41", "12.04", "11.73"],
    "35": ["11.14", "11.52", "12.03", "11.31", "11.47", "11.66"],
    "50": ["12.87", "11.06", "12.33", "11.94", "10.85"],
}
ORDER = (7, 1, 12, 20, 5, 3, 18, 9, 14, 2, 11, 16, 6, 19, 8, 4, 13, 10, 17, 15)

_HEAD = """\
study: TST-9
title: Every option
purpose: To ask for everything that can be planned.
data:
  file: data/values.csv
  response: [ash, protein]
  factor: lot
  unit: g/100 g
  order: position
  levels: ["10", "20", "35", "50"]
  replicates: {"10": 5, "20": 4, "35": 6, "50": 5}
  missing: refuse
  below-limit: refuse
  decimal-mark: point
alpha: 0.05
sign-off:
  - {role: author, meaning: I performed this analysis as planned}
  - {role: reviewer, meaning: I checked it}
  - {role: approver, meaning: I approve it}
"""
_MEANS = """\
  - {{name: pairs {adjust}, pairs: all, adjust: {adjust}}}
  - {{name: against {adjust}, against: "10", adjust: {adjust}, alternative: two-sided}}
"""
_CONTRASTS = """\
  - name: contrasts {adjust}
    contrasts: [{{name: low, weights: {{"10": 1, "20": -1}}}}, {{name: high, weights: {{"35": 1, "50": -1}}}}]
    adjust: {adjust}
"""
_TREND = "  - {{name: cubic {adjust}, trend: polynomial, degree: 3, adjust: {adjust}}}\n"
_HALVES = """{"10": 1/2, "20": 1/2, "35": -1/2, "50": -1/2}"""
_SINGLE = f"""\
  - {{name: one contrast, weights: {_HALVES}, adjust: none, alternative: less}}
  - {{name: slope, trend: linear, adjust: none}}
"""
_ONE_SIDED = f"""\
  - {{name: contrast greater, weights: {_HALVES}, alternative: greater}}
  - name: contrasts greater
    contrasts: [{{name: low, weights: {{"10": 1, "20": -1}}}}, {{name: high, weights: {{"35": 1, "50": -1}}}}]
    adjust: holm
    alternative: greater
  - name: contrasts less
    contrasts: [{{name: low, weights: {{"10": 1, "20": -1}}}}, {{name: high, weights: {{"35": 1, "50": -1}}}}]
    adjust: bonferroni
    alternative: less
  - {{name: slope greater, trend: linear, alternative: greater}}
  - {{name: slope less, trend: linear, alternative: less}}
  - {{name: square greater, trend: polynomial, degree: 2, adjust: holm, alternative: greater}}
  - {{name: square less, trend: polynomial, degree: 2, adjust: hochberg, alternative: less}}
"""
_SCHEFFE_ROWS = f"""\
  - {{name: scheffe contrast, weights: {_HALVES}, adjust: scheffe, alternative: two-sided}}
  - {{name: scheffe slope, trend: linear, scores: {{"10": 1, "20": 2, "35": 3, "50": 4}}, adjust: scheffe}}
"""
_EQUIVALENCE = """\
equivalence:
  - {name: units, against: "10", margin: 0.1, margin-source: invented specification 7, adjust: holm}
  - {name: uneven, pairs: all, lower: -0.1, upper: 0.12, adjust: bonferroni, alpha: 0.025}
  - {name: percent, against: "10", margin-percent: 5, adjust: none}
  - {name: lopsided, against: "20", lower-percent: -4, upper-percent: 6, adjust: holm, response: protein}
  - {name: not lower, against: "10", non-inferiority: not-lower, margin: 0.2, adjust: holm, response: ash}
  - {name: not higher, against: "10", non-inferiority: not-higher, margin-percent: 8, adjust: none}
"""
_CHECKS = """\
spread: {{against: "10", adjust: {adjust}}}
outliers: {{test: [grubbs, grubbs-double, cochran]}}
checks:
  equal-variances: [brown-forsythe, levene, bartlett, cochran]
  normality: [shapiro-wilk, anderson-darling]
"""
_CRITERIA = """\
criteria:
  - {quantity: largest-difference, at-most: 0.1}
  - {quantity: largest-difference-percent, at-most: 5, response: protein}
  - {quantity: level-mean, level: "20", at-least: 1.5, at-most: 13}
  - {quantity: level-sd, level: "20", at-most: 0.1}
  - {quantity: level-rsd, level: "20", at-most: 3, unit: "%"}
"""
_REPEATABILITY = "  - {quantity: repeatability-rsd, at-most: 2}\n"


def _each(pattern: str, *adjustments: str) -> str:
    return "".join(pattern.format(adjust=adjust) for adjust in adjustments)


_FOR_ALL = ("none", "bonferroni", "sidak", "holm", "hochberg")
_POOLED = (
    "design: {effects: fixed, variances: pooled, omnibus: f, across-responses: none}\ncomparisons:\n"
    + _each(_MEANS, *_FOR_ALL, "scheffe")
    + """\
  - {name: tukey, pairs: all, adjust: tukey-kramer}
  - {name: dunnett, against: "10", adjust: dunnett}
  - {name: dunnett greater, against: "20", adjust: dunnett, alternative: greater}
  - {name: dunnett less, against: "50", adjust: dunnett, alternative: less}
  - {name: step-down, against: "10", adjust: dunnett-step-down}
"""
    + _SINGLE
    + _EQUIVALENCE
    + _CHECKS.format(adjust="holm")
    + "precision: {estimate: true}\n"
    + _CRITERIA
    + _REPEATABILITY
)
_BONFERRONI = (
    "design: {across-responses: bonferroni}\ncomparisons:\n"
    + _each(_CONTRASTS, *_FOR_ALL, "scheffe")
    + _each(_TREND, *_FOR_ALL, "scheffe")
    + """\
  - {name: tukey, pairs: all, adjust: tukey-kramer}
  - {name: dunnett, against: "10", adjust: dunnett}
"""
    + _SINGLE
    + _ONE_SIDED
    + _SCHEFFE_ROWS
    + _EQUIVALENCE
    + _CHECKS.format(adjust="bonferroni")
    + "precision: {estimate: true}\n"
    + _CRITERIA
    + _REPEATABILITY
)
_SEPARATE = (
    "design: {variances: separate, omnibus: brown-forsythe}\ncomparisons:\n"
    + _each(_MEANS, *_FOR_ALL)
    + "  - {name: games-howell, pairs: all, adjust: games-howell}\n"
    + _each(_CONTRASTS, *_FOR_ALL)
    + _each(_TREND, *_FOR_ALL)
    + _SINGLE
    + _EQUIVALENCE
    + _CHECKS.format(adjust="none")
    + _CRITERIA
)
_HOLM = """\
design: {across-responses: holm}
comparisons:
  - {name: pairs, pairs: all, adjust: holm}
  - {name: slope, trend: linear}
equivalence:
  - {name: near, against: "10", margin: 0.1, adjust: holm}
power:
  {difference: 0.1, sigma: 0.03, target: 0.9, true-difference: 0.01, allocation: control, response: ash}
"""
_RANDOM = """\
design: {effects: random}
precision: {estimate: true, confidence: 0.9, varied: laboratory, conditions: reproducibility}
outliers: {test: [grubbs, cochran]}
criteria:
  - {quantity: repeatability-sd, at-most: 0.2, unit: g/100 g}
  - {quantity: repeatability-limit, at-most: 0.5}
  - {quantity: between-sd, at-most: 0.1}
  - {quantity: between-rsd, at-most: 2}
  - {quantity: total-sd, at-most: 0.2}
  - {quantity: total-rsd, at-most: 5}
"""
PLANS = {
    "pooled": _POOLED,
    "bonferroni over the responses": _BONFERRONI,
    "holm over the responses": _HOLM,
    "separate variances": _SEPARATE,
    "random levels": _RANDOM,
}


def files_with_every(option: str) -> tuple[str, str]:
    """One of the studies of PLANS, and its data, as the texts of their files."""
    rows = [("lot", "ash", "protein", "position")]
    places = iter(ORDER)
    for level, texts in ASH.items():
        rows += [
            (level, ash, protein, str(next(places)))
            for ash, protein in zip(texts, PROTEIN[level], strict=True)
        ]
    return _HEAD + PLANS[option], "".join(",".join(row) + "\n" for row in rows)


def study_with_every(option: str) -> tuple[StudyDefinition, tuple[Observations, ...]]:
    """One of the studies of PLANS, with its observations."""
    study = study_of(PLANS[option], _HEAD)
    return study, observations_of_each(study, {"ash": ASH, "protein": PROTEIN}, ORDER)


def findings_with_every(option: str) -> Findings:
    """The findings of one of the studies of PLANS."""
    return evaluate(*study_with_every(option))
