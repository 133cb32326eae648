"""The intake register of a workspace: data are entered before they are looked into, and counted by use."""

import gzip
import hashlib
import json
import subprocess

import pytest

from assayfolio.evidence.verification import verify_lone_folios
from assayfolio.workflow import run as workflow_run
from assayfolio.workflow.rerun import rerun
from support.workspaces import DATA, STUDY, Bench


def digest_of(path):
    return hashlib.sha256(path.read_bytes()).hexdigest()


def entries_of(bench, action):
    return [entry for entry in bench.entries() if entry["action"] == action]


def history_of(folio):
    return json.loads((folio / "data/context/history.json").read_bytes())


def states(bench):
    answer = bench("trail", "--data", "--json")
    assert answer.code == 0, answer.err
    return {file["path"]: file["state"] for file in answer.document["files"]}


def pages(folio):
    return subprocess.run(
        ["pdftotext", "-layout", folio / "data/report.pdf", "-"], capture_output=True, text=True, check=True
    ).stdout


@pytest.fixture(scope="module")
def three(tmp_path_factory):
    """Three executions on one data file: two plan versions, one of them under another study as well."""
    bench = Bench(tmp_path_factory.mktemp("three") / "w")
    other = bench.study.with_name("other.yaml")
    other.write_text(STUDY.replace("TST-1", "TST-2"))
    first = bench.run()
    assert bench("run", other).code == 0
    bench.study.write_text(STUDY.replace("alpha: 0.05", "alpha: 0.01"))
    second, third = bench.run(), bench.run()
    return bench, (first, second, third)


class TestEntering:
    @pytest.mark.requirement("SOURCE-6")
    def test_a_data_file_is_entered_once_before_its_first_use(self, tmp_path):
        bench = Bench(tmp_path / "w")
        bench.run()
        bench.run()
        [received] = entries_of(bench, "received")
        assert received["seq"] < entries_of(bench, "allotted")[0]["seq"]
        assert received["subject"] == "TST-1"
        stamp = {key: received["details"][key] for key in ("at", "by")}
        assert received["details"] == {
            **stamp,
            "step": 1,
            "path": "configs/data/values.csv",
            "size": len(DATA),
            "sha256": digest_of(bench.data),
            "study": "TST-1",
        }

    def test_a_run_says_which_of_its_inputs_are_the_plan_and_the_data(self, tmp_path):
        bench = Bench(tmp_path / "w")
        bench.run()
        details = entries_of(bench, "allotted")[0]["details"]
        assert details["data"] == ["configs/data/values.csv"]
        assert details["plan"] == "configs/study.yaml"
        assert details["exclusions"] is None
        assert set(details["inputs"]) == {"configs/lab.yaml", "configs/study.yaml", "configs/data/values.csv"}

    @pytest.mark.requirement("TRAIL-2")
    def test_data_that_are_refused_are_entered_before_they_are_looked_into(self, tmp_path, monkeypatch):
        bench = Bench(tmp_path / "w", STUDY, DATA.replace("48.2", "forty"))
        seen = []
        real = workflow_run.validated

        def looked_into(*arguments):
            seen.extend(entries_of(bench, "received"))
            return real(*arguments)

        monkeypatch.setattr(workflow_run, "validated", looked_into)
        assert bench("run", bench.study).code == 2
        assert [entry["details"]["sha256"] for entry in seen] == [digest_of(bench.data)]
        assert [entry["action"] for entry in bench.entries()] == [
            "founded",
            "settings",
            "received",
            "refused",
        ]

    def test_a_file_read_before_another_is_found_missing_is_entered_too(self, tmp_path):
        bench = Bench(tmp_path / "w", STUDY.replace("data/values.csv", "[data/values.csv, data/more.csv]"))
        assert bench("run", bench.study).code == 2
        assert [entry["details"]["path"] for entry in entries_of(bench, "received")] == [
            "configs/data/values.csv"
        ]
        assert entries_of(bench, "refused")[0]["details"]["data"] == ["configs/data/values.csv"]

    def test_a_faulty_plan_lets_no_data_be_read(self, tmp_path):
        bench = Bench(tmp_path / "w", STUDY.replace("alpha: 0.05", "alpha: 5"))
        assert bench("run", bench.study).code == 2
        assert entries_of(bench, "received") == []

    def test_each_of_several_files_is_entered(self, tmp_path):
        header, *rows = DATA.splitlines(keepends=True)
        bench = Bench(tmp_path / "w", STUDY.replace("data/values.csv", "data/v-*.csv"), None)
        for name, part in (("v-1.csv", rows[:5]), ("v-2.csv", rows[5:])):
            (bench.data.parent / name).write_text("".join([header, *part]))
        folio = bench.run()
        paths = ["configs/data/v-1.csv", "configs/data/v-2.csv"]
        assert [entry["details"]["path"] for entry in entries_of(bench, "received")] == paths
        assert [item["path"] for item in history_of(folio)["data"]] == paths
        assert states(bench) == dict.fromkeys(paths, "used")

    def test_checking_a_study_enters_nothing(self, tmp_path):
        bench = Bench(tmp_path / "w")
        assert bench("check", bench.study).code == 0
        assert not bench.runs.exists()


class TestExecutions:
    @pytest.mark.requirement("PLAN-12")
    def test_the_third_of_three_runs_lists_the_plans_tried_before(self, three):
        _, folios = three
        history = history_of(folios[2])
        assert history["execution"] == 3
        assert [use["run"] for use in history["earlier"]] == ["run-0001", "run-0002"]
        plans = [digest_of(folio / "data/study.yaml") for folio in folios]
        assert [use["plan"] for use in history["earlier"]] == plans[:2]
        assert history["plan"] == plans[2] == plans[1] != plans[0]

    def test_the_run_record_counts_the_plan_versions_its_own_included(self, three):
        _, folios = three
        record = json.loads((folios[2] / "data/run.json").read_bytes())["executions"]
        assert record["number"] == 3
        assert [(version["plan"], version["runs"]) for version in record["plan_versions"]] == [
            (digest_of(folios[0] / "data/study.yaml"), 1),
            (digest_of(folios[2] / "data/study.yaml"), 2),
        ]
        assert record["also_used_by"] == ["TST-2/run-0001"]

    @pytest.mark.requirement("SOURCE-6")
    def test_the_history_says_when_the_data_were_first_seen(self, three):
        bench, folios = three
        [received] = entries_of(bench, "received")
        [data] = history_of(folios[2])["data"]
        assert (data["first_seen"], data["first_seen_seq"]) == (received["time"], received["seq"])

    @pytest.mark.requirement("PLAN-12")
    @pytest.mark.needs("pdftotext")
    def test_the_report_says_so_on_page_1_and_where_everything_comes_from(self, three):
        _, folios = three
        first, third = pages(folios[0]), pages(folios[2])
        own, other = (digest_of(folio / "data/study.yaml")[:8] for folio in (folios[2], folios[0]))
        page_1 = " ".join(third.split("\f")[0].split())
        tried = f"{own} (the present one, 1 run), {other} (1 run)"
        assert (
            f"Execution 3 on these data; plan versions tried before: {tried}; "
            "these data were also used by TST-2 run-0001" in page_1
        )
        assert "execution 3 of this study on exactly these data files" in " ".join(third.split())
        assert "execution 1 on these data" in " ".join(first.split("\f")[0].split())
        assert "tried before" not in first

    @pytest.mark.slow
    def test_a_report_with_a_history_renders_again_to_the_same_bytes(self, three):
        _, folios = three
        for folio in folios:
            again = rerun(folio, verify_lone_folios([folio]).outcomes)
            assert {part.outcome for part in again.parts} == {"identical"}

    @pytest.mark.requirement("CHANGE-1")
    def test_a_failed_run_counts_and_keeps_its_history(self, tmp_path, monkeypatch):
        def fail(*_):
            raise OSError("the disk is on fire")

        bench = Bench(tmp_path / "w")
        with monkeypatch.context() as patched:
            patched.setattr(workflow_run, "evaluate", fail)
            assert bench("run", bench.study).code == 3
        assert history_of(bench.runs / "TST-1/run-0001")["execution"] == 1
        history = history_of(bench.run())
        assert history["execution"] == 2
        assert [use["outcome"] for use in history["earlier"]] == ["failed"]
        assert bench("verify").code == 0

    @pytest.mark.requirement("CHANGE-1")
    def test_corrected_data_begin_a_new_count_and_the_first_stay_known(self, tmp_path):
        bench = Bench(tmp_path / "w")
        bench.run()
        bench.data.write_text(DATA.replace("48.2", "48.3"))
        history = history_of(bench.run())
        assert (history["execution"], history["earlier"], history["also_used_by"]) == (1, [], [])
        [old, new] = bench("trail", "--data", "--json").document["files"]
        assert old["state"] == new["state"] == "used"
        assert "changed since" in old["notes"][0]
        assert new["notes"] == []


class TestStates:
    def test_a_file_put_beside_the_others_and_named_by_no_study_is_an_orphan(self, tmp_path):
        bench = Bench(tmp_path / "w")
        bench.run()
        (bench.data.parent / "deep").mkdir()
        (bench.data.parent / "deep" / "second.csv").write_text(DATA)
        (bench.data.parent / "third.csv.gz").write_bytes(gzip.compress(b"a,b\n"))
        assert states(bench) == {
            "configs/data/values.csv": "used",
            "configs/data/third.csv.gz": "orphan",
        }, "a copy of known bytes is no file of its own"

    def test_hidden_files_links_and_definitions_are_no_data(self, tmp_path):
        bench = Bench(tmp_path / "w")
        (bench.data.parent / ".gitkeep").write_text("")
        (bench.data.parent / "latest.csv").symlink_to(bench.data)
        assert states(bench) == {"configs/data/values.csv": "open"}

    def test_a_data_file_reached_through_a_link_is_known_by_where_it_lies(self, tmp_path):
        bench = Bench(tmp_path / "w", STUDY, None)
        real = bench.data.with_name("export-17.csv")
        real.write_text(DATA)
        bench.data.symlink_to(real)
        assert states(bench) == {"configs/data/export-17.csv": "open"}
        bench.run()
        assert states(bench) == {"configs/data/export-17.csv": "used"}

    def test_an_exclusions_file_is_no_raw_data_file(self, tmp_path):
        study = STUDY.replace("  factor:", "  exclusions: data/left-out.yaml\n  factor:")
        bench = Bench(tmp_path / "w", study)
        (bench.data.parent / "left-out.yaml").write_text("exclusions: []\n")
        assert states(bench) == {"configs/data/values.csv": "open"}

    def test_a_refused_file_is_open_and_an_orphan_once_it_is_replaced(self, tmp_path):
        bench = Bench(tmp_path / "w", STUDY, DATA.replace("48.2", "forty"))
        assert bench("run", bench.study).code == 2
        assert states(bench) == {"configs/data/values.csv": "open"}
        bench.data.write_text(DATA)
        bench.run()
        files = bench("trail", "--data", "--json").document["files"]
        assert [file["state"] for file in files] == ["orphan", "used"]
        assert files[0]["notes"][0].startswith("changed since")
        assert [len(file["refusals"]) for file in files] == [1, 0]

    def test_a_definition_that_cannot_be_read_is_named_because_what_it_names_is_not_known(self, tmp_path):
        bench = Bench(tmp_path / "w", "study: [")
        answer = bench("trail", "--data")
        assert answer.code == 0
        assert "orphan  configs/data/values.csv" in answer.out
        assert "configs/study.yaml cannot be read as a study definition" in answer.out

    def test_data_outside_the_workspace_are_not_looked_at(self, tmp_path):
        (tmp_path / "secret.csv").write_text(DATA)
        bench = Bench(tmp_path / "w", STUDY, None)
        bench.data.symlink_to(tmp_path / "secret.csv")
        assert states(bench) == {}
