"""A sweep over many folios: each is looked at, one bad one stops nothing, one summary tells of all."""

import csv
import hashlib

import pytest

from assayfolio.workflow.parallel import in_parallel
from assayfolio.workflow.sampling import sampled
from assayfolio.workflow.sweep import Sample, SweepRow, plan_sweep, rerun_sweep
from assayfolio.workflow.workspace import Workspace
from support.dying_task import double_or_die, ready
from support.resealed import contents, replace_in, writable_copy
from support.workspaces import Bench


@pytest.fixture(scope="module")
def three(tmp_path_factory):
    """A workspace with three completed runs."""
    bench = Bench(tmp_path_factory.mktemp("bench") / "w")
    for _ in range(3):
        bench.run()
    return bench


@pytest.fixture
def bench(three, tmp_path):
    """A copy of that workspace, which can be changed."""
    copy = object.__new__(Bench)
    root = writable_copy(three.root, tmp_path / "w")
    object.__setattr__(copy, "root", root)
    object.__setattr__(copy, "study", root / "configs/study.yaml")
    object.__setattr__(copy, "data", root / "configs/data/values.csv")
    object.__setattr__(copy, "runs", root / "runs")
    return copy


def outcomes(answer) -> dict[str, str]:
    return {row["folio"]: row["outcome"] for row in answer.document["rows"]}


@pytest.mark.requirement("RECORD-8")
def test_every_folio_is_computed_again_and_one_bad_one_stops_nothing(bench):
    replace_in(bench.runs / "TST-1/run-0002/data/inputs/values.csv", "48.2", "48.3")
    (bench.runs / "TST-1/run-0003/data/study.yaml").write_text("no: [plan")
    answer = bench("rerun", "--all", "--jobs", "1", "--json")
    assert answer.code == 1, answer.err
    assert outcomes(answer) == {
        "TST-1/run-0001": "identical",
        "TST-1/run-0002": "different",
        "TST-1/run-0003": "different",
    }
    record = bench.root / answer.document["record"]
    rows = list(csv.DictReader((record / "data/sweep.csv").read_text("utf-8").splitlines()))
    assert [row["folio"] for row in rows] == ["TST-1/run-0001", "TST-1/run-0002", "TST-1/run-0003"]
    assert "data/inputs/values.csv" in rows[1]["remarks"]
    assert (record / "data/sweep.pdf").read_bytes().startswith(b"%PDF")
    assert bench("verify", record).code == 0


def test_a_failed_run_is_named_and_is_no_finding(bench, monkeypatch):
    monkeypatch.setattr("assayfolio.workflow.run.evaluate", lambda *_: 1 / 0)
    assert bench("run", bench.study).code == 3
    monkeypatch.undo()
    answer = bench("rerun", "--all", "--sample", "9", "--seed", "1", "--jobs", "1", "--json")
    assert answer.code == 0, answer.out
    assert outcomes(answer)["TST-1/run-0004"] == "failed run"


@pytest.mark.slow
def test_several_processes_come_to_the_same(bench):
    one = bench("rerun", "--all", "--jobs", "1", "--json")
    two = bench("rerun", "--all", "--jobs", "2", "--json")
    assert outcomes(one) == outcomes(two) == dict.fromkeys(outcomes(one), "identical")


class PulledPlugError(Exception):
    """Somebody pulled the plug."""


def _stop_after(count):
    def told(done, _total, _row):
        if done == count:
            raise PulledPlugError

    return told


@pytest.fixture
def same_program(monkeypatch):
    """The program does not change while the test runs."""
    monkeypatch.setattr("assayfolio.workflow.sweep.program_digest", lambda: "1" * 64)


@pytest.mark.usefixtures("same_program")
def test_an_interrupted_sweep_is_taken_up_where_it_stood(bench):
    plan = plan_sweep(Workspace(bench.root), None)
    with pytest.raises(PulledPlugError):
        rerun_sweep(plan, 1, _stop_after(2))
    told = []
    rows = rerun_sweep(plan, 1, lambda done, total, row: told.append((done, total, row.subject)))
    assert [row.earlier is not None for row in rows] == [True, True, False]
    assert {row.outcome for row in rows} == {"identical"}
    assert [done for done, _, _ in told] == [1, 2, 3]
    assert list(bench.root.glob(".rerun-sweep-*")) == []


@pytest.mark.usefixtures("same_program")
def test_another_program_makes_it_another_sweep(bench, monkeypatch):
    plan = plan_sweep(Workspace(bench.root), Sample(1, 1))
    monkeypatch.setattr(
        "assayfolio.workflow.sweep._computed_again", lambda task: SweepRow(task[0], "", "identical", (), 0)
    )
    with pytest.raises(PulledPlugError):
        rerun_sweep(plan, 1, _stop_after(1))
    monkeypatch.setattr("assayfolio.workflow.sweep.program_digest", lambda: "2" * 64)
    assert [row.earlier for row in rerun_sweep(plan, 1, lambda *_: None)] == [None]


@pytest.mark.usefixtures("same_program")
def test_a_folio_with_another_seal_makes_it_another_sweep(bench):
    plan = plan_sweep(Workspace(bench.root), None)
    with pytest.raises(PulledPlugError):
        rerun_sweep(plan, 1, _stop_after(1))
    replace_in(bench.runs / "TST-1/run-0001/tagmanifest-sha256.txt", "a", "b")
    rows = rerun_sweep(plan, 1, lambda *_: None)
    assert [row.earlier for row in rows] == [None, None, None]
    assert rows[0].outcome == "different"


def test_no_folio_is_touched(bench):
    before = contents(bench.runs / "TST-1")
    bench("rerun", "--all", "--sample", "1", "--seed", "3", "--jobs", "1")
    bench("verify", "--all", "--jobs", "1")
    assert contents(bench.runs / "TST-1") == before


def test_verifying_all_says_what_verify_says_and_leaves_a_summary(bench):
    assert bench("verify", "--all", "--jobs", "1", "--json").code == bench("verify").code == 0
    (bench.runs / "TST-1/run-0002/data/report.pdf").write_bytes(b"x")
    answer = bench("verify", "--all", "--jobs", "2", "--json")
    assert answer.code == bench("verify").code == 1
    assert outcomes(answer) == {
        "TST-1/run-0001": "passed",
        "TST-1/run-0002": "failed",
        "TST-1/run-0003": "passed",
    }
    notes = next(row["notes"] for row in answer.document["rows"] if row["folio"] == "TST-1/run-0002")
    assert any("data/report.pdf" in note for note in notes)


def test_a_run_that_is_gone_fails_the_sweep(bench):
    gone = bench.runs / "TST-1/run-0002"
    gone.rename(bench.root / "elsewhere")
    answer = bench("verify", "--all", "--jobs", "1", "--json")
    assert answer.code == 1
    assert any("run-0002" in one["subject"] for one in answer.document["other_findings"])


@pytest.mark.requirement("TRAIL-13")
def test_the_same_seed_draws_the_same_sample_and_the_summary_says_how(bench):
    drawn = [
        outcomes(bench("verify", "--all", "--sample", "2", "--seed", "77", "--jobs", "1", "--json"))
        for _ in range(2)
    ]
    assert drawn[0] == drawn[1]
    assert len(drawn[0]) == 2
    answer = bench("verify", "--all", "--sample", "2", "--seed", "77", "--json", "--jobs", "1")
    assert answer.document["sample"] == {"number": 2, "seed": 77, "algorithm": "assayfolio-sample/1"}


@pytest.mark.parametrize(
    "options",
    [
        ("--sample", "2"),
        ("--seed", "1"),
        ("--all", "--sample", "2"),
        ("--all", "--sample", "0", "--seed", "1"),
    ],
)
@pytest.mark.parametrize("command", ["rerun", "verify"])
def test_half_a_sample_is_refused_in_words(command, options, three):
    answer = three(command, *options)
    assert answer.code == 2
    assert "Traceback" not in answer.err


def test_a_sample_can_be_drawn_again_with_nothing_but_a_hash():
    subjects = [f"LOT-{lot}/run-{number:04d}" for lot in range(20) for number in range(1, 6)]

    def digest(subject):
        return hashlib.sha256(f"assayfolio-sample/1\0{42}\0{subject}".encode()).hexdigest()

    by_hand = sorted(subjects, key=digest)[:10]
    assert sampled(reversed(subjects), 10, 42) == tuple(sorted(by_hand))
    assert sampled(subjects, 10, 43) != sampled(subjects, 10, 42)
    assert sampled(subjects, 1000, 42) == tuple(sorted(subjects))


def test_every_folio_is_about_as_likely_to_be_drawn():
    subjects = [f"A/run-{number:04d}" for number in range(1, 11)]
    counts = dict.fromkeys(subjects, 0)
    for seed in range(2000):
        for subject in sampled(subjects, 3, seed):
            counts[subject] += 1
    assert all(500 < count < 700 for count in counts.values())  # 600 expected, standard deviation 20


@pytest.mark.slow
def test_a_task_that_kills_its_process_leaves_the_others_done():
    done = dict(in_parallel(double_or_die, range(1, 7), 2, ready, ()))
    assert done == {1: 2, 2: 4, 3: None, 4: 8, 5: 10, 6: 12}
