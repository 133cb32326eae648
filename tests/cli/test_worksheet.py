"""The command that writes the sheet to measure by, and what comes of it when it is filled in."""

import csv
import hashlib
import io
import json
import subprocess
import zipfile

import pytest

from pdfa.verapdf import validate
from support.workspaces import Bench

PLAN = """\
study: WHP-204
title: Moisture of whey powder from three dryers
data:
  file: study-worksheet.xlsx
  response: moisture
  factor: dryer
  unit: g/100 g
  levels: [north, "-20", "=1+1"]
  replicates: 4
  order: position
measurement:
  item: {column: sample}
  operator: {column: analyst}
worksheet: {seed: 20261201, block: day, blocks: [monday, tuesday], item: WP}
alpha: 0.05
comparisons:
  - {name: all pairs of dryers, pairs: all, adjust: tukey-kramer}
"""
AS_TEXT = PLAN.replace("worksheet.xlsx", "worksheet.csv")
SUFFIXES = (".csv", ".json", ".pdf", ".xlsx")
VALUES = {"north": 3.1, "-20": 3.4, "=1+1": 3.2}


@pytest.fixture
def bench(tmp_path):
    return Bench(tmp_path / "w", study=PLAN, data=None)


def sheet(bench, suffix):
    return bench.study.with_name(f"study-worksheet{suffix}")


def written(bench):
    answer = bench("worksheet", bench.study)
    assert answer.code == 0, answer.err
    return {suffix: sheet(bench, suffix).read_bytes() for suffix in SUFFIXES}


def value(level, position):
    return round(VALUES[level] + position / 100, 2)


def fill_in_workbook(bench, exchanged=()):
    """Give every row its result; two exchanged rows say that each was measured in the other's place."""
    from openpyxl import load_workbook

    book = load_workbook(sheet(bench, ".xlsx"))
    page = book.worksheets[0]
    column = {cell.value: cell.column for cell in page[1]}
    rows = {page.cell(row, column["position"]).value: row for row in range(2, page.max_row + 1)}
    if exchanged:
        first, second = (rows[position] for position in exchanged)
        page.cell(first, column["position"]).value, page.cell(second, column["position"]).value = (
            exchanged[1],
            exchanged[0],
        )
    for row in range(2, page.max_row + 1):
        position, level = page.cell(row, column["position"]).value, page.cell(row, column["dryer"]).value
        page.cell(row, column["moisture"]).value = value(level, position)
        page.cell(row, column["analyst"]).value = "A. Analyst"
    book.save(sheet(bench, ".xlsx"))


def fill_in_text(bench, exchanged=()):
    """The same by the csv module, which knows nothing of guards."""
    target = sheet(bench, ".csv")
    rows = list(csv.DictReader(io.StringIO(target.read_text("utf-8"))))
    for row in rows:
        position = int(row["position"])
        if position in exchanged:
            row["position"] = position = sum(exchanged) - position
        row["moisture"] = value(row["dryer"].removeprefix("'"), int(position))
        row["analyst"] = "A. Analyst"
    with target.open("w", encoding="utf-8", newline="") as file:
        writer = csv.DictWriter(file, rows[0])
        writer.writeheader()
        writer.writerows(rows)


FILL_IN = [
    pytest.param(PLAN, fill_in_workbook, id="workbook"),
    pytest.param(AS_TEXT, fill_in_text, id="text"),
]


def test_four_files_stand_beside_the_study_and_are_named(bench):
    answer = bench("worksheet", bench.study)
    assert answer.code == 0, answer.err
    for suffix in SUFFIXES:
        assert sheet(bench, suffix).is_file()
        assert str(sheet(bench, suffix)) in answer.out
    assert "12 measurements at 3 levels of dryer" in answer.out
    assert sheet(bench, ".pdf").read_bytes().startswith(b"%PDF-")


def test_the_same_plan_gives_the_same_bytes_anywhere(bench, tmp_path):
    first = written(bench)
    for folder in (tmp_path / "a", tmp_path / "b"):
        folder.mkdir()
        assert bench("worksheet", bench.study, "--output", folder).code == 0
        assert {suffix: (folder / f"study-worksheet{suffix}").read_bytes() for suffix in SUFFIXES} == first
    assert hashlib.sha256(first[".csv"]).hexdigest() == json.loads(first[".json"])["files"]["csv"]


def test_the_workbook_carries_no_date(bench):
    with zipfile.ZipFile(io.BytesIO(written(bench)[".xlsx"])) as package:
        assert {part.date_time for part in package.infolist()} == {(1980, 1, 1, 0, 0, 0)}
        assert package.namelist() == sorted(package.namelist())
        parts = {name: package.read(name) for name in package.namelist()}
    assert not [name for name, content in parts.items() if b"dcterms:" in content]
    assert b"20261201" in parts["docProps/core.xml"]


def test_every_label_of_the_workbook_is_text_and_results_have_to_be_numbers(bench):
    from openpyxl import load_workbook

    book = load_workbook(io.BytesIO(written(bench)[".xlsx"]))
    (page,) = book.worksheets
    names = [cell.value for cell in page[1]]
    assert names == ["position", "day", "sample", "dryer", "replicate", "moisture", "analyst"]
    assert page.freeze_panes == "A2"
    for row in page.iter_rows(min_row=2):
        by_name = dict(zip(names, row, strict=True))
        assert {by_name[name].data_type for name in ("day", "sample", "dryer")} == {"s"}
        assert by_name["moisture"].value is by_name["analyst"].value is None
    assert {cell.value for cell in page["D"][1:]} == {"north", "-20", "=1+1"}
    (rule,) = page.data_validations.dataValidation
    assert (rule.type, str(rule.sqref), rule.errorStyle) == ("decimal", "F2:F13", "stop")


def test_other_entries_are_asked_about_where_the_study_knows_them(bench):
    from openpyxl import load_workbook

    bench.study.write_text(PLAN.replace("order: position", "order: position\n  below-limit: omit"))
    (page,) = load_workbook(io.BytesIO(written(bench)[".xlsx"])).worksheets
    assert page.data_validations.dataValidation[0].errorStyle == "warning"


def test_a_workbook_whose_sheet_the_study_names_says_on_a_second_one_where_it_is_from(bench):
    from openpyxl import load_workbook

    bench.study.write_text(PLAN.replace("  response:", "  sheet: results\n  response:", 1))
    files = written(bench)
    results, about = load_workbook(io.BytesIO(files[".xlsx"])).worksheets
    assert results.title == "results"
    facts = {row[0].value: row[1].value for row in about.iter_rows()}
    assert facts["measuring order, SHA-256"] == json.loads(files[".json"])["order_sha256"]
    assert facts["study definition, SHA-256"] == hashlib.sha256(bench.study.read_bytes()).hexdigest()


def test_labels_that_would_be_run_are_guarded_in_the_text(bench):
    text = written(bench)[".csv"].decode("utf-8")
    levels = {row["dryer"] for row in csv.DictReader(io.StringIO(text))}
    assert levels == {"north", "'-20", "'=1+1"}


def test_the_text_follows_encoding_and_decimal_mark_of_the_study(bench):
    plan = AS_TEXT.replace("north", "nörd").replace("  response:", "  encoding: iso-8859-1\n  response:", 1)
    bench.study.write_text(plan.replace("  response:", "  decimal-mark: comma\n  response:", 1), "utf-8")
    text = written(bench)[".csv"].decode("iso-8859-1")
    assert text.startswith("position;day;sample;dryer;replicate;moisture;analyst\r\n")
    assert ";nörd;" in text
    bench.study.write_text(AS_TEXT.replace("north", "nörd"), "utf-8")
    for suffix in SUFFIXES:
        sheet(bench, suffix).unlink()
    assert written(bench)[".csv"].startswith(b"\xef\xbb\xbf")


def test_a_label_that_the_encoding_lacks_is_refused_before_anything_is_written(bench):
    plan = AS_TEXT.replace("north", "Łódź").replace("  response:", "  encoding: iso-8859-1\n  response:", 1)
    bench.study.write_text(plan, "utf-8")
    answer = bench("worksheet", bench.study)
    assert answer.code == 2
    assert "'Ł'" in answer.err
    assert not any(sheet(bench, suffix).exists() for suffix in SUFFIXES)


def test_a_sheet_that_is_filled_in_is_never_replaced(bench):
    written(bench)
    fill_in_workbook(bench)
    filled, others = sheet(bench, ".xlsx").read_bytes(), sheet(bench, ".csv")
    others.unlink()
    answer = bench("worksheet", bench.study)
    assert answer.code == 2
    assert "study-worksheet.xlsx" in answer.err
    assert "--output" in answer.err
    assert sheet(bench, ".xlsx").read_bytes() == filled
    assert not others.exists(), "nothing is written where anything is refused"


def test_a_lost_file_is_written_again_and_the_others_stay(bench):
    files = written(bench)
    sheet(bench, ".pdf").unlink()
    document = bench("worksheet", bench.study, "--json").document
    assert [file["new"] for file in document["files"] if file["file"].endswith(".pdf")] == [True]
    assert sum(file["new"] for file in document["files"]) == 1
    assert written(bench) == files


def test_a_link_in_the_place_of_a_sheet_is_not_followed(bench, tmp_path):
    precious = tmp_path / "precious"
    precious.write_text("mine")
    sheet(bench, ".csv").symlink_to(precious)
    assert bench("worksheet", bench.study).code != 0
    assert precious.read_text() == "mine"
    assert sheet(bench, ".csv").is_symlink()


def test_a_folder_that_is_not_there_is_said(bench, tmp_path):
    answer = bench("worksheet", bench.study, "--output", tmp_path / "nowhere")
    assert answer.code == 2
    assert "no such folder" in answer.err


def test_a_study_without_a_worksheet_is_told_how_to_get_one(bench):
    bench.study.write_text(PLAN.replace("worksheet: {seed", "# worksheet: {seed"))
    answer = bench("worksheet", bench.study)
    assert answer.code == 2
    assert "`worksheet: {seed: 20261201}`" in answer.err
    assert not sheet(bench, ".csv").exists()


@pytest.mark.requirement("PLAN-5")
def test_the_trail_holds_the_order_and_the_digests_of_the_files(bench):
    files = written(bench)
    entry = bench.entries()[-1]
    assert (entry["action"], entry["subject"]) == ("worksheet", "WHP-204")
    record = json.loads(files[".json"])
    details = entry["details"]
    assert details["order"] == record["order_sha256"]
    assert details["study_definition"] == hashlib.sha256(bench.study.read_bytes()).hexdigest()
    assert details["files"] == {
        f"configs/study-worksheet{suffix}": hashlib.sha256(content).hexdigest()
        for suffix, content in files.items()
    }


def test_guarded_column_names_are_read_as_the_study_names_them(bench):
    plan = AS_TEXT.replace("factor: dryer", 'factor: "=dryer"')
    bench.study.write_text(plan)
    text = written(bench)[".csv"].decode("utf-8")
    assert "'=dryer" in text.splitlines()[0]
    rows = list(csv.DictReader(io.StringIO(text)))
    filled = [{**row, "moisture": f"3.{row['position']}", "analyst": "A. Analyst"} for row in rows]
    with sheet(bench, ".csv").open("w", encoding="utf-8", newline="") as file:
        writer = csv.DictWriter(file, rows[0])
        writer.writeheader()
        writer.writerows(filled)
    findings = json.loads((bench.run() / "data/findings.json").read_text())
    assert findings["deviations"] == []


def test_a_worksheet_that_cannot_be_drawn_is_refused_by_every_command(bench):
    bench.study.write_text(PLAN.replace("replicates: 4", "replicates: 4000"))
    for name in ("check", "worksheet", "run"):
        answer = bench(name, bench.study)
        assert answer.code == 2
        assert "12,000 rows" in answer.err


@pytest.mark.parametrize(("plan", "fill_in"), FILL_IN)
def test_a_worksheet_that_was_filled_in_as_planned_is_run_without_a_deviation(bench, plan, fill_in):
    bench.study.write_text(plan)
    written(bench)
    fill_in(bench)
    folio = bench.run()
    findings = json.loads((folio / "data/findings.json").read_text())
    assert findings["deviations"] == []
    (moisture,) = findings["responses"].values()
    assert [level["level"] for level in moisture["levels"]] == ["north", "-20", "=1+1"]
    assert [level["n"] for level in moisture["levels"]] == [4, 4, 4]
    assert bench("verify").code == 0


@pytest.mark.parametrize(("plan", "fill_in"), FILL_IN)
def test_a_pair_of_rows_measured_in_each_others_place_is_named(bench, plan, fill_in):
    bench.study.write_text(plan)
    text = written(bench)[".csv"].decode("utf-8")
    rows = [(int(row["position"]), row) for row in csv.DictReader(io.StringIO(text))]
    first, second = next(
        (a, b) for a, one in rows for b, other in rows if a < b and one["dryer"] != other["dryer"]
    )
    fill_in(bench, exchanged=(first, second))
    findings = json.loads((bench.run() / "data/findings.json").read_text())
    (deviation,) = findings["deviations"]
    level, label = ({at: row[key].removeprefix("'") for at, row in rows} for key in ("dryer", "sample"))
    assert deviation["what"] == (
        f"positions {first} and {second}: {level[first]} ({label[first]}) and "
        f"{level[second]} ({label[second]}) exchanged"
    )
    assert sorted(deviation["lines"]) == [first + 1, second + 1]


@pytest.mark.needs("pdftotext")
def test_the_paper_has_every_row_the_order_and_the_number_of_its_pages(bench, tmp_path):
    bench.study.write_text(PLAN.replace("replicates: 4", "replicates: 40"))
    written(bench)
    target = tmp_path / "paper.txt"
    subprocess.run(["pdftotext", "-layout", sheet(bench, ".pdf"), target], check=True)
    text = target.read_text("utf-8")
    record = json.loads(sheet(bench, ".json").read_text())
    pages = text.split("\f")[:-1]
    assert len(pages) > 2
    for number, page in enumerate(pages, start=1):
        assert f"page {number} of {len(pages)}" in page
        assert record["order_sha256"] in page
        assert "WHP-204" in page
    assert all(f"WP-{position:03d}" in text for position in range(1, 121))
    assert "=1+1" in text


@pytest.mark.needs("verapdf")
def test_the_paper_keeps_to_the_standards_of_the_report(bench):
    written(bench)
    assert validate(sheet(bench, ".pdf")) == []
