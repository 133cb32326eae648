"""A folio explains itself: its text and its script, with ordinary tools and nothing of this program."""

import json
import re
import shutil
import subprocess
import sys

import pytest

from support.resealed import contents, rebuild_manifests, replace_in, restate_digests, writable_copy
from support.workspaces import Bench


@pytest.fixture(scope="module")
def bench(tmp_path_factory):
    """A workspace with two runs, so that the trail goes on behind the first."""
    bench = Bench(tmp_path_factory.mktemp("bench") / "w")
    bench.run()
    bench.run()
    return bench


@pytest.fixture
def copy(bench, tmp_path):
    return writable_copy(bench.runs / "TST-1/run-0001", tmp_path / "copy")


def script(folio, *trails):
    """Run the folio's own script without this program and without any installed package."""
    return subprocess.run(
        [sys.executable, "-I", "-S", folio / "data/check_folio.py", *trails],
        cwd=folio,
        capture_output=True,
        text=True,
        check=False,
    )


def test_an_untouched_folio_agrees_and_nothing_is_written_into_it(copy):
    before = contents(copy)
    answer = script(copy)
    assert answer.returncode == 0, answer.stdout + answer.stderr
    assert "DIFFERS" not in answer.stdout
    assert contents(copy) == before


def test_the_analysis_of_variance_follows_from_the_exact_sums(copy):
    f = json.loads((copy / "data/findings.json").read_bytes())["responses"]["sulfate"]["anova"]["f"]
    assert f"agrees   sulfate: F = {f!r}" in script(copy).stdout


def test_the_whole_trail_vouches_for_lines_and_seal(bench, copy):
    answer = script(copy, bench.runs / "audit-trail.jsonl")
    assert answer.returncode == 0, answer.stdout
    head = json.loads((bench.runs / "audit-trail.head").read_bytes())
    assert f"entry {head['seq']}, {head['sha256']}" in answer.stdout


def test_lines_from_the_first_entry_of_the_run_on_are_enough(bench, copy, tmp_path):
    first = (copy / "data/trail.jsonl").read_bytes().split(b"\n")[0]
    lines = (bench.runs / "audit-trail.jsonl").read_bytes().split(b"\n")
    later = tmp_path / "later.jsonl"
    later.write_bytes(b"\n".join(lines[lines.index(first) :]))
    assert script(copy, later).returncode == 0


CHANGES = {
    "a digit of the data": lambda c: replace_in(c / "data/inputs/values.csv", "48.2", "48.3"),
    "a number of the findings": lambda c: replace_in(c / "data/findings.json", '"f":', '"f":1'),
    "a word of the trail": lambda c: replace_in(c / "data/trail.jsonl", "computed", "computer"),
    "a file gone": lambda c: (c / "data/report.pdf").unlink(),
    "a digest of the list": lambda c: replace_in(c / "manifest-sha256.txt", "a", "b"),
}


@pytest.mark.parametrize("change", CHANGES)
def test_a_change_shows(change, copy):
    CHANGES[change](copy)
    answer = script(copy)
    assert answer.returncode == 1
    assert "DIFFERS" in answer.stdout


def test_rebuilt_lists_show_against_the_trail(bench, copy):
    replace_in(copy / "data/inputs/values.csv", "48.2", "48.3")
    restate_digests(copy)
    rebuild_manifests(copy)
    assert script(copy).returncode == 0  # by itself the folder cannot know
    answer = script(copy, bench.runs / "audit-trail.jsonl")
    assert answer.returncode == 1
    assert "DIFFERS  the seal of TST-1/run-0001" in answer.stdout


def test_a_cut_line_of_the_trail_shows(bench, copy, tmp_path):
    lines = (bench.runs / "audit-trail.jsonl").read_bytes().splitlines(keepends=True)
    cut = tmp_path / "cut.jsonl"
    cut.write_bytes(b"".join(lines[:4] + lines[5:]))
    answer = script(copy, cut)
    assert answer.returncode == 1
    assert "DIFFERS  cut.jsonl" in answer.stdout


@pytest.mark.needs("sha256sum")
def test_the_commands_of_the_text_work_as_they_stand(copy):
    text = (copy / "data/READ-ME-FIRST.txt").read_text("utf-8")
    for command in ("sha256sum -c manifest-sha256.txt", "sha256sum -c tagmanifest-sha256.txt"):
        assert command in text
        outcome = subprocess.run(command.split(), cwd=copy, capture_output=True, text=True, check=False)
        assert outcome.returncode == 0, outcome.stdout
        assert "FAILED" not in outcome.stdout


def test_the_text_names_only_files_that_are_there(copy):
    text = (copy / "data/READ-ME-FIRST.txt").read_text("utf-8")
    named = set(re.findall(r"data/[a-z_.-]+[a-z]", text))
    assert len(named) > 8
    missing = [name for name in named if not (copy / name).exists()]
    assert missing == []


def test_the_text_is_short_and_narrow_enough_to_be_read(copy):
    lines = (copy / "data/READ-ME-FIRST.txt").read_text("utf-8").splitlines()
    assert len(lines) < 90
    assert max(map(len, lines)) <= 115


def test_a_failed_run_explains_itself_too(tmp_path, monkeypatch):
    bench = Bench(tmp_path / "w")
    monkeypatch.setattr("assayfolio.workflow.run.evaluate", lambda *_: 1 / 0)
    assert bench("run", bench.study).code == 3
    folio = bench.runs / "TST-1/run-0001"
    shutil.copytree(folio, tmp_path / "copy")
    answer = script(tmp_path / "copy", bench.runs / "audit-trail.jsonl")
    assert answer.returncode == 0, answer.stdout + answer.stderr
