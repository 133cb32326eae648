"""The files of a study: none leaves the workspace, none is taken twice, each is hashed and kept."""

import hashlib
import json
from pathlib import Path

import pytest

from assayfolio.errors import DataError, InputError
from assayfolio.study.plan import DataPlan
from assayfolio.workflow.intake import SeenFiles, folio_intake, read_intake
from assayfolio.workflow.raw_files import raw_files, read_raw_files, some_raw_file_exists
from assayfolio.workflow.workspace import Workspace
from support.workbooks import workbook
from support.workspaces import DATA, STUDY, Bench

PATTERN = STUDY.replace("data/values.csv", "data/run-*.csv")
HEAD, *ROWS = DATA.splitlines(keepends=True)
THIRDS = {f"run-{number}.csv": HEAD + "".join(ROWS[number * 3 - 3 : number * 3]) for number in (1, 2, 3)}


@pytest.fixture
def bench(tmp_path: Path) -> Bench:
    """A workspace whose study takes the files that fit a pattern."""
    made = Bench(tmp_path, PATTERN, None)
    for name, text in THIRDS.items():
        made.write(made.data.parent / name, text)
    return made


def plan(source: str, *more: str) -> DataPlan:
    """A plan with one source or several."""
    return DataPlan(source, ("y",), "g", files=(source, *more) if more else ())


def names(bench: Bench, source: str, *more: str) -> list[str]:
    """The names of the files that a plan means."""
    return [path.name for path in raw_files(Workspace(bench.root), bench.study, plan(source, *more))]


def fault(bench: Bench, source: str, *more: str) -> str:
    """The words of the first fault in finding and reading the files of a plan."""
    workspace = Workspace(bench.root)
    with pytest.raises(InputError) as caught:
        list(read_raw_files(workspace, raw_files(workspace, bench.study, plan(source, *more))))
    return str(caught.value.faults[0])


def test_a_pattern_means_the_files_that_fit_sorted_by_name(bench: Bench) -> None:
    for name in ("run-10.csv", "walk-1.csv", "run-4.csv.gz", ".run-5.csv", "run-6.CSV"):
        bench.write(bench.data.parent / name, name)
    assert names(bench, "data/run-*.csv") == ["run-1.csv", "run-10.csv", "run-2.csv", "run-3.csv"]
    assert names(bench, "data/run-?.csv") == ["run-1.csv", "run-2.csv", "run-3.csv"]
    assert names(bench, "data/*-1.csv") == ["run-1.csv", "walk-1.csv"]


def test_brackets_in_a_pattern_are_themselves(bench: Bench) -> None:
    bench.write(bench.data.parent / "run-[1].csv", "x")
    assert names(bench, "data/*[1].csv") == ["run-[1].csv"]


def test_a_list_keeps_its_order(bench: Bench) -> None:
    assert names(bench, "data/run-3.csv", "data/run-1.csv") == ["run-3.csv", "run-1.csv"]


def test_a_pattern_that_fits_no_file_is_told(bench: Bench) -> None:
    assert "data/day-*.csv: no file has a name that fits" in fault(bench, "data/day-*.csv")
    assert not some_raw_file_exists(Workspace(bench.root), bench.study, plan("data/day-*.csv"))
    assert some_raw_file_exists(Workspace(bench.root), bench.study, plan("data/run-*.csv"))


def test_a_plan_can_be_checked_before_any_of_its_files_is_there(bench: Bench) -> None:
    workspace = Workspace(bench.root)
    assert not some_raw_file_exists(workspace, bench.study, plan("data/a.csv", "data/b.csv"))
    assert some_raw_file_exists(workspace, bench.study, plan("data/a.csv", "data/run-1.csv"))
    assert "there is no such file" in fault(bench, "data/run-1.csv", "data/a.csv")


@pytest.mark.requirement("SOURCE-1")
@pytest.mark.parametrize("inside", [True, False], ids=["inside", "outside"])
def test_a_link_may_lead_about_the_workspace_but_not_out_of_it(
    bench: Bench, tmp_path_factory: pytest.TempPathFactory, inside: bool
) -> None:
    target = (bench.root if inside else tmp_path_factory.mktemp("outside")) / "real.csv"
    bench.write(target, "g,y\n")
    (bench.data.parent / "run-9.csv").symlink_to(target)
    if inside:
        assert "run-9.csv" in names(bench, "data/run-*.csv")
    else:
        assert "leads outside the workspace" in fault(bench, "data/run-*.csv")


def test_a_folder_that_links_out_of_the_workspace_is_not_listed(
    bench: Bench, tmp_path_factory: pytest.TempPathFactory
) -> None:
    outside = tmp_path_factory.mktemp("outside")
    bench.write(outside / "secret.csv", "g,y\n")
    (bench.data.parent / "more").symlink_to(outside)
    words = fault(bench, "data/more/*.csv")
    assert "leads outside the workspace" in words
    assert "secret" not in words


def test_a_link_that_leads_nowhere_or_in_a_circle_is_told(bench: Bench) -> None:
    (bench.data.parent / "run-8.csv").symlink_to("run-8.csv")
    assert "run-8.csv" in fault(bench, "data/run-*.csv")


def test_a_folder_whose_name_fits_is_no_file(bench: Bench) -> None:
    (bench.data.parent / "run-7.csv").mkdir()
    assert "run-7.csv: is not a regular file" in fault(bench, "data/run-*.csv")


def test_two_files_of_one_name_are_refused_since_a_folio_keeps_them_side_by_side(bench: Bench) -> None:
    other = bench.data.parent / "more"
    other.mkdir()
    bench.write(other / "run-1.csv", "x")
    words = fault(bench, "data/run-1.csv", "data/more/run-1.csv")
    assert "data/more/run-1.csv: has the same file name as" in words
    assert "data/run-1.csv - a folio keeps the data files side by side" in words
    bench.write(other / "Run-1.csv", "x")
    assert "differ only in case" in fault(bench, "data/run-1.csv", "data/more/Run-1.csv")


def test_a_name_that_a_folio_cannot_keep_is_refused(bench: Bench) -> None:
    bench.write(bench.data.parent / "run-%41.csv", "x")
    assert 'it holds "%"' in fault(bench, "data/run-*.csv")


def test_the_same_bytes_twice_are_refused_since_values_would_be_taken_twice(bench: Bench) -> None:
    bench.write(bench.data.parent / "run-2 copy.csv", THIRDS["run-2.csv"])
    assert "run-2.csv: holds the same bytes as" in fault(bench, "data/run-*.csv")


def test_more_than_a_thousand_files_are_refused(bench: Bench) -> None:
    folder = bench.data.parent / "many"
    folder.mkdir()
    for number in range(1001):
        (folder / f"{number}.csv").touch()
    assert "1,001 files, more than 1,000" in fault(bench, "data/many/*.csv")


@pytest.mark.requirement("RECORD-12")
def test_every_file_is_hashed_kept_and_read_back(bench: Bench) -> None:
    answer = bench("run", bench.study)
    assert answer.code == 0, answer.err
    (folio,) = (bench.runs / "TST-1").iterdir()
    for name, text in THIRDS.items():
        assert (folio / "data" / "inputs" / name).read_text() == text
    record = json.loads((folio / "data" / "run.json").read_text())
    raw = [item for item in record["inputs"] if item["role"] == "raw data"]
    assert [(item["path"], item["sha256"]) for item in raw] == [
        (f"configs/data/{name}", hashlib.sha256(text.encode()).hexdigest()) for name, text in THIRDS.items()
    ]
    again = folio_intake(folio, tuple((i["role"], i["path"], i["folio_path"]) for i in record["inputs"]))
    assert again.observations == read_intake(Workspace(bench.root), bench.study, SeenFiles()).observations
    assert bench("verify").code in (0, 5)


def test_the_findings_of_several_files_are_those_of_one(
    bench: Bench, tmp_path_factory: pytest.TempPathFactory
) -> None:
    one = Bench(tmp_path_factory.mktemp("one"))
    assert bench("run", bench.study).code == one("run", one.study).code == 0
    several, single = (
        next((made.runs / "TST-1").iterdir()) / "data" / "findings.json" for made in (bench, one)
    )
    assert several.read_bytes() == single.read_bytes()


@pytest.mark.requirement("TRAIL-2")
def test_a_run_that_is_refused_enters_the_files_that_it_saw(bench: Bench) -> None:
    bench.write(bench.data.parent / "run-2.csv", "method,sulfate\ngravimetric,x\n")
    answer = bench("run", bench.study)
    assert answer.code == 2
    assert "configs/data/run-2.csv:2:13" in answer.err
    seen = read_seen(bench)
    assert [file.path for file in seen.files if file.role == "raw data"] == [
        f"configs/data/run-{number}.csv" for number in (1, 2, 3)
    ]


def read_seen(bench: Bench) -> SeenFiles:
    """What had been read when the intake was refused."""
    seen = SeenFiles()
    with pytest.raises(DataError):
        read_intake(Workspace(bench.root), bench.study, seen)
    return seen


def test_a_workbook_is_run_and_kept(tmp_path: Path) -> None:
    rows = [line.split(",") for line in DATA.splitlines()]
    content = workbook([rows[0], *([level, float(text)] for level, text in rows[1:])])
    bench = Bench(tmp_path, STUDY.replace("values.csv", "values.xlsx"), None)
    bench.write(bench.data.with_name("values.xlsx"), content)
    answer = bench("run", bench.study)
    assert answer.code == 0, answer.err
    (folio,) = (bench.runs / "TST-1").iterdir()
    assert (folio / "data" / "inputs" / "values.xlsx").read_bytes() == content


def test_an_exclusions_file_is_hashed_and_kept_with_the_run(bench: Bench) -> None:
    entry = (
        "{row: 2, file: run-1.csv, value: '48.2', reason: cell leaked during filling, decided-by: A. Analyst"
    )
    bench.write(bench.study, PATTERN.replace("  unit:", "  exclusions: data/out.yaml\n  unit:"))
    bench.write(bench.data.with_name("out.yaml"), f"exclusions:\n  - {entry}, decided-at: 2026-03-04}}\n")
    answer = bench("run", bench.study)
    assert answer.code == 0, answer.err
    (folio,) = (bench.runs / "TST-1").iterdir()
    kept = folio / "data" / "context" / "exclusions.yaml"
    assert kept.read_bytes() == bench.data.with_name("out.yaml").read_bytes()
