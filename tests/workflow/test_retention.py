"""Folios are kept for their time; afterwards two persons dispose of one, and its seal stays."""

import hashlib
import json
import shutil

import pytest

from assayfolio.study.laboratory import Retention
from assayfolio.workflow import retention, surroundings
from assayfolio.workflow.retention import kept_until
from assayfolio.workflow.surroundings import Surroundings
from support.workspaces import Bench

LAB = "laboratory: Invented laboratory\nwait-seconds: 1\nretention: {class: routine, years: 10}\n"
REASON = "kept ten years, listed in the register of disposals"


@pytest.fixture(scope="module")
def sealed(tmp_path_factory):
    """A workspace with a run, made under a retention of ten years."""
    bench = Bench(tmp_path_factory.mktemp("bench") / "w")
    (bench.root / "configs/lab.yaml").write_text(LAB)
    bench.run()
    return bench


@pytest.fixture
def bench(sealed, tmp_path):
    copy = Bench.__new__(Bench)
    root = tmp_path / "w"
    shutil.copytree(sealed.root, root)
    for name, value in {"root": root, "study": root / "configs/study.yaml", "runs": root / "runs"}.items():
        object.__setattr__(copy, name, value)
    return copy


@pytest.fixture
def folio(bench):
    return bench.runs / "TST-1/run-0001"


@pytest.fixture
def years_later(monkeypatch):
    """The clock of the command stands thirty years on."""
    monkeypatch.setattr(
        retention,
        "look_around",
        lambda: Surroundings("root", "host", "2061-01-01T08:00:00.000000Z", "2061-01-01T09:00:00+01:00"),
    )


@pytest.fixture
def another(monkeypatch):
    """From here on another person is at the keyboard."""

    def sit_down(name="second"):
        monkeypatch.setattr(surroundings, "account_name", lambda: name)

    return sit_down


def dispose(bench, folio, *options):
    return bench("archive", folio, "--dispose", *options, "--json")


@pytest.mark.requirement("RECORD-7")
def test_before_the_end_of_the_retention_disposal_is_refused_and_the_attempt_entered(bench, folio):
    answer = dispose(bench, folio, "--reason", REASON)
    assert answer.code == 2
    assert "is kept until" in answer.err
    assert bench.entries()[-1]["action"] == "attempt-refused"
    assert folio.is_dir()


@pytest.mark.requirement("RECORD-7")
@pytest.mark.usefixtures("years_later")
def test_one_person_proposes_and_another_disposes_and_the_tombstone_stays(bench, folio, another):
    seal = hashlib.sha256((folio / "tagmanifest-sha256.txt").read_bytes()).hexdigest()
    manifest = (folio / "manifest-sha256.txt").read_bytes()
    proposed = dispose(bench, folio, "--reason", REASON)
    assert proposed.code == 0, proposed.err
    assert folio.is_dir()
    another()
    done = dispose(bench, folio, "--confirm")
    assert done.code == 0, done.err
    assert not folio.exists()
    tombstone = bench.runs / "_laboratory/disposal-0001"
    kept = json.loads((tombstone / "data/tombstone.json").read_bytes())
    assert (kept["run"], kept["run_seal"], kept["reason"]) == ("TST-1/run-0001", seal, REASON)
    assert (kept["proposed_by"] != "second", kept["disposed_by"]) == (True, "second")
    assert (tombstone / "data/manifest-sha256.txt").read_bytes() == manifest
    assert hashlib.sha256((tombstone / "data/tagmanifest-sha256.txt").read_bytes()).hexdigest() == seal
    assert (tombstone / "data/tombstone.pdf").read_bytes().startswith(b"%PDF")


@pytest.mark.usefixtures("years_later")
def test_verification_says_what_became_of_the_folio(bench, folio, another):
    dispose(bench, folio, "--reason", REASON)
    another()
    dispose(bench, folio, "--confirm")
    answer = bench("verify", "--json")
    assert answer.code == 0, answer.out
    told = [check for check in answer.document["checks"] if check["subject"] == "TST-1/run-0001"]
    assert any("disposed of after its retention" in note for check in told for note in check["notes"])


@pytest.mark.usefixtures("years_later")
def test_a_folio_that_is_gone_without_disposal_is_still_missing(bench, folio):
    dispose(bench, folio, "--reason", REASON)
    shutil.rmtree(folio)
    assert bench("verify").code == 1


@pytest.mark.usefixtures("years_later")
def test_nobody_confirms_what_he_proposed(bench, folio):
    dispose(bench, folio, "--reason", REASON)
    answer = dispose(bench, folio, "--confirm")
    assert answer.code == 2
    assert "somebody else" in answer.err
    assert folio.is_dir()


@pytest.mark.usefixtures("years_later")
def test_nothing_is_disposed_of_that_nobody_proposed(bench, folio):
    answer = dispose(bench, folio, "--confirm")
    assert answer.code == 2
    assert folio.is_dir()


@pytest.mark.usefixtures("years_later")
def test_a_folio_that_does_not_verify_is_not_disposed_of(bench, folio):
    data = folio / "data/inputs/values.csv"
    data.chmod(0o644)
    data.write_text("changed")
    answer = dispose(bench, folio, "--reason", REASON)
    assert answer.code == 1
    assert "data/inputs/values.csv" in answer.err


@pytest.mark.usefixtures("years_later")
def test_an_interrupted_removal_is_completed(bench, folio, another, monkeypatch):
    dispose(bench, folio, "--reason", REASON)
    another()
    remove = retention._remove

    def pull_the_plug(_folio):
        raise OSError("the plug was pulled")

    monkeypatch.setattr(retention, "_remove", pull_the_plug)
    assert dispose(bench, folio, "--confirm").code == 3
    assert folio.is_dir()
    monkeypatch.setattr(retention, "_remove", remove)
    assert dispose(bench, folio, "--confirm").code == 0
    assert not folio.exists()
    assert len(list((bench.runs / "_laboratory").glob("disposal-*"))) == 1


@pytest.mark.usefixtures("years_later")
def test_without_a_retention_nothing_says_how_long_and_nothing_is_disposed_of(tmp_path):
    bench = Bench(tmp_path / "w")
    folio = bench.run()
    answer = dispose(bench, folio, "--reason", REASON)
    assert answer.code == 2
    assert "retention" in answer.err


@pytest.mark.parametrize(
    ("sealed", "years", "end"),
    [
        ("2031-03-04T10:00:00.000000Z", 10, "2041-03-04"),
        ("2028-02-29T10:00:00.000000Z", 4, "2032-02-29"),
        ("2028-02-29T10:00:00.000000Z", 10, "2038-02-28"),
        ("2096-02-29T10:00:00.000000Z", 4, "2100-02-28"),
    ],
)
def test_the_retention_ends_on_the_day_of_the_seal(sealed, years, end):
    assert kept_until(sealed, Retention("routine", years)).end == end


def test_the_longer_of_two_retentions_counts():
    longer, shorter = Retention("study", 30), Retention("routine", 10)
    for order in ((longer, shorter), (shorter, longer)):
        assert kept_until("2031-03-04T10:00:00.000000Z", *order).retention == longer
    assert kept_until("2031-03-04T10:00:00.000000Z", None, None) is None


@pytest.mark.parametrize(
    "text", ["{class: routine}", "{years: 10}", "{class: routine, years: 0}", "ten years"]
)
def test_a_faulty_retention_is_refused_with_its_place(tmp_path, text):
    bench = Bench(tmp_path / "w")
    (bench.root / "configs/lab.yaml").write_text(f"laboratory: Invented\nretention: {text}\n")
    answer = bench("check", bench.study)
    assert answer.code == 2
    assert "lab.yaml:2" in answer.err


@pytest.mark.requirement("RECORD-6")
def test_a_restored_backup_gets_a_dated_record(bench):
    answer = bench("verify", "--all", "--restored", "backup of 2031-03-04, tape 12", "--json")
    assert answer.code == 0, answer.err
    assert answer.document["restored_from"] == "backup of 2031-03-04, tape 12"
    record = bench.runs / "_laboratory/restore-0001"
    assert json.loads((record / "data/sweep.json").read_bytes())["restored_from"].endswith("tape 12")
    assert bench("verify").code == 0
