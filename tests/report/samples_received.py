"""Invented studies with data as laboratories have them: several files, limits, repeats, units, exclusions.

They are read from their bytes, as a run reads them, so that counts and reasons are those of the intake.
"""

from collections.abc import Callable
from dataclasses import replace

from assayfolio.observations.reading import read_all_observations
from assayfolio.report.facts import InputFacts, ReportInput
from assayfolio.study.exclusions import read_exclusions
from assayfolio.study.reading import read_study
from assayfolio.worksheet.rows import planned_rows
from report.samples import report_input

WELLS = """\
study: WEL-031
title: Nitrite in well water by three photometers
purpose: To find out whether the field photometers give the nitrite content of the bench photometer.
data:
  file: [data/monday.csv, data/tuesday.csv]
  header-row: 4
  response: nitrite
  factor: photometer
  unit: mg/L
  unit-column: unit
  convert: {ug/L: 1/1000}
  levels: [bench, field-east, field-west]
  replicates: 6
  order: position
  missing: omit
  missing-codes: [n.d.]
  below-limit: half-limit
  limit-codes: {ND: 0.02}
  above-limit: limit
  replicate-unit: bottle
  exclusions: data/left-out.yaml
measurement:
  measurand: nitrite as nitrogen
  method: diazotisation photometry
  method-version: "3"
  item: {column: bottle}
  operator: {column: analyst}
  measured-at: {column: date}
  supplied-by: Tarn Valley waterworks
worksheet: {seed: 20260914, item: WB}
alpha: 0.05
comparisons:
  - {name: each field photometer against the bench, against: bench, adjust: dunnett}
  - {name: all pairs, pairs: all, adjust: holm}
equivalence:
  - name: equivalent within 0.02 mg/L
    against: bench
    margin: 0.02
    margin-source: water method 12 section 6
    adjust: holm
spread: {against: bench, adjust: holm}
outliers: {test: grubbs}
checks: {equal-variances: brown-forsythe, normality: shapiro-wilk}
precision: {estimate: true, confidence: 0.95}
criteria:
  - {quantity: repeatability-rsd, at-most: 40, unit: "%"}
  - {quantity: largest-difference, at-most: 0.03, unit: mg/L}
sign-off:
  - {role: author, meaning: I performed this analysis as planned}
  - {role: reviewer, meaning: "I checked data, plan and result"}
  - {role: approver, meaning: I approve this report}
"""
VALUES = {
    "bench": (
        ("0.105", "0.107"),
        ("0.112",),
        ("0.098",),
        ("0.110", "0.104", "0.109"),
        ("0.101",),
        ("0.115",),
    ),
    "field-east": (("0.121",), ("0.118",), ("0.127", "0.124"), ("0.190",), ("0.116",), ("n.d.",)),
    "field-west": (("<0.08",), ("0.082", "<0.08"), ("0.094",), ("ND",), ("91",), (">0.2",)),
}
EXCLUDED = {
    "0.190": "the cell of this bottle was found cracked after the reading, logbook 8 page 31",
    "0.098": "bottle opened a day too early by mistake, noted in the sampling record",
}
ABOVE = 'Instrument,"photometers, three of them"\nExported,2026-09-22 17:04\n\n'


UG = ("91",)  # typed in micrograms, as that photometer shows them


def wells() -> ReportInput:
    """Three photometers, two files, and everything that can befall a value on its way to the analysis."""
    rows = _rows(WELLS, VALUES)
    rows[3], rows[7] = _exchanged(rows[3], rows[7])
    half = len(rows) // 2
    files = [_file(rows[:half]), _file(rows[half:])]
    return _read(WELLS, files, _exclusions(files))


def wells_as_planned() -> ReportInput:
    """A plan with numbers and a worksheet that was kept in full: one plain file, every value analysed."""
    text = _without(WELLS, "header-row", "unit-column", "convert", "replicate-unit", "exclusions")
    text = text.replace("[data/monday.csv, data/tuesday.csv]", "data/monday.csv")
    values = {
        level: tuple((f"0.{104 + 6 * shift + 5 * at % 13}",) for at in range(6))
        for shift, level in enumerate(VALUES)
    }
    return _read(text, [_file(_rows(text, values), above="")], "")


def plain_exclusion() -> ReportInput:
    """One file, one exclusion that no verdict depends on, and no worksheet."""
    text = _without(WELLS, "header-row", "unit-column", "convert", "replicate-unit", "spread", "order")
    text = _without(text, "worksheet").replace("[data/monday.csv, data/tuesday.csv]", "data/monday.csv")
    values = {
        level: tuple((f"0.{104 + 40 * shift + 5 * at % 13}",) for at in range(6))
        for shift, level in enumerate(VALUES)
    }
    values["bench"] = (*values["bench"][:-1], ("0.190",))
    files = [_file(_rows(WELLS, values), above="")]
    return _read(text, files, _exclusions(files))


FLOURS = """\
study: FLR-210
title: Ash and fat of one flour in three laboratories
data:
  file: data/monday.csv
  response: [ash, fat]
  factor: laboratory
  unit: g/100 g
  missing: omit
  exclusions: data/left-out.yaml
design: {across-responses: holm}
alpha: 0.05
comparisons:
  - {name: all pairs, pairs: all, adjust: holm}
"""


def one_response_excluded() -> ReportInput:
    """Two responses adjusted together by Holm: an exclusion from one, a missing value of the other."""
    lines = ["laboratory,ash,fat"]
    for shift, level in enumerate(("east", "north", "west")):
        for at in range(5):
            ash = "9.06" if (level, at) == ("north", 4) else f"{1 + 0.02 * shift + 0.01 * at:.2f}"
            fat = "" if (level, at) == ("east", 2) else f"{2 + 0.04 * shift + 0.013 * at:.3f}"
            lines.append(f"{level},{ash},{fat}")
    exclusions = (
        'exclusions:\n  - {row: 11, value: "9.06", reason: crucible dropped on the way to the balance, '
        "decided-by: D. Lund, decided-at: 2026-09-22}\n"
    )
    return _read(FLOURS, ["\n".join([*lines, ""])], exclusions)


def _without(text: str, *keys: str) -> str:
    """The study definition without the lines of these keys."""
    return "".join(
        line
        for line in text.splitlines(keepends=True)
        if not any(line.strip().startswith(f"{key}:") for key in keys)
    )


def _rows(text: str, values: dict[str, tuple[tuple[str, ...], ...]]) -> list[list[str]]:
    """The rows in the planned order: bottle, photometer, nitrite, unit, analyst, date; a row a repeat."""
    rows = []
    for row in planned_rows(read_study(text.encode(), "study.yaml")):
        for value in values[row.level][row.replicate - 1]:
            unit = "ug/L" if (value,) == UG else "mg/L"
            analyst = "D. Lund" if row.position > 9 else "C. Moor"
            rows.append([row.item or "", row.level, value, unit, analyst, "2026-09-21"])
    return [[str(position), *row] for position, row in enumerate(rows, start=1)]


def _exchanged(one: list[str], other: list[str]) -> tuple[list[str], list[str]]:
    """Two rows measured in each other's place."""
    return [one[0], *other[1:]], [other[0], *one[1:]]


def _file(rows: list[list[str]], above: str = ABOVE) -> str:
    names = "position,bottle,photometer,nitrite,unit,analyst,date"
    return above + names + "\n" + "".join(",".join(row) + "\n" for row in rows)


def _exclusions(files: list[str]) -> str:
    """The exclusions file: every value of EXCLUDED, wherever it stands."""
    entries = []
    for name, text in zip(NAMES, files, strict=False):
        for line, row in enumerate(text.splitlines(), start=1):
            for value, reason in EXCLUDED.items():
                if value in row.split(","):
                    where = f"file: {name}, " if len(files) > 1 else ""
                    entries.append(
                        f'  - {{row: {line}, {where}value: "{value}", reason: "{reason}", '
                        "decided-by: D. Lund, decided-at: 2026-09-22, approved-by: R. Thorne}\n"
                    )
    return "exclusions:\n" + "".join(entries)


NAMES = ("data/monday.csv", "data/tuesday.csv")


def _read(text: str, files: list[str], exclusions: str) -> ReportInput:
    """The report's input, its observations read from these files as a run reads them."""
    study = read_study(text.encode(), "study.yaml")
    left_out = read_exclusions(exclusions.encode(), "left-out.yaml") if exclusions else ()
    raw = [(name, content.encode()) for name, content in zip(NAMES, files, strict=False)]
    content = report_input(study, *read_all_observations(raw, study.data, study.measurement, left_out))
    others = [item for item in content.run.inputs if item.role != "raw data"]
    named = [
        InputFacts("raw data", f"configs/{one.file}", f"data/inputs/{one.file[5:]}", one.size, one.sha256)
        for one in content.observations[0].files
    ]
    return replace(content, run=replace(content.run, inputs=(*others[:1], *named, *others[1:])))


CASES_RECEIVED: dict[str, Callable[[], ReportInput]] = {
    "wells": wells,
    "wells as planned": wells_as_planned,
    "plain exclusion": plain_exclusion,
    "one response excluded": one_response_excluded,
}
