"""Folios of every release are verified and computed again by this version, without a network."""

import json
import shutil
import socket
from pathlib import Path

import pytest

from assayfolio.evidence.run_checks import RUN_FAMILY, RUN_NUMBER
from assayfolio.version import VERSION
from assayfolio.workflow.records import RUN_FORMAT
from support.resealed import edit_json, rebuild_manifests, writable_copy
from support.workspaces import command

ARCHIVES = Path(__file__).resolve().parents[1] / "archives"
RELEASES = sorted(path.name for path in ARCHIVES.iterdir() if path.is_dir())


@pytest.fixture(autouse=True)
def no_network(monkeypatch):
    """Whoever opens a connection fails."""

    def refuse(*_):
        raise AssertionError("a connection was opened")

    monkeypatch.setattr(socket.socket, "connect", refuse)


@pytest.fixture(params=RELEASES)
def workspace(request, tmp_path):
    """A copy of the workspace of one release."""
    return shutil.copytree(ARCHIVES / request.param, tmp_path / request.param)


def test_this_version_has_its_archive():
    assert VERSION in RELEASES


def test_every_archive_verifies(workspace):
    answer = command("verify", "--workspace", workspace)
    assert answer.code == 0, answer.out


def test_every_archive_gives_the_same_findings(workspace):
    folio = workspace / "runs/ARC-1/run-0001"
    answer = command("rerun", folio, "--workspace", workspace, "--json")
    parts = {part["part"]: part for part in answer.document["parts"]}
    assert parts["folio"]["outcome"] == "identical"
    assert parts["findings"]["outcome"] in ("identical", "equal within the bound"), answer.document[
        "differences"
    ]


def test_every_archive_has_its_format_written_down(workspace):
    data = workspace / "runs/ARC-1/run-0001/data"
    for name, family in (
        ("run.json", "assayfolio-run/"),
        ("environment.json", "assayfolio-environment/"),
        ("findings.json", "assayfolio-findings/"),
        ("context/history.json", "assayfolio-history/"),
    ):
        assert json.loads((data / name).read_bytes())["format"].startswith(family)


def test_the_format_of_runs_is_one():
    assert f"{RUN_FAMILY}{RUN_NUMBER}" == RUN_FORMAT


@pytest.fixture
def from_the_future(tmp_path):
    """A folio as a later version might leave it: another format, another key, no manifest out of order."""
    folio = writable_copy(ARCHIVES / RELEASES[-1] / "runs/ARC-1/run-0001", tmp_path / "run-0001")
    later = f"{RUN_FAMILY}{RUN_NUMBER + 1}"

    def edit(record):
        record.clear()
        record.update(format=later, run={"study": "ARC-1"})

    edit_json(folio / "data/run.json", edit)
    text = (folio / "data/run.json").read_text("utf-8").replace(": ", ":").replace(", ", ",")
    (folio / "data/run.json").write_text(text, "utf-8")
    rebuild_manifests(folio)
    return folio, later


def test_a_folio_of_a_newer_version_is_verified_as_far_as_can_be_and_says_so(from_the_future):
    folio, later = from_the_future
    answer = command("verify", folio, "--json")
    assert answer.code == 5, answer.out
    checks = {check["number"]: check for check in answer.document["checks"]}
    assert checks["3.4"]["outcome"] == "passed"
    assert checks["3.8"]["outcome"] == "not checkable"
    assert "newer version" in checks["3.8"]["notes"][0]
    assert later in checks["3.8"]["notes"][0]


def test_a_folio_of_a_newer_version_is_not_computed_again(from_the_future, tmp_path):
    folio, later = from_the_future
    answer = command("rerun", folio, "--output", tmp_path / "audit")
    assert answer.code == 2
    assert "newer version" in answer.err
    assert later in answer.err
    assert "Traceback" not in answer.err
