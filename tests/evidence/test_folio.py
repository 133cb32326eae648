import errno
import fcntl
import os
import shutil
import stat
import subprocess
import tempfile
from pathlib import Path

import bagit
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from assayfolio.canonical import sha256_hex
from assayfolio.errors import BusyError, InputError, MachineError
from assayfolio.evidence import folio as folio_module
from assayfolio.evidence.folio import (
    folio_lock,
    is_locked,
    leftover_record,
    read_seal,
    reopen_staged,
    stage_folio,
)
from assayfolio.evidence.manifest import collisions, name_fault
from evidence.laboratory import patched_system

PAYLOAD = {
    "data/study.yaml": b"study: IRON-7\n",
    "data/inputs/Eisen (2) \u00fc 試.csv": b"method,iron\nA,1.25\n",
    "data/inputs/zero.csv": b"",
    "data/findings.json": b"{}",
}
INFO = [("Source-Organization", "Invented laboratory")]


def sha256sum(folder, manifest):
    return subprocess.run(
        ["sha256sum", "--strict", "-c", manifest], cwd=folder, capture_output=True, text=True, check=False
    )


def assert_valid_for_others(folder):
    for manifest in ("manifest-sha256.txt", "tagmanifest-sha256.txt"):
        checked = sha256sum(folder, manifest)
        assert checked.returncode == 0, checked.stdout + checked.stderr
    assert bagit.Bag(str(folder)).validate()


@pytest.mark.needs("sha256sum")
def test_sha256sum_and_bagit_agree_that_a_folio_is_whole(tmp_path):
    folio = stage_folio(tmp_path / "IRON-7", "run-0001", PAYLOAD, INFO).publish()
    assert folio == tmp_path / "IRON-7" / "run-0001"
    assert_valid_for_others(folio)
    assert bagit.Bag(str(folio)).version_info == (1, 0)


@pytest.mark.needs("sha256sum")
def test_sha256sum_and_bagit_agree_that_an_altered_folio_is_not(tmp_path):
    folio = stage_folio(tmp_path, "run-0001", PAYLOAD, INFO).publish()
    altered = folio / "data" / "findings.json"
    altered.chmod(0o644)
    altered.write_bytes(b"[]")
    assert sha256sum(folio, "manifest-sha256.txt").returncode == 1
    with pytest.raises(bagit.BagValidationError, match=r"findings\.json"):
        bagit.Bag(str(folio)).validate()


def test_the_folder_holds_exactly_the_payload_and_four_tag_files(tmp_path):
    folio = stage_folio(tmp_path, "run-0001", PAYLOAD, INFO).publish()
    there = {path.relative_to(folio).as_posix() for path in folio.rglob("*") if path.is_file()}
    tags = {"bagit.txt", "bag-info.txt", "manifest-sha256.txt", "tagmanifest-sha256.txt"}
    assert there == tags | set(PAYLOAD)
    assert (folio / "bagit.txt").read_bytes() == b"BagIt-Version: 1.0\nTag-File-Character-Encoding: UTF-8\n"
    assert (folio / "bag-info.txt").read_bytes().endswith(b"Payload-Oxum: 35.4\n")


def test_the_seal_is_the_digest_of_the_tag_manifest_and_the_same_for_the_same_content(tmp_path):
    first = stage_folio(tmp_path / "a", "run-0001", PAYLOAD, INFO)
    second = stage_folio(tmp_path / "b", "run-0002", dict(reversed(PAYLOAD.items())), INFO)
    assert first.seal == second.seal == sha256_hex((first.path / "tagmanifest-sha256.txt").read_bytes())
    assert read_seal(first.publish()) == first.seal
    other = stage_folio(tmp_path / "c", "run-0001", PAYLOAD | {"data/findings.json": b"[]"}, INFO)
    assert other.seal != first.seal


def test_a_folio_has_its_name_only_when_it_is_published(tmp_path):
    staged = stage_folio(tmp_path, "run-0001", PAYLOAD, INFO)
    assert [path.name for path in tmp_path.iterdir()] == ["run-0001.unsealed"]
    staged.publish()
    assert [path.name for path in tmp_path.iterdir()] == ["run-0001"]


def test_files_are_read_only_while_sign_off_can_still_be_added_beside_the_payload(tmp_path):
    folio = stage_folio(tmp_path, "run-0001", PAYLOAD, INFO).publish()
    for path in folio.rglob("*"):
        if path.is_file():
            assert stat.S_IMODE(path.stat().st_mode) & 0o222 == 0
    (folio / "sign-off").mkdir()
    assert bagit.Bag(str(folio)).validate()


def test_every_file_and_every_folder_is_durable_before_the_folio_gets_its_name(tmp_path):
    (tmp_path / "IRON-7").mkdir()
    synced = []

    def before(name, arguments):
        if name == "fsync":
            synced.append(str(Path(f"/proc/self/fd/{arguments[0]}").readlink()))
        elif name == "rename":
            synced.append("rename")

    with patched_system(before):
        stage_folio(tmp_path / "IRON-7", "run-0001", PAYLOAD, INFO).publish()
    staging = tmp_path / "IRON-7" / "run-0001.unsealed"
    folders = {staging, staging / "data", staging / "data" / "inputs"}
    files = {staging / path for path in PAYLOAD} | {staging / "tagmanifest-sha256.txt"}
    named = synced.index("rename")
    assert {str(path) for path in folders | files} <= set(synced[:named])
    last_file = max(synced.index(str(path)) for path in files)
    for folder in folders:
        assert str(folder) in synced[last_file:named]
    assert synced[named + 1 :] == [str(tmp_path / "IRON-7")]


@pytest.mark.parametrize(
    ("path", "words"),
    [
        ("study.yaml", "not inside data/"),
        ("data", "not inside data/"),
        ("data/", 'the part ""'),
        ("data/../study.yaml", r'the part "\.\."'),
        ("/data/study.yaml", "absolute path"),
        ("data/a\\b", "which tools that check folders read differently"),
        ("data/50%.csv", "which tools that check folders read differently"),
        ("data/a\nb", "unprintable character"),
        ("data/ a", "begins or ends with a blank"),
        ("data/STUDY.yaml", "differ only in case"),
        ("data/inputs", "needs a folder there"),
    ],
)
def test_names_that_cannot_be_kept_are_refused_before_anything_is_written(tmp_path, path, words):
    with pytest.raises(InputError, match=words):
        stage_folio(tmp_path / "IRON-7", "run-0001", PAYLOAD | {path: b"x"}, INFO)
    assert list(tmp_path.iterdir()) == []


@pytest.mark.requirement("RECORD-3")
@pytest.mark.parametrize("taken", ["run-0001", "run-0001.unsealed"])
def test_nothing_is_written_over_what_is_there(tmp_path, taken):
    (tmp_path / taken).mkdir()
    with pytest.raises(MachineError, match=rf"{taken}: it exists already"):
        stage_folio(tmp_path, "run-0001", PAYLOAD, INFO)
    assert list((tmp_path / taken).iterdir()) == []


def test_a_name_taken_after_staging_is_not_overwritten_either(tmp_path):
    staged = stage_folio(tmp_path, "run-0001", PAYLOAD, INFO)
    (tmp_path / "run-0001").mkdir()
    with pytest.raises(MachineError, match="exists already"):
        staged.publish()


def test_a_file_that_reads_back_differently_is_not_sealed(tmp_path, monkeypatch):
    read = folio_module.read_regular
    monkeypatch.setattr(folio_module, "read_regular", lambda path: read(path).replace(b"IRON", b"IRUN"))
    with pytest.raises(MachineError, match=r"study\.yaml: it does not read back as it was written"):
        stage_folio(tmp_path, "run-0001", PAYLOAD, INFO)


def test_a_file_that_somebody_adds_while_it_is_staged_is_noticed(tmp_path, monkeypatch):
    original = folio_module._read_back

    def read_back(staging, contents):
        (staging / "data" / "z").write_bytes(b"")
        original(staging, contents)

    monkeypatch.setattr(folio_module, "_read_back", read_back)
    with pytest.raises(MachineError, match=r"data/z: it does not read back"):
        stage_folio(tmp_path, "run-0001", PAYLOAD, INFO)


@pytest.mark.requirement("RERUN-7")
def test_a_full_disk_is_told_with_the_file_it_struck(tmp_path, monkeypatch):
    def refuse(*_):
        raise OSError(errno.ENOSPC, "full")

    with monkeypatch.context() as full:
        full.setattr(os, "write", refuse)
        with pytest.raises(MachineError, match=r"findings\.json: could not write the file: the disk is full"):
            stage_folio(tmp_path, "run-0001", PAYLOAD, INFO)
    # The folio that tells of the failure can be staged in its place.
    assert list(tmp_path.iterdir()) == []
    stage_folio(tmp_path, "run-0001", {"data/failure.txt": b"the disk was full"}, INFO).publish()


def test_a_folder_that_is_no_folio_has_no_seal(tmp_path):
    for path in (tmp_path, tmp_path / "absent"):
        with pytest.raises(InputError, match="is not a folio"):
            read_seal(path)


class TestAFolioLeftInStaging:
    def test_is_reopened_where_it_is_complete(self, tmp_path):
        staged = stage_folio(tmp_path, "run-0001", PAYLOAD, INFO)
        assert reopen_staged(tmp_path, "run-0001") == staged
        assert reopen_staged(tmp_path, "run-0002") is None

    @pytest.mark.parametrize("path", [*PAYLOAD, "bagit.txt", "manifest-sha256.txt", "tagmanifest-sha256.txt"])
    def test_is_not_reopened_where_a_file_is_missing(self, tmp_path, path):
        staged = stage_folio(tmp_path, "run-0001", PAYLOAD, INFO)
        (staged.path / path).unlink()
        assert reopen_staged(tmp_path, "run-0001") is None

    def test_is_not_reopened_where_a_file_was_added_or_changed(self, tmp_path):
        staged = stage_folio(tmp_path, "run-0001", PAYLOAD, INFO)
        (staged.path / "data" / "z").write_bytes(b"")
        assert reopen_staged(tmp_path, "run-0001") is None
        (staged.path / "data" / "z").unlink()
        (staged.path / "bagit.txt").chmod(0o644)
        (staged.path / "bagit.txt").write_bytes(b"x")
        assert reopen_staged(tmp_path, "run-0001") is None

    def test_is_recorded_by_count_and_digest_of_its_files(self, tmp_path):
        assert leftover_record(tmp_path, "run-0001") == {"found": "nothing"}
        staged = stage_folio(tmp_path, "run-0001", PAYLOAD, INFO)
        before = leftover_record(tmp_path, "run-0001")
        assert (before["found"], before["files"]) == ("staging folder", 8)
        (staged.path / "data" / "findings.json").unlink()
        assert leftover_record(tmp_path, "run-0001")["files_sha256"] != before["files_sha256"]


class TestTheLockOfAFolio:
    def test_is_seen_while_it_is_held_and_leaves_nothing(self, tmp_path):
        assert not is_locked(tmp_path, "run-0001")
        with folio_lock(tmp_path, "run-0001"):
            assert is_locked(tmp_path, "run-0001")
            assert not is_locked(tmp_path, "run-0002")
        assert not is_locked(tmp_path, "run-0001")
        assert list(tmp_path.iterdir()) == []

    def test_cannot_be_taken_twice(self, tmp_path):
        with (
            folio_lock(tmp_path, "run-0001"),
            pytest.raises(BusyError, match=r"holds \.run-0001\.lock"),
            folio_lock(tmp_path, "run-0001"),
        ):
            pass

    def test_whose_file_its_holder_removed_meanwhile_is_taken_on_a_new_file(self, tmp_path, monkeypatch):
        """Else two runs would each hold a lock, one of them on a file that nobody can see."""
        lock, ending = fcntl.flock, iter([lambda: (tmp_path / ".run-0001.lock").unlink()])

        def flock_just_after_the_holder_ended(descriptor, how):
            next(ending, lambda: None)()
            lock(descriptor, how)

        monkeypatch.setattr(fcntl, "flock", flock_just_after_the_holder_ended)
        with folio_lock(tmp_path, "run-0001"):
            assert is_locked(tmp_path, "run-0001")

    def test_of_a_killed_process_counts_for_nothing(self, tmp_path):
        (tmp_path / ".run-0001.lock").write_bytes(b"")
        assert not is_locked(tmp_path, "run-0001")
        with folio_lock(tmp_path, "run-0001"):
            assert is_locked(tmp_path, "run-0001")


def name_parts():
    return st.text(min_size=1, max_size=12).filter(lambda part: "/" not in part and name_fault(part) is None)


@pytest.mark.needs("sha256sum")
@settings(max_examples=40)
@given(
    st.dictionaries(
        st.lists(name_parts(), min_size=1, max_size=3).map("/".join),
        st.binary(max_size=40),
        min_size=1,
        max_size=6,
    )
)
def test_any_names_and_bytes_that_are_accepted_stand_the_test_of_others(contents):
    payload = {f"data/{path}": content for path, content in contents.items()}
    with tempfile.TemporaryDirectory() as folder:
        if collisions(payload):
            with pytest.raises(InputError):
                stage_folio(Path(folder), "run-0001", payload, INFO)
            return
        folio = stage_folio(Path(folder), "run-0001", payload, INFO).publish()
        for path, content in payload.items():
            assert (folio / path).read_bytes() == content
        assert_valid_for_others(folio)
        shutil.rmtree(folio)
