"""Study definitions for the tests, and what reading them says; laboratory and figures are invented."""

from assayfolio.errors import InputError
from assayfolio.study.plan import StudyDefinition
from assayfolio.study.reading import read_laboratory, read_study

SMALLEST = """\
study: LOT-7
title: Two balances and a reference
data:
  file: values.csv
  response: mass
  factor: balance
alpha: 0.05
"""

LEVELS = "  levels: [reference, north, south]\n"

FULL = """\
# What was planned for the chloride meters
study: CAL-2031-04
title: "Chloride in process water: four instruments"
purpose: >
  To decide which bench instruments
  may stand in for the titrator.

data:
  file: data/chloride.csv
  response: chloride
  factor: instrument
  unit: mg/L
  levels: [titrator, probe-1, probe-2, 012]
  replicates: {titrator: 8, probe-1: 6, probe-2: 6, 012: 6}
  missing: refuse
  below-limit: refuse
  decimal-mark: comma
design:
  effects: fixed
  variances: pooled
alpha: 0.050
comparisons:
  - name: each instrument against the titrator
    against: titrator
    adjust: dunnett
    alternative: less
  - name: all pairs
    pairs: all
    adjust: tukey-kramer
  - name: probes against the rest
    weights: {titrator: -1/2, 012: -0.5, probe-1: 0.5, probe-2: 1/2}
equivalence:
  - {name: probes, against: titrator, margin: 0.5, margin-source: bench procedure 12}
  - {name: pairs, pairs: all, lower: -0.2, upper: 1/3, adjust: holm, alpha: 0.025}
  - {name: relative, against: titrator, margin-percent: 2.50}
outliers: {test: grubbs}
checks: {equal-variances: brown-forsythe, normality: shapiro-wilk}
precision: {estimate: true, confidence: 0.90, varied: day and analyst}
power: {difference: 0.5, sigma: 0.3, target: 0.9}
criteria:
  - {quantity: repeatability-rsd, at-most: 2.0, unit: "%"}
sign-off:
  - {role: author, meaning: I measured as planned}
  - {role: reviewer, meaning: "I checked plan, data and figures"}
"""


def study_of(text: str | bytes) -> StudyDefinition:
    """The study definition that `text` spells, read as `plan.yaml`."""
    return read_study(text.encode() if isinstance(text, str) else text, "plan.yaml")


def faults_of(text: str | bytes) -> list[str]:
    """Each fault of a study definition as `line:column: found - advice`; none if it can be read."""
    return _lines(read_study, text)


def laboratory_faults_of(text: str | bytes) -> list[str]:
    """The same for a laboratory's settings."""
    return _lines(read_laboratory, text)


def _lines(reader: object, text: str | bytes) -> list[str]:
    assert callable(reader)
    try:
        reader(text.encode() if isinstance(text, str) else text, "plan.yaml")
    except InputError as error:
        return [str(fault).removeprefix("plan.yaml:") for fault in error.faults]
    return []


def edited(text: str, old: str, new: str) -> str:
    """`text` with its only `old` replaced by `new`; with `new` behind it where `old` is empty."""
    if not old:
        return text + new
    assert text.count(old) == 1, f"{old!r} should stand once in the example"
    return text.replace(old, new)
