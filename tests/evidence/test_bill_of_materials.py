"""The bill of materials of a run: valid CycloneDX 1.6, naming just what the environment record names."""

import copy
import json
from pathlib import Path
from typing import Any

import pytest
from cyclonedx.schema import SchemaVersion
from cyclonedx.validation.json import JsonStrictValidator

from assayfolio.evidence.bill_of_materials import bill_bytes
from assayfolio.evidence.environment import environment_record
from support.workspaces import Bench


@pytest.fixture(scope="module")
def payload(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The payload of a run."""
    return Bench(tmp_path_factory.mktemp("bill") / "w").run() / "data"


@pytest.fixture(scope="module")
def environment(payload: Path) -> dict[str, Any]:
    """The environment record of that run."""
    loaded: dict[str, Any] = json.loads((payload / "environment.json").read_bytes())
    return loaded


@pytest.fixture(scope="module")
def bill(payload: Path) -> dict[str, Any]:
    """The bill of materials of that run."""
    loaded: dict[str, Any] = json.loads((payload / "bom.json").read_bytes())
    return loaded


def parts(bill: dict[str, Any]) -> list[dict[str, Any]]:
    return [bill["metadata"]["component"], *bill["components"]]


def digest(component: dict[str, Any]) -> str | None:
    return next((each["content"] for each in component.get("hashes", ())), None)


def told(component: dict[str, Any], name: str) -> str | None:
    named = {each["name"]: each["value"] for each in component.get("properties", ())}
    return named.get(f"assayfolio:{name}")


def strange(document: dict[str, Any]) -> object:
    return JsonStrictValidator(SchemaVersion.V1_6).validate_str(json.dumps(document))


def test_it_is_valid_by_the_published_schema(bill: dict[str, Any]) -> None:
    assert strange(bill) is None


def test_the_schema_would_refuse_a_component_without_a_type_or_with_an_unknown_key(
    bill: dict[str, Any],
) -> None:
    without, unknown = copy.deepcopy(bill), copy.deepcopy(bill)
    del without["components"][0]["type"]
    unknown["components"][0]["colour"] = "blue"
    assert strange(without) is not None
    assert strange(unknown) is not None


@pytest.mark.requirement("SUPPLY-1")
def test_packages_are_those_of_the_environment_record_both_ways(
    bill: dict[str, Any], environment: dict[str, Any]
) -> None:
    listed = {(part["name"], part.get("version"), digest(part)) for part in parts(bill) if part.get("purl")}
    # Run from a checkout, the program is no installed package; the bill names it by its source all the same.
    recorded = {
        (package["name"], package["version"], package["record_sha256"]) for package in environment["packages"]
    }
    assert listed == recorded
    assert len(recorded) == len(environment["packages"])


@pytest.mark.requirement("SUPPLY-1")
def test_everything_else_is_in_the_environment_record_too_both_ways(
    bill: dict[str, Any], environment: dict[str, Any]
) -> None:
    listed = [(part["type"], part["name"], digest(part)) for part in bill["components"] if "purl" not in part]
    interpreter, platform = environment["interpreter"], environment["platform"]
    recorded = [
        ("platform", interpreter["implementation"], interpreter["executable_sha256"]),
        ("operating-system", platform["system"], None),
        *(("library", each["file"], each["sha256"]) for each in environment["native_libraries"]["libraries"]),
        *(("file", each["file"], each["sha256"]) for each in environment["own_files"]["data"]),
    ]
    assert listed == recorded
    assert told(bill["metadata"]["component"], "source-sha256") == environment["own_files"]["source_sha256"]


def test_every_digest_says_what_it_is_the_digest_of(bill: dict[str, Any]) -> None:
    hashed = [part for part in parts(bill) if digest(part)]
    assert len(hashed) > 20
    assert all(told(part, "digest-of") for part in hashed)


@pytest.mark.requirement("SUPPLY-1")
def test_licences_are_named_and_the_packages_that_numbers_rest_on(bill: dict[str, Any]) -> None:
    by_name = {part["name"]: part for part in parts(bill)}
    assert "BSD" in by_name["numpy"]["licenses"][0]["license"]["name"]
    assert told(by_name["scipy"], "trusted-for") == "numbers"
    assert told(by_name["weasyprint"], "trusted-for") == "no number"


def test_the_same_environment_gives_the_same_bytes_and_another_one_another_serial_number() -> None:
    environment = json.loads(json.dumps(environment_record()))
    first = bill_bytes(environment)
    assert bill_bytes(environment) == first
    environment["packages"][0]["version"] = "0.0.0"
    second = json.loads(bill_bytes(environment))
    assert second["serialNumber"] != json.loads(first)["serialNumber"]


def test_what_has_no_digest_and_no_version_is_listed_without() -> None:
    environment = json.loads(json.dumps(environment_record()))
    environment["packages"] = [{"name": "bare", "version": None, "licence": None, "record_sha256": None}]
    environment["native_libraries"] = {"available": False, "reason": "not told here"}
    bill = json.loads(bill_bytes(environment))
    bare = bill["components"][0]
    assert bare["name"] == "bare"
    assert not {"version", "hashes", "licenses"} & set(bare)
    assert strange(bill) is None
