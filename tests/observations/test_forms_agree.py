"""The same data in every form of file give the same values, levels and order, and the same findings."""

import gzip
from collections.abc import Callable
from dataclasses import replace

import pytest
from openpyxl.worksheet.worksheet import Worksheet

from assayfolio.evaluation.apply import evaluate
from assayfolio.findings_document import findings_bytes
from assayfolio.observations.reading import read_all_observations
from assayfolio.observations.values import Observations
from assayfolio.study.plan import DataPlan, StudyDefinition
from support.studies import study_of
from support.workbooks import by_hand, workbook

LEVELS = ("lot µ", "=kit", "c, d")
VALUES = {
    "lot µ": ("1.5", "1.25", "0.1", "1.3"),
    "=kit": ("2.5", "-0.25", "2.75", "2.4"),
    "c, d": ("3.5", "3.125", "1000000.5", "3.3"),
}
ROWS = [(level, VALUES[level][at]) for at in range(4) for level in LEVELS]
STUDY = """\
study: FRM-1
title: The same data in many forms
data: {file: data/d.csv, response: content, factor: lot, unit: mg/L, levels: ["lot µ", =kit, "c, d"]}
alpha: 0.05
comparisons:
  - {name: every pair, pairs: all, adjust: tukey-kramer}
checks: {equal-variances: brown-forsythe, normality: shapiro-wilk}
precision: {estimate: true, confidence: 0.95}
"""

Files = list[tuple[str, bytes]]


def lines(separator: str, decimal_mark: str = ".", head: tuple[str, str] = ("lot", "content")) -> str:
    """The rows as text; cells that hold the separator stand in quotation marks."""
    rows = [head, *((level, text.replace(".", decimal_mark)) for level, text in ROWS)]
    marked = [[f'"{cell}"' if separator in cell else cell for cell in row] for row in rows]
    return "".join(separator.join(row) + "\n" for row in marked)


def wide() -> str:
    """A column a level."""
    head = ",".join(f'"{level}"' for level in LEVELS)
    return head + "\n" + "".join(",".join(VALUES[level][at] for level in LEVELS) + "\n" for at in range(4))


def numbers() -> list[list[object]]:
    """The rows with numbers as a spreadsheet holds them."""
    return [["lot", "content"], *([level, float(text)] for level, text in ROWS)]


def as_text(sheet: Worksheet) -> None:
    """Make every label a text cell, also one that begins like a formula."""
    for row in sheet.iter_rows():
        for cell in row:
            if isinstance(cell.value, str):
                cell.data_type = "s"


def stored_with_17_digits() -> bytes:
    """A workbook whose numbers are stored with 17 digits, and its texts in the list of shared ones."""
    cells = [
        f"<c t='s'><v>{LEVELS.index(level)}</v></c><c><v>{float(text):.17g}</v></c>" for level, text in ROWS
    ]
    head = "<row><c t='s'><v>3</v></c><c t='s'><v>4</v></c></row>"
    return by_hand(head + "".join(f"<row>{row}</row>" for row in cells), shared=[*LEVELS, "lot", "content"])


def guarded() -> str:
    """Text in which the label that begins like a formula is guarded."""
    return lines(";").replace("\n=kit", "\n'=kit")


FORMS: dict[str, tuple[Callable[[], Files], dict[str, object]]] = {
    "comma": (lambda: [("d.csv", lines(",").encode())], {}),
    "semicolon with decimal comma": (
        lambda: [("d.csv", lines(";", ",").encode())],
        {"decimal_mark": "comma"},
    ),
    "tab": (lambda: [("d.tsv", lines("\t").encode())], {}),
    "gzip": (lambda: [("d.csv.gz", gzip.compress(lines(",").encode()))], {}),
    "utf-16": (lambda: [("d.txt", lines("\t").encode("utf-16"))], {"encoding": "utf-16"}),
    "windows-1252": (lambda: [("d.csv", lines(";").encode("cp1252"))], {"encoding": "windows-1252"}),
    "workbook": (lambda: [("d.xlsx", workbook(numbers(), as_text))], {}),
    "workbook of other hands": (lambda: [("d.xlsx", stored_with_17_digits())], {}),
    "workbook with decimal comma": (
        lambda: [("d.xlsx", workbook(numbers(), as_text))],
        {"decimal_mark": "comma"},
    ),
    "wide": (lambda: [("d.csv", wide().encode())], {"layout": "wide"}),
    "wide workbook": (
        lambda: [
            (
                "d.xlsx",
                workbook(
                    [list(LEVELS), *([float(VALUES[x][at]) for x in LEVELS] for at in range(4))], as_text
                ),
            )
        ],
        {"layout": "wide"},
    ),
    "two files": (
        lambda: [
            ("run-1.csv", "".join(lines(",").splitlines(keepends=True)[:8]).encode()),
            (
                "run-2.csv",
                "".join([lines(",").splitlines(keepends=True)[i] for i in (0, *range(8, 13))]).encode(),
            ),
        ],
        {},
    ),
    "header further down": (
        lambda: [("d.csv", ("made by;someone\n\n" + lines(";")).encode("utf-8-sig"))],
        {"header_row": 3},
    ),
    "guarded labels": (lambda: [("d.csv", guarded().encode())], {}),
}


def study_in(form: str) -> tuple[StudyDefinition, Files]:
    """The study as it would be written for a form, and its files."""
    make, changes = FORMS[form]
    study = study_of(head=STUDY)
    plan: DataPlan = replace(study.data, **changes)  # type: ignore[arg-type]
    return replace(study, data=plan), make()


def read_in(form: str) -> Observations:
    """The observations in a form."""
    study, files = study_in(form)
    return read_all_observations(files, study.data)[0]


@pytest.mark.parametrize("form", FORMS)
def test_values_levels_and_order_are_the_same_in_every_form(form: str) -> None:
    observations = read_in(form)
    assert [(row.level, row.value) for row in observations.rows] == [
        (row.level, row.value) for row in read_in("comma").rows
    ]
    assert observations.levels == LEVELS


def test_at_least_seven_forms_are_compared() -> None:
    assert len(FORMS) >= 7


def findings_in(form: str) -> bytes:
    """The findings of the study in a form."""
    study, files = study_in(form)
    return findings_bytes(evaluate(study, read_all_observations(files, study.data)))


@pytest.mark.parametrize("form", [form for form in FORMS if form != "comma"])
def test_findings_are_the_same_bytes_in_every_form(form: str) -> None:
    assert findings_in(form) == findings_in("comma")
