"""The crate of a run: valid by the published shapes, and saying what the folio's other records say."""

import json
import shutil
import subprocess
import sys
from pathlib import Path
from typing import Any
from urllib.parse import unquote

import pytest

from assayfolio.evidence.crate import CrateFacts, KeptFile, crate_bytes
from support import validate_crates
from support.workspaces import DATA, STUDY, Bench

ODD_NAME = "Werte Nr. 1 (März) #2.csv"
# The laboratory and the program have no address on the web to give; the third check of the profile looks at
# the class SoftwareApplication itself instead of the programs.
WITHOUT_ADDRESS = {"process-run-crate-0.5_3.2", "ro-crate-1.1_31.2", "process-run-crate-0.5_5.1"}


def validated(tmp_path: Path, severity: str, *crates: Path) -> list[list[tuple[str, str]]]:
    """Check and message of each issue of each crate."""
    command = [sys.executable, validate_crates.__file__, tmp_path, severity, *crates]
    outcome = subprocess.run(command, capture_output=True, text=True, check=False)
    assert outcome.returncode == 0, outcome.stderr
    found = json.loads(outcome.stdout.splitlines()[-1])
    return [[(check, message) for _, check, message in found[str(crate)]] for crate in crates]


@pytest.fixture(scope="module")
def bench(tmp_path_factory: pytest.TempPathFactory) -> Bench:
    """A workspace whose data file has a name that no address can hold as it is."""
    bench = Bench(
        tmp_path_factory.mktemp("crate") / "w", STUDY.replace("data/values.csv", f'"data/{ODD_NAME}"'), None
    )
    bench.write(bench.data.parent / ODD_NAME, DATA)
    return bench


@pytest.fixture(scope="module")
def payload(bench: Bench) -> Path:
    """The payload of a run."""
    return bench.run() / "data"


@pytest.fixture(scope="module")
def failed(bench: Bench, payload: Path) -> Path:
    """The payload of a run that failed."""
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr("assayfolio.workflow.run.evaluate", lambda *_: 1 // 0)
        answer = bench("run", bench.study)
    assert answer.code == 3
    return bench.runs / "TST-1/run-0002/data"


@pytest.fixture(scope="module")
def protocol(bench: Bench, payload: Path, failed: Path) -> Path:
    """The payload of a protocol."""
    answer = bench("preregister", bench.study)
    assert answer.code == 0, answer.err
    return bench.runs / "TST-1/protocol-0001/data"


def entities(payload: Path) -> dict[str, dict[str, Any]]:
    graph = json.loads((payload / "ro-crate-metadata.json").read_bytes())["@graph"]
    named = {entity["@id"]: entity for entity in graph}
    assert len(named) == len(graph)
    return named


def ids(value: Any) -> set[str]:
    return {each["@id"] for each in value}


@pytest.mark.requirement("RECORD-14")
def test_crates_of_runs_and_protocols_are_valid_by_the_published_shapes(
    tmp_path: Path, payload: Path, failed: Path, protocol: Path
) -> None:
    for issues in validated(tmp_path, "RECOMMENDED", payload, failed, protocol):
        assert {check for check, _ in issues} == WITHOUT_ADDRESS, issues


def test_the_validator_finds_a_missing_file_and_a_run_without_a_program(
    tmp_path: Path, payload: Path
) -> None:
    without_file, without_program = tmp_path / "file", tmp_path / "program"
    for copy in (without_file, without_program):
        shutil.copytree(payload, copy)
    (without_file / "findings.json").unlink()
    metadata = without_program / "ro-crate-metadata.json"
    document = json.loads(metadata.read_bytes())
    for entity in document["@graph"]:
        entity.pop("instrument", None)
    metadata.chmod(0o644)
    metadata.write_text(json.dumps(document))
    of_file, of_program = validated(tmp_path, "REQUIRED", without_file, without_program)
    assert any("findings.json" in message for _, message in of_file)
    assert [check for check, _ in of_program] == ["process-run-crate-0.5_1.1"]


@pytest.mark.requirement("RECORD-14")
@pytest.mark.parametrize("which", ["payload", "failed", "protocol"])
def test_every_file_of_the_payload_stands_in_the_crate_with_size_and_digest(
    which: str, request: pytest.FixtureRequest
) -> None:
    payload = request.getfixturevalue(which)
    manifest = (payload.parent / "manifest-sha256.txt").read_text("utf-8")
    sealed = dict(reversed(line.split("  ", 1)) for line in manifest.splitlines())
    del sealed["data/ro-crate-metadata.json"]
    crate = entities(payload)
    files = {name: entity for name, entity in crate.items() if entity["@type"] == "File"}
    assert {f"data/{unquote(name)}": entity["sha256"] for name, entity in files.items()} == sealed
    for name, entity in files.items():
        assert int(entity["contentSize"]) == (payload / unquote(name)).stat().st_size
        assert "/" in entity["encodingFormat"]
    assert ids(crate["./"]["hasPart"]) == set(files)


def test_the_odd_name_of_a_data_file_is_found_again(payload: Path) -> None:
    assert ODD_NAME in {entity.get("name") for entity in entities(payload).values()}


def test_run_plan_person_program_and_times_are_those_of_the_record(payload: Path) -> None:
    record = json.loads((payload / "run.json").read_bytes())
    crate = entities(payload)
    action = crate["#work"]
    assert action["name"] == crate["./"]["identifier"] == f"{record['study']}/{record['run']}"
    assert ids([action["agent"]]) == {f"#account-{record['actor']}"}
    assert crate[f"#account-{record['actor']}"]["identifier"] == record["actor"]
    assert crate["#laboratory"]["name"] == "Invented laboratory"
    assert action["startTime"][:23] == record["started"][:23]
    last = json.loads((payload / "trail.jsonl").read_bytes().splitlines()[-1])
    assert action["endTime"][:23] == last["time"][:23]
    inputs = {item["folio_path"].removeprefix("data/") for item in record["inputs"]}
    assert {unquote(name) for name in ids(action["object"])} == inputs
    assert {"findings.json", "report.pdf", "run.json"} <= ids(action["result"])
    assert action["actionStatus"].endswith("/CompletedActionStatus")
    assert "error" not in action


def test_the_version_of_the_program_is_that_of_the_bill_of_materials(payload: Path) -> None:
    bill = json.loads((payload / "bom.json").read_bytes())
    program = entities(payload)["#assayfolio"]
    assert program["softwareVersion"] == bill["metadata"]["component"]["version"]
    assert "bom.json" in ids(program["softwareRequirements"])


def test_a_run_that_failed_says_so_with_its_reason(failed: Path) -> None:
    action = entities(failed)["#work"]
    assert action["actionStatus"].endswith("/FailedActionStatus")
    assert action["error"] == json.loads((failed / "run.json").read_bytes())["reason"]


FACTS = CrateFacts(
    identifier="A-1/run-0001",
    title="t",
    description="d",
    laboratory="l",
    account="anna\\lab 1",
    person="A. Nalyst",
    version="1",
    started="2026-01-02T03:04:05.678901Z",
    ended="2026-01-02T03:04:06.000000Z",
    failure=None,
    inputs={"data/study.yaml": "study definition"},
    files={"data/study.yaml": KeptFile(1, "0" * 64), "data/run.json": KeptFile(2, "1" * 64)},
)


def test_the_same_facts_give_the_same_bytes_in_whatever_order_they_come() -> None:
    turned = dict(reversed(FACTS.files.items()))
    other = CrateFacts(
        **{name: getattr(FACTS, name) for name in FACTS.__slots__ if name != "files"}, files=turned
    )
    assert crate_bytes(other) == crate_bytes(FACTS)


def test_a_person_is_named_beside_the_account() -> None:
    graph = json.loads(crate_bytes(FACTS))["@graph"]
    [person] = [entity for entity in graph if entity["@type"] == "Person"]
    assert person["name"] == "A. Nalyst"
    assert person["identifier"] == "anna\\lab 1"
    assert " " not in person["@id"]
