"""The register of raw data as the commands show it."""

import json

import pytest

from support.workspaces import DATA, STUDY, Bench


@pytest.fixture(scope="module")
def bench(tmp_path_factory):
    """A study that ran twice, an open file, an orphan."""
    bench = Bench(tmp_path_factory.mktemp("bench") / "w")
    bench.run()
    bench.run()
    (bench.data.parent / "later.csv").write_text(DATA.replace("48.2", "48.4"))
    study = STUDY.replace("TST-1", "TST-2").replace("values.csv", "later.csv")
    bench.study.with_name("later.yaml").write_text(study)
    (bench.data.parent / "spare.csv").write_text("a,b\n")
    return bench


def test_the_register_is_shown_to_people_with_each_run_as_n_of_all(bench):
    answer = bench("trail", "--data")
    assert answer.code == 0
    lines = [line.strip() for line in answer.out.splitlines()]
    assert "used    configs/data/values.csv" in lines
    assert any("TST-1/run-0001: completed, execution 1 of 2 on these data, plan " in line for line in lines)
    assert any("TST-1/run-0002: completed, execution 2 of 2 on these data, plan " in line for line in lines)
    assert lines[-1] == "3 data files: 1 used, 1 open, 1 orphan"


def test_the_register_is_shown_to_programs(bench):
    document = bench("trail", "--data", "--json").document
    assert document["counts"] == {"used": 1, "open": 1, "orphan": 1}
    used, unseen, orphan = document["files"]
    assert [(run["execution"], run["executions"]) for run in used["runs"]] == [(1, 2), (2, 2)]
    assert used["first_seen"]["study"] == "TST-1"
    assert (unseen["named_by"], unseen["first_seen"]) == (["TST-2"], None)
    assert (orphan["path"], orphan["named_by"]) == ("configs/data/spare.csv", [])


@pytest.mark.requirement("SOURCE-7")
def test_verify_mentions_open_and_orphan_files_without_failing(bench):
    people, programs = bench("verify"), bench("verify", "--json")
    assert people.code == programs.code == 0
    assert "1 open, 1 orphan" in people.out
    assert "orphan  configs/data/spare.csv: no study definition names it" in people.out
    assert [file["state"] for file in programs.document["raw_data"]["files"]] == ["open", "orphan"]
    assert people.out.splitlines()[-1].startswith(str(programs.document["counts"]["passed"]))


def test_verify_says_nothing_of_raw_data_where_all_are_used(tmp_path):
    bench = Bench(tmp_path / "w")
    bench.run()
    assert "Raw data" not in bench("verify").out


def test_one_named_folio_is_verified_without_a_look_at_other_data(bench):
    answer = bench("verify", bench.runs / "TST-1/run-0001", "--json")
    assert answer.code == 0
    assert "raw_data" not in answer.document


def test_the_trail_itself_shows_which_file_was_received(bench):
    answer = bench("trail")
    digest = next(e["details"]["sha256"] for e in bench.entries() if e["action"] == "received")
    assert f"configs/data/values.csv, SHA-256 {digest}" in answer.out


def test_a_broken_trail_is_told_with_the_register(tmp_path):
    bench = Bench(tmp_path / "w")
    bench.run()
    trail = bench.runs / "audit-trail.jsonl"
    trail.write_bytes(trail.read_bytes().replace(b'"step":1', b'"step":9', 1))
    answer = bench("trail", "--data")
    assert answer.code == 1
    assert "not whole" in answer.err
    assert "used    configs/data/values.csv" in answer.out


def test_a_run_that_is_not_the_first_on_its_data_says_so_while_it_works(tmp_path):
    bench = Bench(tmp_path / "w")
    bench.run()
    answer = bench("run", bench.study)
    assert "execution 2 on these data" in answer.out + answer.err


def test_an_empty_workspace_has_an_empty_register(tmp_path):
    bench = Bench(tmp_path / "w", STUDY, None)
    assert bench("trail", "--data").out == "0 data files: 0 used, 0 open, 0 orphan\n"
    assert json.loads(bench("trail", "--data", "--json").out)["files"] == []
