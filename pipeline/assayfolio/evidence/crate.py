"""`data/ro-crate-metadata.json`: a folio told in linked data, for programs that know nothing of this one.

RO-Crate 1.1 with the profile Process Run Crate 0.5 (both from memory; tests hold the result against their
published shapes). The payload folder is the crate's root, so that its entities carry plain relative paths:
every file of the payload with its size and SHA-256, the laboratory, the person at work, the program, and one
CreateAction that ties them together. Everything in it stands elsewhere in the folio as well; it is written
last, from what the folio already holds, and the same folio gives the same bytes.
"""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from pathlib import PurePosixPath
from urllib.parse import quote

from assayfolio.canonical import Json, canonical_bytes
from assayfolio.evidence.manifest import PAYLOAD_FOLDER

CRATE_FILE = "data/ro-crate-metadata.json"
RO_CRATE = "https://w3id.org/ro/crate/1.1"
PROCESS_RUN_CRATE = "https://w3id.org/ro/wfrun/process/0.5"
PROFILE_VERSION = "0.5"

_DESCRIPTOR = "ro-crate-metadata.json"
# RO-Crate 1.1 has no word for a file's SHA-256; schema.org has (from memory).
_CONTEXT: Json = [f"{RO_CRATE}/context", {"sha256": "http://schema.org/sha256"}]
_ACTION = "#work"
_COMPLETED = "http://schema.org/CompletedActionStatus"
_FAILED = "http://schema.org/FailedActionStatus"
_REQUIREMENTS = ("data/bom.json", "data/requirements.lock")
_MEDIA_TYPES = {
    ".csv": "text/csv",
    ".gz": "application/gzip",
    ".json": "application/json",
    ".jsonl": "application/x-ndjson",
    ".lock": "text/plain",
    ".pdf": "application/pdf",
    ".svg": "image/svg+xml",
    ".tab": "text/tab-separated-values",
    ".tsv": "text/tab-separated-values",
    ".py": "text/x-python",
    ".txt": "text/plain",
    ".xlsx": "application/vnd.openxmlformats-officedocument.spreadsheetml.sheet",
    ".yaml": "application/yaml",
    ".zst": "application/zstd",
}
_DESCRIPTIONS = {
    "data/READ-ME-FIRST.txt": "How to check this folder with ordinary tools",
    "data/bom.json": "Bill of materials of the environment, CycloneDX",
    "data/check_folio.py": "Script that checks this folder with Python alone",
    "data/environment.json": "Environment of the run",
    "data/failure.txt": "Why the run failed",
    "data/findings.json": "Findings, canonical JSON",
    "data/report.pdf": "Report of the run, without signatures",
    "data/requirements.lock": "Packages that the program is installed from, with their digests",
    "data/run.json": "Record of the run",
    "data/trail.jsonl": "The run's entries of the audit trail, up to its seal",
}
_TERMS = "A record of the laboratory, without a licence: its use follows the laboratory's agreements."


@dataclass(frozen=True, slots=True)
class KeptFile:
    """A file of the payload: its number of bytes and its SHA-256."""

    size: int
    sha256: str


@dataclass(frozen=True, slots=True)
class CrateFacts:
    """What a crate is made from.

    `identifier` names the folio (WTR-017/run-0001), `title` the study; `description` says what was done.
    `person` is the name that goes with `account`, None where the laboratory has entered none. `started` and
    `ended` are times as the trail has them (RFC 3339, UTC). `failure` is the reason of a run that failed.
    `inputs` maps the payload's paths that the work began from to what they are; `files` maps all paths of
    the payload ("data/run.json") to what is kept there.
    """

    identifier: str
    title: str
    description: str
    laboratory: str
    account: str
    person: str | None
    version: str
    started: str
    ended: str
    failure: str | None
    inputs: Mapping[str, str]
    files: Mapping[str, KeptFile]


def crate_bytes(facts: CrateFacts) -> bytes:
    """The metadata file of the crate, as canonical JSON."""
    return canonical_bytes({"@context": _CONTEXT, "@graph": _graph(facts)})


def _graph(facts: CrateFacts) -> list[Json]:
    return [
        {
            "@id": _DESCRIPTOR,
            "@type": "CreativeWork",
            "about": {"@id": "./"},
            "conformsTo": {"@id": RO_CRATE},
        },
        _root(facts),
        {
            "@id": PROCESS_RUN_CRATE,
            "@type": "CreativeWork",
            "name": "Process Run Crate",
            "version": PROFILE_VERSION,
        },
        {"@id": "#terms", "@type": "CreativeWork", "name": "Terms", "description": _TERMS},
        {"@id": "#laboratory", "@type": "Organization", "name": facts.laboratory},
        {
            "@id": _person_id(facts),
            "@type": "Person",
            "name": facts.person or facts.account,
            "identifier": facts.account,
            "affiliation": {"@id": "#laboratory"},
        },
        _program(facts),
        _action(facts),
        *(_file(path, facts.files[path], facts.inputs.get(path)) for path in sorted(facts.files)),
    ]


def _root(facts: CrateFacts) -> Mapping[str, Json]:
    return {
        "@id": "./",
        "@type": "Dataset",
        "name": f"{facts.identifier}: {facts.title}",
        "description": f"Payload of the folio {facts.identifier}. {facts.description}",
        "identifier": facts.identifier,
        "datePublished": _moment(facts.ended),
        "license": {"@id": "#terms"},
        "publisher": {"@id": "#laboratory"},
        "author": {"@id": _person_id(facts)},
        "conformsTo": {"@id": PROCESS_RUN_CRATE},
        "hasPart": _named(facts.files),
        "mentions": {"@id": _ACTION},
    }


def _person_id(facts: CrateFacts) -> str:
    return f"#account-{quote(facts.account, safe='')}"


def _program(facts: CrateFacts) -> Mapping[str, Json]:
    program: dict[str, Json] = {
        "@id": "#assayfolio",
        "@type": "SoftwareApplication",
        "name": "assayfolio",
        "softwareVersion": facts.version,
    }
    needed = [path for path in _REQUIREMENTS if path in facts.files]
    if needed:
        program["softwareRequirements"] = _named(needed)
    return program


def _action(facts: CrateFacts) -> Mapping[str, Json]:
    action: dict[str, Json] = {
        "@id": _ACTION,
        "@type": "CreateAction",
        "name": facts.identifier,
        "description": facts.description,
        "startTime": _moment(facts.started),
        "endTime": _moment(facts.ended),
        "agent": {"@id": _person_id(facts)},
        "instrument": {"@id": "#assayfolio"},
        "object": _named(facts.inputs.keys() & facts.files.keys()),
        "result": _named(facts.files.keys() - facts.inputs.keys()),
        "actionStatus": _COMPLETED if facts.failure is None else _FAILED,
    }
    if facts.failure is not None:
        action["error"] = facts.failure
    return action


def _moment(time: str) -> str:
    """A time of the trail in the form that the profile asks for: milliseconds (cut), offset in numbers."""
    return f"{time[:23]}+00:00"


def _named(paths: Iterable[str]) -> list[Json]:
    return [{"@id": _place(path)} for path in sorted(paths)]


def _place(path: str) -> str:
    """A path of the payload as a relative reference from the crate's root."""
    return quote(path.removeprefix(f"{PAYLOAD_FOLDER}/"))


def _file(path: str, kept: KeptFile, role: str | None) -> Mapping[str, Json]:
    name = PurePosixPath(path)
    entity: dict[str, Json] = {
        "@id": _place(path),
        "@type": "File",
        "name": name.name,
        "contentSize": str(kept.size),
        "sha256": kept.sha256,
        "encodingFormat": _MEDIA_TYPES.get(name.suffix.lower(), "application/octet-stream"),
    }
    described = role or _DESCRIPTIONS.get(path)
    if described:
        entity["description"] = described[:1].upper() + described[1:]
    return entity
