"""A registered protocol that was changed, replaced or taken away is found, and named for what it is."""

import hashlib
import json
import shutil

import pytest

from support.fixed_plans import amend, amended, bench_without_data, measure, preregister


@pytest.fixture(scope="module")
def sound(tmp_path_factory):
    """A workspace with a protocol, an amendment and a run of it; to be copied, never changed."""
    bench = bench_without_data(tmp_path_factory.mktemp("sound") / "w")
    preregister(bench)
    amend(bench, amended())
    measure(bench)
    bench.run()
    return bench


@pytest.fixture
def bench(sound, tmp_path):
    """A copy of it that may be spoiled."""
    root = tmp_path / "w"
    shutil.copytree(sound.root, root)
    for path in root.rglob("*"):
        if path.is_file():
            path.chmod(0o644)
    copy = object.__new__(type(sound))
    copy.root, copy.runs = root, root / "runs"
    copy.study, copy.data = root / "configs/study.yaml", root / "configs/data/values.csv"
    return copy


def first(bench):
    return bench.runs / "TST-1/protocol-0001"


def found(bench):
    """The notes of the failed checks by number and subject."""
    answer = bench("verify", "--json")
    checks = answer.document["checks"]
    failed = {
        f"{one['number']} {one['subject']}": " | ".join(one["notes"])
        for one in checks
        if one["outcome"] == "failed"
    }
    assert answer.code == (1 if failed else 0)
    return failed


def test_a_sound_workspace_passes(bench):
    assert found(bench) == {}


@pytest.mark.parametrize("name", ["study.yaml", "plan.json", "protocol.pdf", "environment.json"])
def test_one_changed_byte_is_found(bench, name):
    path = first(bench) / "data" / name
    content = bytearray(path.read_bytes())
    content[len(content) // 2] ^= 1
    path.write_bytes(content)
    notes = found(bench)
    assert f"data/{name}" in notes["4.4 TST-1/protocol-0001"]


def test_a_protocol_rewritten_together_with_its_manifests_differs_from_the_seal(bench):
    folio = first(bench)
    path = folio / "data/study.yaml"
    old = hashlib.sha256(path.read_bytes()).hexdigest()
    path.write_bytes(path.read_bytes().replace(b"0.05", b"0.10"))
    for manifest in ("manifest-sha256.txt", "tagmanifest-sha256.txt"):
        text = (folio / manifest).read_text()
        new = hashlib.sha256((path if "tag" not in manifest else folio / "manifest-sha256.txt").read_bytes())
        text = text.replace(old, new.hexdigest())
        old = hashlib.sha256((folio / manifest).read_bytes()).hexdigest()
        (folio / manifest).write_text(text)
    notes = found(bench)
    assert "rewritten or replaced after sealing" in notes["4.10 TST-1/protocol-0001"]
    assert "4.4 TST-1/protocol-0001" not in notes


def test_one_protocol_in_the_place_of_another_is_found(bench):
    shutil.rmtree(first(bench))
    shutil.copytree(bench.runs / "TST-1/protocol-0002", first(bench))
    notes = found(bench)
    assert "protocol-0002" in notes["4.7 TST-1/protocol-0001"]
    assert "the seal in entry" in notes["4.10 TST-1/protocol-0001"]
    assert "4.11 TST-1/protocol-0001" in notes


def test_a_deleted_protocol_is_missing(bench):
    shutil.rmtree(first(bench))
    assert "deleted or moved away" in found(bench)["2.9 TST-1/protocol-0001"]


def test_a_protocol_that_nobody_registered_is_found(bench):
    shutil.copytree(first(bench), bench.runs / "TST-1/protocol-0003")
    assert "TST-1/protocol-0003: the audit trail knows nothing of it" in found(bench)["2.3 workspace"]


def test_a_run_that_claims_another_registration_is_found(bench):
    path = bench.runs / "TST-1/run-0001/data/run.json"
    record = json.loads(path.read_bytes())
    record["pre_registration"]["protocol"] = "protocol-0001"
    path.write_text(json.dumps(record))
    notes = found(bench)["3.12 TST-1/run-0001"]
    assert "does not say that protocol-0002 was in force" in notes


def test_a_protocol_taken_elsewhere_is_checked_by_itself(bench, tmp_path):
    away = tmp_path / "protocol-0001"
    shutil.copytree(first(bench), away)
    answer = bench("verify", away)
    assert answer.code == 5, answer.out
    assert "not checkable" in answer.out
    (away / "data/plan.json").write_bytes(b"{}")
    assert bench("verify", away).code == 1


def test_a_folder_that_is_no_folio_is_not_verified_as_a_protocol(bench, tmp_path):
    (tmp_path / "protocol-0009").mkdir()
    answer = bench("verify", tmp_path / "protocol-0009")
    assert answer.code == 2
    assert "is not a folio" in answer.err
