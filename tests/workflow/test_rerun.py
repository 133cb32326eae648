"""An archived run computed again from its folio alone: what is the same, what is not, and where."""

import json
import os
import shutil
import subprocess

import pytest

from assayfolio.evidence.laboratory_folios import laboratory_folios
from assayfolio.evidence.trail import read_trail
from assayfolio.report.render import RenderedReport
from assayfolio.workflow import rerun as workflow_rerun
from support.resealed import (
    contents,
    edit_json,
    rebuild_manifests,
    replace_in,
    restate_digests,
    writable_copy,
)
from support.workspaces import STUDY, Bench, command, process

ELSEWHERE = {
    "another locale": {"LC_ALL": "C", "PYTHONHASHSEED": "random"},
    "another time zone, without a home": {
        "TZ": "Pacific/Apia",
        "HOME": "/nonexistent",
        "OMP_NUM_THREADS": "1",
        "OPENBLAS_NUM_THREADS": "1",
    },
}
PARTS = ["folio", "findings", "figures", "report text", "report bytes"]


@pytest.fixture(scope="module")
def bench(tmp_path_factory):
    """A workspace in which the study was run once."""
    bench = Bench(tmp_path_factory.mktemp("bench") / "w", STUDY.replace("mg/L", "µg/L"))
    bench.run()
    return bench


@pytest.fixture(scope="module")
def folio(bench):
    return bench.runs / "TST-1/run-0001"


@pytest.fixture
def copy(folio, tmp_path):
    """A copy of the folio outside the workspace, which can be changed."""
    return writable_copy(folio, tmp_path / "archive" / "a copy")


def outcomes(document) -> dict[str, str]:
    return {part["part"]: part["outcome"] for part in document["parts"]}


@pytest.mark.requirement("RERUN-1")
def test_an_untouched_folio_gives_the_same_bytes_and_is_not_touched(bench, folio):
    before = contents(folio)
    answer = bench("rerun", folio, "--json")
    assert answer.code == 0, answer.err
    assert outcomes(answer.document) == dict.fromkeys(PARTS, "identical")
    assert answer.document["outcome"] == "identical"
    assert answer.document["differences"] == []
    assert contents(folio) == before


@pytest.mark.requirement("RERUN-6")
def test_the_record_is_a_sealed_folio_of_its_own_and_verifies(bench, folio):
    answer = bench("rerun", folio, "--json")
    record = bench.root / answer.document["record"]
    kept = json.loads((record / "data/rerun.json").read_bytes())
    assert kept["run"] == "TST-1/run-0001"
    assert kept["outcome"] == "identical"
    assert (record / "data/rerun.pdf").read_bytes().startswith(b"%PDF")
    known = {one.name: one for one in laboratory_folios(read_trail(bench.runs).entries)}
    assert known[record.name].sealed.details["run"] == "TST-1/run-0001"
    assert bench("verify", record).code == 0
    assert bench("verify").code == 0


@pytest.mark.requirement("RERUN-3")
def test_what_is_not_compared_is_printed(bench, folio):
    answer = bench("rerun", folio)
    listed = answer.out[answer.out.index("Not compared:") :]
    for what in ("data/run.json", "data/environment.json", "data/context/", "data/trail.jsonl", "sign-off/"):
        assert what in listed


@pytest.mark.requirement("RERUN-1")
def test_a_lone_copy_is_computed_again_into_a_folder_of_the_auditor(copy, tmp_path):
    answer = command("rerun", copy, "--output", tmp_path / "audit", "--json")
    assert answer.code == 0, answer.err
    assert outcomes(answer.document) == dict.fromkeys(PARTS, "identical")
    assert (tmp_path / "audit/rerun-0001/data/rerun.json").is_file()
    assert command("rerun", copy, "--output", tmp_path / "audit").code == 0
    assert (tmp_path / "audit/rerun-0002").is_dir()


def test_without_workspace_and_output_nothing_is_done(copy):
    answer = command("rerun", copy)
    assert answer.code == 2
    assert "--output" in answer.err


def test_a_record_is_not_written_into_the_folio(copy):
    before = contents(copy)
    assert command("rerun", copy, "--output", copy / "data").code == 2
    assert contents(copy) == before


@pytest.mark.requirement("RERUN-2")
def test_a_changed_digit_is_found_and_every_field_that_it_moves_is_named(copy, tmp_path):
    replace_in(copy / "data/inputs/values.csv", "48.2", "48.3")
    answer = command("rerun", copy, "--output", tmp_path / "audit", "--json")
    assert answer.code == 1
    document = answer.document
    assert outcomes(document) == dict.fromkeys(PARTS, "different")
    assert any("data/inputs/values.csv" in note for note in document["parts"][0]["notes"])
    places = {one["place"]: one for one in document["differences"]}
    mean = places["/responses/sulfate/levels/0/mean"]
    assert (mean["old"], mean["kind"]) == (48.233333333333334, "exact")
    assert mean["new"] == pytest.approx(48.266666666666666)
    made = tmp_path / "audit/rerun-0001/data/made-again"
    assert (
        json.loads((made / "findings.json").read_bytes())["responses"]["sulfate"]["levels"][0]["mean"]
        == mean["new"]
    )
    assert (made / "report.pdf").is_file()


@pytest.mark.requirement("RERUN-2")
def test_a_changed_digit_with_all_manifests_rebuilt_is_found_by_the_numbers(copy, tmp_path):
    replace_in(copy / "data/inputs/values.csv", "48.2", "48.3")
    restate_digests(copy)
    rebuild_manifests(copy)
    answer = command("rerun", copy, "--output", tmp_path / "audit", "--json")
    assert answer.code == 1
    assert outcomes(answer.document)["findings"] == "different"


def test_a_folio_forged_through_and_through_is_found_by_the_trail_alone(bench, folio, copy, tmp_path):
    replace_in(copy / "data/inputs/values.csv", "48.2", "48.3")
    forged = Bench(
        tmp_path / "forger", STUDY.replace("mg/L", "µg/L"), (copy / "data/inputs/values.csv").read_bytes()
    )
    made = forged.run()
    for name in ("data/findings.json", "data/report.pdf"):
        shutil.copyfile(made / name, copy / name)
    shutil.copytree(made / "data/figures", copy / "data/figures", dirs_exist_ok=True)
    for name in ("run.json", "environment.json", "trail.jsonl", "context"):
        source, target = made / "data" / name, copy / "data" / name
        if source.is_dir():
            shutil.copytree(source, target, dirs_exist_ok=True)
        else:
            shutil.copyfile(source, target)
    rebuild_manifests(copy)
    alone = command("rerun", copy, "--output", tmp_path / "audit", "--json")
    assert outcomes(alone.document)["findings"] == "identical"
    against = bench("rerun", copy, "--json")
    assert against.code == 1
    notes = " ".join(against.document["parts"][0]["notes"])
    assert "tagmanifest-sha256.txt" in notes
    assert "the seal in entry" in notes


@pytest.mark.requirement("RERUN-4")
def test_one_unit_in_the_last_place_of_the_archived_findings_is_found(copy, tmp_path):
    replace_in(copy / "data/findings.json", '"mean":48.233333333333334', '"mean":48.23333333333334')
    restate_digests(copy)
    rebuild_manifests(copy)
    answer = command("rerun", copy, "--output", tmp_path / "audit", "--json")
    assert answer.code == 1
    (one,) = answer.document["differences"]
    assert (one["place"], one["kind"], one["within_bound"]) == (
        "/responses/sulfate/levels/0/mean",
        "exact",
        False,
    )
    assert one["about"] == "gravimetric"


def test_an_approximate_number_within_the_bound_is_listed_and_is_not_different(copy, tmp_path):
    p = json.loads((copy / "data/findings.json").read_bytes())["responses"]["sulfate"]["anova"]["p"]
    near = float(f"{p:.11e}") + 10.0 ** (int(f"{p:.11e}"[-3:]) - 11)
    replace_in(copy / "data/findings.json", f'"p":{p!r}', f'"p":{near!r}')
    restate_digests(copy)
    rebuild_manifests(copy)
    answer = command("rerun", copy, "--output", tmp_path / "audit", "--json")
    assert outcomes(answer.document)["findings"] == "equal within the bound"
    (one,) = answer.document["differences"]
    assert one["within_bound"] is True


def _another_harfbuzz(record):
    libraries = [
        {**each, "version": "99.0.0", "sha256": "0" * 64} if each["file"].startswith("libharfbuzz.") else each
        for each in record["native_libraries"]["libraries"]
    ]
    return {**record, "native_libraries": {**record["native_libraries"], "libraries": libraries}}


def test_another_renderer_may_give_other_bytes_and_text_and_figures_decide(copy, tmp_path, monkeypatch):
    now, again = workflow_rerun.environment_record, workflow_rerun.render_again
    monkeypatch.setattr(workflow_rerun, "environment_record", lambda: _another_harfbuzz(now()))
    monkeypatch.setattr(
        workflow_rerun,
        "render_again",
        lambda *given: RenderedReport(_other_bytes(again(*given).pdf), again(*given).figures),
    )
    answer = command("rerun", copy, "--output", tmp_path / "audit", "--json")
    assert answer.code == 0, answer.out
    found = outcomes(answer.document)
    assert (found["figures"], found["report text"], found["report bytes"]) == (
        "identical",
        "identical",
        "not comparable",
    )
    notes = " ".join(answer.document["parts"][-1]["notes"])
    assert "libharfbuzz" in notes
    assert "99.0.0" in notes


def test_the_same_renderer_has_to_give_the_same_bytes(copy, tmp_path, monkeypatch):
    again = workflow_rerun.render_again
    monkeypatch.setattr(
        workflow_rerun,
        "render_again",
        lambda *given: RenderedReport(_other_bytes(again(*given).pdf), again(*given).figures),
    )
    answer = command("rerun", copy, "--output", tmp_path / "audit", "--json")
    assert answer.code == 1
    found = outcomes(answer.document)
    assert (found["report text"], found["report bytes"]) == ("identical", "different")


def _other_bytes(pdf: bytes) -> bytes:
    """The same pages in another file: the identifier in the trailer is another."""
    at = pdf.rindex(b"/ID")
    return (
        pdf[:at] + pdf[at:].replace(b"a", b"b", 1)
        if b"a" in pdf[at:]
        else pdf[:at] + pdf[at:].replace(b"1", b"2", 1)
    )


def test_a_folio_of_a_newer_version_is_refused_in_words(copy, tmp_path):
    edit_json(copy / "data/run.json", lambda record: record.update(format="assayfolio-run/2"))
    rebuild_manifests(copy)
    answer = command("rerun", copy, "--output", tmp_path / "audit")
    assert answer.code == 2
    assert "newer version" in answer.err
    assert "assayfolio-run/2" in answer.err
    assert "Traceback" not in answer.err


def test_a_path_out_of_the_folio_is_not_followed(copy, tmp_path):
    (tmp_path / "secret.csv").write_text("method,sulfate\n")

    def edit(record):
        next(item for item in record["inputs"] if item["role"] == "raw data")["folio_path"] = (
            "../../secret.csv"
        )

    edit_json(copy / "data/run.json", edit)
    rebuild_manifests(copy)
    answer = command("rerun", copy, "--output", tmp_path / "audit")
    assert answer.code in (1, 2)
    assert "not a regular file of this folio" in answer.err


def test_a_link_in_place_of_data_is_not_followed(copy, tmp_path):
    data = copy / "data/inputs/values.csv"
    data.rename(tmp_path / "elsewhere.csv")
    data.symlink_to(tmp_path / "elsewhere.csv")
    answer = command("rerun", copy, "--output", tmp_path / "audit")
    assert answer.code == 1
    assert "symbolic link" in answer.err


@pytest.mark.parametrize("what", ["a file", "an empty folder", "nothing"])
def test_what_is_no_folio_is_refused_in_words(what, tmp_path):
    place = tmp_path / "place"
    if what == "a file":
        place.write_text("x")
    elif what == "an empty folder":
        place.mkdir()
    answer = command("rerun", place, "--output", tmp_path / "audit")
    assert answer.code == 2
    assert "Traceback" not in answer.err
    assert not (tmp_path / "audit").exists()


@pytest.mark.requirement("RECORD-2")
@pytest.mark.slow
@pytest.mark.parametrize("where", ELSEWHERE)
def test_a_copied_folio_gives_the_same_bytes_wherever_it_is_computed(where, copy, tmp_path):
    answer = process(
        "rerun", copy, "--output", tmp_path / "audit", "--json", cwd=tmp_path, env=ELSEWHERE[where]
    )
    assert answer.returncode == 0, answer.stderr
    assert outcomes(json.loads(answer.stdout)) == dict.fromkeys(PARTS, "identical")


@pytest.mark.needs("pdftoppm")
def test_the_record_can_be_read_on_paper(bench, folio, tmp_path):
    record = bench.root / bench("rerun", folio, "--json").document["record"]
    subprocess.run(
        ["pdftoppm", "-r", "30", "-png", record / "data/rerun.pdf", tmp_path / "page"],
        check=True,
        env=os.environ,
    )
    assert list(tmp_path.glob("page*.png"))
