"""`data/bom.json`: what a run's environment consists of, as a CycloneDX 1.6 bill of materials.

Made from the environment record alone, so both name the same things: every package, the interpreter, the
operating system, the native libraries that were loaded and the program's own fonts, templates and schemas,
each with the digest that the record has. It tells no time, and its serial number is derived from its content:
the same environment gives the same bytes. (CycloneDX 1.6 from memory; tests hold it against the schema.)
"""

import uuid
from collections.abc import Mapping
from typing import Any
from urllib.parse import quote

from assayfolio.canonical import Json, canonical_bytes, canonical_digest
from assayfolio.version import VERSION

BOM_FILE = "data/bom.json"
SPEC_VERSION = "1.6"
PROGRAM = "assayfolio"

# The packages whose faults could change a value, a plan as read, or bytes that are hashed.
NUMBERS = frozenset({"assayfolio", "numpy", "openpyxl", "pyarrow", "pyyaml", "rfc8785", "scipy"})

_OF_RECORD = "the installed distribution's RECORD, which lists the digest of each of its files"
_OF_FILE = "the file"


def bill_bytes(environment: Mapping[str, Any]) -> bytes:
    """The bill of materials of `environment` (the record of environment.json), as canonical JSON."""
    return canonical_bytes(bill_of_materials(environment))


def bill_of_materials(environment: Mapping[str, Any]) -> Mapping[str, Json]:
    """The bill of materials as a document; components in the order of kind, name and digest."""
    packages = [_package(each) for each in environment["packages"]]
    program = next((each for each in packages if each["name"] == PROGRAM), {})
    others = [each for each in packages if each["name"] != PROGRAM]
    document: dict[str, Json] = {
        "$schema": f"http://cyclonedx.org/schema/bom-{SPEC_VERSION}.schema.json",
        "bomFormat": "CycloneDX",
        "specVersion": SPEC_VERSION,
        "version": 1,
        "metadata": {"component": _program(program, environment["own_files"])},
        "components": [
            *others,
            _interpreter(environment["interpreter"]),
            _operating_system(environment["platform"]),
            *(_native(each) for each in environment["native_libraries"].get("libraries", [])),
            *(_own_file(each) for each in environment["own_files"]["data"]),
        ],
    }
    serial = uuid.uuid5(uuid.NAMESPACE_OID, canonical_digest(document))
    return {**document, "serialNumber": f"urn:uuid:{serial}"}


def _component(kind: str, ref: str, name: str, version: str | None) -> dict[str, Json]:
    component: dict[str, Json] = {"type": kind, "bom-ref": ref, "name": name}
    if version:
        component["version"] = version
    return component


def _hashed(component: dict[str, Json], sha256: str | None, of: str) -> dict[str, Json]:
    """`component` with its digest and what that is the digest of; as it is where there is none."""
    if sha256 is None:
        return component
    described: list[Json] = [{"name": "assayfolio:digest-of", "value": of}]
    return {**component, "hashes": [{"alg": "SHA-256", "content": sha256}], "properties": described}


def _with_property(component: dict[str, Json], name: str, value: str) -> dict[str, Json]:
    before = component.get("properties", [])
    assert isinstance(before, list)
    return {**component, "properties": [*before, {"name": f"assayfolio:{name}", "value": value}]}


def _package(package: Mapping[str, Any]) -> dict[str, Json]:
    name, version = package["name"], package["version"]
    purl = f"pkg:pypi/{quote(name, safe='')}" + (f"@{quote(version, safe='')}" if version else "")
    component = _component("library", purl, name, version)
    component["purl"] = purl
    licence = package.get("licence")
    if licence:
        component["licenses"] = [{"license": {"name": licence, "acknowledgement": "declared"}}]
    component = _hashed(component, package["record_sha256"], _OF_RECORD)
    return _with_property(component, "trusted-for", "numbers" if name in NUMBERS else "no number")


def _program(component: Mapping[str, Json], own_files: Mapping[str, Any]) -> Mapping[str, Json]:
    """The program itself, with the digest of its source; `component` is empty where it runs uninstalled."""
    purl = f"pkg:pypi/{PROGRAM}@{quote(VERSION, safe='')}"
    program = {**_component("application", purl, PROGRAM, VERSION), **component, "type": "application"}
    return _with_property(program, "source-sha256", own_files["source_sha256"])


def _interpreter(interpreter: Mapping[str, Any]) -> Mapping[str, Json]:
    name = interpreter["implementation"]
    component = _component("platform", f"interpreter:{name}", name, interpreter["version"])
    return _hashed(component, interpreter["executable_sha256"], _OF_FILE)


def _operating_system(platform: Mapping[str, Any]) -> Mapping[str, Json]:
    name = platform["system"] or "unknown"
    return _component("operating-system", f"system:{name}", name, platform["kernel"])


def _native(library: Mapping[str, Any]) -> Mapping[str, Json]:
    name, digest = library["file"], library["sha256"]
    component = _component("library", f"native:{name}:{digest or 'unread'}", name, library["version"])
    return _with_property(_hashed(component, digest, _OF_FILE), "kind", "native library")


def _own_file(file: Mapping[str, Any]) -> Mapping[str, Json]:
    name = file["file"]
    return _hashed(_component("file", f"file:{name}", name, None), file["sha256"], _OF_FILE)
