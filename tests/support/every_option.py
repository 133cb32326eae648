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
data: {file: data/values.csv, response: [ash, protein], factor: lot, unit: g/100 g, order: position}
alpha: 0.05
"""
_FAMILIES = """\
  - {{name: pairs {adjust}, pairs: all, adjust: {adjust}}}
  - {{name: against {adjust}, against: "10", adjust: {adjust}}}
"""
_OTHERS = """\
  - {name: one contrast, weights: {"10": 1/2, "20": 1/2, "35": -1/2, "50": -1/2}, alternative: less}
  - name: two contrasts
    contrasts: [{name: low, weights: {"10": 1, "20": -1}}, {name: high, weights: {"35": 1, "50": -1}}]
    adjust: bonferroni
  - {name: cubic trend, trend: polynomial, degree: 3, adjust: holm}
  - {name: slope, trend: linear}
"""
_EQUIVALENCE = """\
equivalence:
  - {name: units, against: "10", margin: 0.1, margin-source: invented, adjust: holm}
  - {name: uneven, pairs: all, lower: -0.1, upper: 0.12, adjust: bonferroni, alpha: 0.025}
  - {name: percent, against: "10", margin-percent: 5, adjust: none}
  - {name: not lower, against: "10", non-inferiority: not-lower, margin: 0.2, adjust: holm, response: ash}
"""
_CHECKS = """\
spread: {against: "10", adjust: holm}
outliers: {test: [grubbs, grubbs-double, cochran]}
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
_POOLED = (
    "comparisons:\n"
    + "".join(
        _FAMILIES.format(adjust=adjust)
        for adjust in ("none", "bonferroni", "sidak", "holm", "hochberg", "scheffe")
    )
    + """\
  - {name: tukey, pairs: all, adjust: tukey-kramer}
  - {name: dunnett, against: "10", adjust: dunnett}
  - {name: dunnett greater, against: "20", adjust: dunnett, alternative: greater}
  - {name: dunnett less, against: "50", adjust: dunnett, alternative: less}
  - {name: step-down, against: "10", adjust: dunnett-step-down}
"""
    + _OTHERS
    + _EQUIVALENCE
    + _CHECKS
    + "precision: {estimate: true}\n"
    + _CRITERIA
    + "  - {quantity: repeatability-rsd, at-most: 2}\n"
)
_SEPARATE = (
    "design: {variances: separate, omnibus: brown-forsythe}\ncomparisons:\n"
    + "".join(
        _FAMILIES.format(adjust=adjust) for adjust in ("none", "bonferroni", "sidak", "holm", "hochberg")
    )
    + "  - {name: games-howell, pairs: all, adjust: games-howell}\n"
    + _OTHERS
    + _EQUIVALENCE
    + _CHECKS
    + _CRITERIA
)
_HOLM = """\
design: {across-responses: holm}
comparisons:
  - {name: pairs, pairs: all, adjust: holm}
  - {name: slope, trend: linear}
equivalence:
  - {name: near, against: "10", margin: 0.1, adjust: holm}
"""
_RANDOM = """\
design: {effects: random}
precision: {estimate: true, confidence: 0.9, varied: lot, conditions: intermediate-precision}
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
    "bonferroni over the responses": f"design: {{across-responses: bonferroni}}\n{_POOLED}",
    "holm over the responses": _HOLM,
    "separate variances": _SEPARATE,
    "random levels": _RANDOM,
}


def study_with_every(option: str) -> tuple[StudyDefinition, tuple[Observations, ...]]:
    """One of the studies of PLANS, with its observations."""
    study = study_of(PLANS[option], _HEAD)
    return study, observations_of_each(study, {"ash": ASH, "protein": PROTEIN}, ORDER)


def findings_with_every(option: str) -> Findings:
    """The findings of one of the studies of PLANS."""
    return evaluate(*study_with_every(option))
