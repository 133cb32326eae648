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
# What was planned for the halide meters
study: CAL-2031-04
title: "Halides in process water: four instruments"
purpose: >
  To decide which bench instruments
  may stand in for the titrator.

data:
  file: data/halides.csv
  response: [chloride, bromide]
  factor: instrument
  unit: {chloride: mg/L, bromide: "1"}
  order: position
  levels: [titrator, probe-1, probe-2, 012]
  replicates: {titrator: 8, probe-1: 6, probe-2: 6, 012: 6}
  missing: refuse
  below-limit: refuse
  decimal-mark: comma
design:
  effects: fixed
  variances: pooled
  omnibus: f
  across-responses: bonferroni
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
  - name: two questions
    contrasts:
      - {name: probe against probe, weights: {probe-1: 1, probe-2: -1}}
      - {name: 012 against titrator, weights: {012: 1, titrator: -1}}
    adjust: hochberg
    alternative: greater
  - name: trend with age
    trend: polynomial
    degree: 3
    scores: {titrator: 1/2, probe-1: 2, probe-2: 4.50, 012: 12}
    adjust: sidak
equivalence:
  - {name: probes, against: titrator, margin: 0.5, margin-source: bench procedure 12, adjust: none}
  - {name: every pair, pairs: all, lower: -0.2, upper: 1/3, adjust: holm, alpha: 0.025}
  - {name: relative, against: titrator, margin-percent: 2.50, adjust: bonferroni}
  - {name: askew, against: titrator, lower-percent: -5, upper-percent: 3, adjust: none, response: bromide}
  - {name: not lower, against: titrator, non-inferiority: not-lower, margin: 0.1, adjust: holm}
spread: {against: titrator, adjust: bonferroni}
outliers: {test: [grubbs, grubbs-double]}
checks: {equal-variances: [brown-forsythe, bartlett], normality: shapiro-wilk}
precision: {estimate: true, confidence: 0.90, varied: instrument}
power:
  {difference: 0.5, sigma: 0.3, target: 0.9, true-difference: -0.1, allocation: control, response: chloride}
criteria:
  - {quantity: repeatability-rsd, at-most: 2.0, unit: "%"}
  - {quantity: level-mean, level: 012, at-least: 4, at-most: 5.5, unit: mg/L, response: chloride}
trend:
  baseline: {first: 20}
  quantities: [lot-mean, repeatability-sd]
  rules: [beyond-limits, nine-one-side, six-rising]
  criteria: [{quantity: lot-mean, at-least: 4, at-most: 5.5, response: chloride}]
sign-off:
  - {role: author, meaning: I measured as planned}
  - {role: reviewer, meaning: "I checked plan, data and figures"}
"""

SAMPLE = """\
study: VOL-3
title: A control vinegar over ten days
data: {file: values.csv, response: acidity, factor: day, unit: g/L, replicates: 3}
design: {effects: random}
alpha: 0.05
outliers: {test: cochran}
precision: {estimate: true, varied: day and analyst, conditions: intermediate-precision}
criteria:
  - {quantity: total-rsd, at-most: 0.8}
  - {quantity: between-sd, at-most: 1/10, unit: g/L}
trend: {baseline: {lots: [V-1, V-2, V-3, V-4, V-5]}, rules: beyond-limits}
"""

SEPARATE = """\
study: SYR-2
title: Three methods of unequal precision
data: {file: values.csv, response: sugar, factor: method, levels: [reference, north, south]}
design: {variances: separate, omnibus: brown-forsythe}
alpha: 0.05
comparisons:
  - {name: pairs, pairs: all, adjust: games-howell}
  - {name: to the reference, against: reference, adjust: holm, alternative: greater}
  - {name: contrast, weights: {reference: 1, north: -1}}
equivalence:
  - {name: alike, against: reference, margin: 0.5, adjust: holm}
spread: {against: reference, adjust: holm}
criteria: [{quantity: level-sd, level: north, at-most: 2}]
"""

RECEIVED = """\
study: WTR-12
title: Nitrate as four instruments sent it
data:
  file: [data/monday.csv, data/tuesday.txt.gz, data/late.XLSX]
  encoding: windows-1252
  sheet: Results
  header-row: 4
  layout: long
  response: nitrate
  factor: instrument
  unit: mg/L
  unit-column: unit
  convert: {ug/L: 1/1000, g/L: 1e3}
  order: position
  levels: [reference, north, south]
  replicates: {reference: 6, north: 4, south: 2}
  replicate-unit: sample
  missing: omit
  missing-codes: [n.d., "-"]
  below-limit: half-limit
  limit-codes: {ND: 0.05, trace: 1/8}
  above-limit: limit
  decimal-mark: comma
  exclusions: data/left-out.yaml
measurement:
  measurand: nitrate nitrogen
  method: ISO 10304-1
  method-version: 2007
  item: {column: sample}
  lot: "{column: lot}"
  instrument: {column: instrument}
  operator: {column: analyst}
  measured-at: {column: date}
  supplied-by: Invented Waters
worksheet: {seed: 20311201, block: day, blocks: [monday, tuesday], item: WP}
alpha: 0.05
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


def with_data(*lines: str) -> str:
    """The smallest definition with `lines` in `data`, from line 7 on."""
    return edited(SMALLEST, "alpha", "".join(f"  {line}\n" for line in lines) + "alpha")


def planned(section: str) -> str:
    """The smallest definition with three declared levels (line 7) and `section` from line 9 on."""
    return edited(SMALLEST, "alpha", f"{LEVELS}alpha") + section


def edited(text: str, old: str, new: str) -> str:
    """`text` with its only `old` replaced by `new`; with `new` behind it where `old` is empty."""
    if not old:
        return text + new
    assert text.count(old) == 1, f"{old!r} should stand once in the example"
    return text.replace(old, new)
