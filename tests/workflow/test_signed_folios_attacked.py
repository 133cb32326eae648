"""What is done to a signed folio, its records or its whole workspace: `verify` finds it and names it."""

import json
import shutil
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import pytest

from assayfolio.canonical import canonical_bytes
from assayfolio.evidence.keyring import pem_text
from support.signers import (
    checks,
    copied,
    laboratory_that_signs,
    new_laboratory,
    sign_by_all,
)
from support.staff import as_account
from support.workspaces import Bench, command

RUN = "TST-1/run-0001"


@pytest.fixture(scope="module")
def approved(tmp_path_factory: pytest.TempPathFactory) -> Bench:
    """A run that everybody has signed, and a second one that nobody has."""
    bench = laboratory_that_signs(tmp_path_factory.mktemp("approved") / "w")
    for _ in range(2):
        assert as_account(bench, "ann", "run", bench.study).code == 0
    sign_by_all(bench, RUN)
    return bench


@dataclass(frozen=True)
class Attack:
    """What is done in `sign-off/`, which check finds it, and a part of its words."""

    make: Callable[[Path], object]
    number: str
    words: str


def cut_last(folder: Path) -> None:
    """Take the last signature out of the PDF: the file ends where the second signature left it."""
    record = json.loads((folder / "2-reviewer.json").read_bytes())
    report = (folder / "report.pdf").read_bytes()
    replace(folder / "report.pdf", report[: record["pdf"]["bytes"]])


def cut_last_with_record(folder: Path) -> None:
    cut_last(folder)
    for path in folder.glob("3-*"):
        path.unlink()


def replace(path: Path, content: bytes) -> None:
    path.unlink(missing_ok=True)
    path.write_bytes(content)


def edit_record(folder: Path, **changes: str) -> None:
    path = folder / "3-approver.json"
    replace(path, canonical_bytes({**json.loads(path.read_bytes()), **changes}))


def with_update(folder: Path) -> None:
    report = (folder / "report.pdf").read_bytes()
    replace(folder / "report.pdf", report + b"1 0 obj\n<<>>\nendobj\n")


ATTACKS = {
    "the last signature is cut off": Attack(cut_last, "5.2", "has no signature in the report"),
    "the last signature is cut off with its record": Attack(cut_last_with_record, "5.1", "missing"),
    "the whole folder is removed": Attack(shutil.rmtree, "5.1", "missing: sign-off/report.pdf"),
    "the signed report is removed": Attack(lambda f: (f / "report.pdf").unlink(), "5.1", "missing"),
    "the signed report is the sealed one": Attack(
        lambda f: replace(f / "report.pdf", (f.parent / "data/report.pdf").read_bytes()),
        "5.2",
        "has no signature in the report",
    ),
    "a record is removed": Attack(lambda f: (f / "2-reviewer.json").unlink(), "5.2", "has no record"),
    "a record names another person": Attack(
        lambda f: edit_record(f, person="D. Dorn"), "5.3", "the record says 'D. Dorn'"
    ),
    "a record names another meaning": Attack(
        lambda f: edit_record(f, meaning="I was in the room"), "5.3", "I was in the room"
    ),
    "a record names another seal": Attack(lambda f: edit_record(f, seal="0" * 64), "5.1", "differ"),
    "a record is renamed": Attack(
        lambda f: (f / "1-author.json").rename(f / "1-approver.json"),
        "5.2",
        "its name would be 1-author.json",
    ),
    "something is added to the report": Attack(with_update, "5.2", "nothing after the last signature"),
    "a certificate beside it is another": Attack(
        lambda f: replace(f / "1-author.pem", (f / "2-reviewer.pem").read_bytes()), "5.1", "changed"
    ),
    "a file is added": Attack(lambda f: (f / "4-approver.json").write_bytes(b"{}"), "5.1", "extra file"),
    "a folder is added": Attack(lambda f: (f / "old").mkdir(), "5.1", "is no file"),
    "a link stands in the place of the report": Attack(
        lambda f: (
            (f / "report.pdf").rename(f.parents[2] / "elsewhere.pdf"),
            (f / "report.pdf").symlink_to(f.parents[2] / "elsewhere.pdf"),
        ),
        "5.1",
        "is no file",
    ),
}


@pytest.mark.requirement("SIGN-3")
@pytest.mark.parametrize("attack", ATTACKS.values(), ids=ATTACKS.keys())
def test_an_attack_on_a_signed_folio_is_found_and_it_is_not_approved(
    approved: Bench, tmp_path: Path, attack: Attack
) -> None:
    bench = copied(approved, tmp_path / "w")
    attack.make(bench.runs / RUN / "sign-off")
    found = bench("verify", bench.runs / RUN, "--json")
    assert found.code == 1
    failed = [each for each in found.document["checks"] if each["outcome"] == "failed"]
    notes = [note for each in failed if each["number"] == attack.number for note in each["notes"]]
    assert any(attack.words in note for note in notes), failed
    assert "5.4" in {each["number"] for each in failed}


@pytest.mark.requirement("SIGN-3")
def test_signatures_moved_to_another_run_are_found(approved: Bench, tmp_path: Path) -> None:
    bench = copied(approved, tmp_path / "w")
    shutil.copytree(bench.runs / RUN / "sign-off", bench.runs / "TST-1/run-0002/sign-off")
    found = bench("verify", bench.runs / "TST-1/run-0002", "--json")
    words = " ".join(note for each in found.document["checks"] for note in each["notes"])
    assert found.code == 1
    assert "extra file: sign-off/report.pdf" in words
    assert "it is not the sealed report with additions" in words
    assert "it was signed for a folder with another seal" in words


@pytest.mark.requirement("SIGN-3", "SIGN-4")
def test_a_whole_forged_laboratory_is_found_by_a_trusted_certificate(approved: Bench, tmp_path: Path) -> None:
    forged = new_laboratory(tmp_path / "w")
    assert as_account(forged, "ann", "run", forged.study).code == 0
    sign_by_all(forged, RUN)
    assert forged("verify").code == 0
    [anchor] = (approved.root / "configs/signers").glob("authority-*.pem")
    [own] = (forged.root / "configs/signers").glob("authority-*.pem")
    assert forged("verify", "--trust", own).code == 0
    answer = forged("verify", "--trust", anchor, "--json")
    assert answer.code == 1
    failed = [each for each in answer.document["checks"] if each["outcome"] == "failed"]
    assert [each["number"] for each in failed] == ["5.3", "5.3", "5.3", "5.4"]
    assert all(each["notes"][0].startswith("certificate trusted: ") for each in failed[:3])


class TestACopyElsewhere:
    """A folio that was given away, checked without the workspace."""

    @pytest.fixture
    def copy(self, approved: Bench, tmp_path: Path) -> Path:
        shutil.copytree(approved.runs / RUN, tmp_path / "given")
        return tmp_path / "given"

    @pytest.mark.requirement("SIGN-4")
    def test_is_not_believed_for_what_it_brings_along(self, copy: Path) -> None:
        found = command("verify", copy, "--json")
        trusted = [
            note
            for each in found.document["checks"]
            if each["number"] == "5.3"
            for note in each["notes"]
            if note.startswith("certificate trusted")
        ]
        assert len(trusted) == 3
        assert all("no trusted certificate was given" in note for note in trusted)

    @pytest.mark.requirement("SIGN-4")
    def test_is_checked_by_the_certificate_that_is_given(self, copy: Path, approved: Bench) -> None:
        [anchor] = (approved.root / "configs/signers").glob("authority-*.pem")
        found = command("verify", copy, "--trust", anchor, "--json")
        notes = [
            note for each in found.document["checks"] if each["number"] == "5.3" for note in each["notes"]
        ]
        assert sum(note.startswith("certificate trusted: leads to") for note in notes) == 3
        assert sum(note.startswith("not revoked when signed: not in") for note in notes) == 3
        assert [note for note in notes if note.startswith("certificate enrolled")] == [
            "certificate enrolled: no audit trail is at hand that says whom it was enrolled for"
        ] * 3

    def test_is_checked_in_the_workspace_by_the_trail(self, copy: Path, approved: Bench) -> None:
        found = approved("verify", copy, "--json")
        signed = [each for each in found.document["checks"] if each["number"].startswith("5.")]
        assert {each["outcome"] for each in signed} == {"passed"}
        assert len(signed) == 6


@pytest.mark.parametrize("content", [b"", b"no certificate", b"0\x03\x02\x01\x00"])
def test_a_file_without_certificate_is_not_trusted(approved: Bench, tmp_path: Path, content: bytes) -> None:
    (tmp_path / "anchor.pem").write_bytes(content)
    answer = approved("verify", "--trust", tmp_path / "anchor.pem")
    assert answer.code == 2


def test_who_had_the_role_then_has_signed_although_he_has_it_no_more(approved: Bench, tmp_path: Path) -> None:
    bench = copied(approved, tmp_path / "w")
    people = bench.root / "configs/people.yaml"
    people.write_text(people.read_text().replace("[reviewer]", "[runner]"))
    why = ("--reason", "B. Berg does not review any more")
    assert as_account(bench, "dot", "settings", *why).code == 0
    assert as_account(bench, "cem", "settings", "--confirm").code == 0
    assert checks(bench, "5.4")[0]["notes"] == ["approved"]


def test_pem_texts_are_those_of_other_programs(approved: Bench) -> None:
    [anchor] = (approved.root / "configs/signers").glob("authority-*.pem")
    text = anchor.read_bytes()
    assert text.startswith(b"-----BEGIN CERTIFICATE-----\n")
    assert pem_text("certificate") == b""
