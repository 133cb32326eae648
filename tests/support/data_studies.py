"""Studies that together use every word about data, measurements, worksheets and charts, with their files."""

import io
from typing import Any

import yaml
from openpyxl import Workbook

from support.studies import CONFIGS

HEAD = """\
study: DAT-{number}
title: Words about data
data:
  file: {file}
  response: iron
  factor: lot
  unit: mg/kg
  levels: [a, b, c]
{data}alpha: 0.05
comparisons: [{{name: all pairs, pairs: all, adjust: tukey-kramer}}]
{more}"""
ROWS = [
    *(("a", "5.12"), ("a", "5.17"), ("a", "5.09"), ("b", "5.31"), ("b", "5.28"), ("b", "5.35")),
    *(("c", "5.02"), ("c", "5.11"), ("c", "5.07")),
]
FACTS = """\
measurement:
  measurand: iron
  method: flame photometry
  method-version: "4"
  item: {column: bottle}
  lot: B-17
  instrument: west
  operator: {column: analyst}
  measured-at: {column: day}
  supplied-by: field service
"""


def plan(number: int, file: str, data: str = "", more: str = "") -> str:
    """A study definition with these lines in its data section and these behind it."""
    lines = "".join(f"  {line}\n" for line in data.splitlines())
    return HEAD.format(number=number, file=file, data=lines, more=more)


def table(rows: list[tuple[str, ...]], *header: str) -> str:
    """A CSV file."""
    return "".join(",".join(row) + "\n" for row in [header, *rows])


def simple(extra: list[tuple[str, ...]] | None = None) -> str:
    return table([*ROWS, *(extra or [])], "lot", "iron")


def workbook() -> bytes:
    book = Workbook()
    book.active.title = "Notes"
    sheet = book.create_sheet("Results")
    for row in [("lot", "iron"), *((lot, float(value)) for lot, value in ROWS)]:
        sheet.append(row)
    stream = io.BytesIO()
    book.save(stream)
    return stream.getvalue()


RECEIVED = [
    ("a", "1", "5.12", "mg/kg"),
    ("a", "1", "5.14", "mg/kg"),
    ("a", "2", "5.17", "mg/kg"),
    ("a", "3", "n.d.", "mg/kg"),
    ("a", "4", "5090", "ug/kg"),
    ("b", "5", "5.31", "mg/kg"),
    ("b", "6", "<5.0", "mg/kg"),
    ("b", "7", "ND", "mg/kg"),
    ("b", "8", "5.35", "mg/kg"),
    ("c", "9", ">9", "mg/kg"),
    ("c", "10", "5.11", "mg/kg"),
    ("c", "11", "5.07", "mg/kg"),
    ("c", "12", "7.07", "mg/kg"),
]
AS_RECEIVED = [(*row, "A. Analyst", "2031-03-04") for row in RECEIVED]
COLUMNS = ("lot", "bottle", "iron", "unit", "analyst", "day")
LEFT_OUT = """\
exclusions:
  - row: 7
    file: data/second.csv
    value: "7.07"
    reason: the flask of bottle 12 was contaminated - logbook 4
    decided-by: A. Analyst
    decided-at: 2031-03-04
    approved-by: R. Reviewer
"""
SHIFTED = "Export of the süd instrument\n"

STUDIES: dict[str, tuple[str, dict[str, bytes]]] = {
    "as received": (
        plan(
            1,
            "[data/first.csv, data/second.csv]",
            "encoding: windows-1252\nheader-row: 2\nunit-column: unit\nconvert: {ug/kg: 1/1000}\n"
            "replicate-unit: bottle\nmissing: omit\nmissing-codes: [n.d.]\nbelow-limit: half-limit\n"
            "limit-codes: {ND: 5.0}\nabove-limit: limit\nexclusions: data/left-out.yaml\nlayout: long",
            FACTS,
        ),
        {
            "data/first.csv": (SHIFTED + table(AS_RECEIVED[:8], *COLUMNS)).encode("cp1252"),
            "data/second.csv": (SHIFTED + table(AS_RECEIVED[8:], *COLUMNS)).encode("cp1252"),
            "data/left-out.yaml": LEFT_OUT.encode(),
        },
    ),
    "wide": (
        plan(2, "data/v.csv", "layout: wide\nencoding: utf-16\nmissing: refuse"),
        {"data/v.csv": "a,b,c\n5.12,5.31,5.02\n5.17,5.28,5.11\n5.09,5.35,5.07\n".encode("utf-16")},
    ),
    "workbook": (plan(3, "data/v.xlsx", "sheet: Results"), {"data/v.xlsx": workbook()}),
    "omitted": (
        plan(4, "data/v.csv", "encoding: iso-8859-1\nbelow-limit: omit\nabove-limit: omit"),
        {"data/v.csv": simple([("a", "<5"), ("b", ">9")]).encode("latin-1")},
    ),
    "refused": (
        plan(5, "data/v.csv", "encoding: iso-8859-15\nbelow-limit: refuse\nabove-limit: refuse"),
        {"data/v.csv": simple().encode("iso-8859-15")},
    ),
    "worksheet": (
        (CONFIGS / "well-nitrite.yaml").read_text("utf-8"),
        {
            f"data/{name}": (CONFIGS / "data" / name).read_bytes()
            for name in ("well-nitrite.csv", "well-nitrite-exclusions.yaml")
        },
    ),
    "charts": (
        plan(
            6,
            "data/v.csv",
            "encoding: utf-8",
            "trend:\n  baseline: {first: 5}\n"
            "  quantities: [lot-mean, repeatability-sd, difference]\n"
            "  rules: [beyond-limits, two-of-three, four-of-five, seven-one-side, eight-one-side,\n"
            "    nine-one-side, six-rising, seven-rising, fourteen-in-turn, fifteen-within, eight-outside,\n"
            "    range-beyond-limit]\n"
            "  criteria: [{quantity: lot-mean, at-least: 4, at-most: 6, response: iron}]\n",
        ),
        {"data/v.csv": simple().encode()},
    ),
    "charts of named lots": (
        plan(
            7,
            "data/v.csv",
            "",
            "trend: {baseline: {lots: [run-0001, run-0002, run-0003, run-0004, run-0005]}, "
            "quantities: [lot-mean], rules: [beyond-limits]}\n",
        ),
        {"data/v.csv": simple().encode()},
    ),
}


# Each definition as it was typed: every word a text.
DEFINITIONS: dict[str, dict[str, Any]] = {
    name: yaml.load(study, Loader=yaml.BaseLoader) for name, (study, _) in STUDIES.items()
}
LEFT_OUT_AS_TYPED: dict[str, Any] = yaml.load(LEFT_OUT, Loader=yaml.BaseLoader)
