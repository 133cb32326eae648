"""Which plan of a study is registered, and how the plan in use and the data stand to it.

What a run needs of it is put down in one document, `data/context/registration.json` in its folio, from which
a report can be rendered again; the earlier study definitions lie beside it.
"""

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise
from pathlib import Path
from typing import Any

from assayfolio.canonical import Json, sha256_hex
from assayfolio.errors import AssayfolioError, ChangedError, Fault, InputError, Place, StudyError
from assayfolio.evidence.entries import TrailEntry
from assayfolio.evidence.files import read_regular
from assayfolio.evidence.folio import read_seal
from assayfolio.evidence.protocols import RegisteredPlan, protocol_subject, registered_plans
from assayfolio.evidence.register import ReceivedFile, read_register
from assayfolio.evidence.states import study_standing
from assayfolio.study.canonical_plan import plan_digest, plan_document
from assayfolio.study.differences import Difference, differences, shortened
from assayfolio.study.plan import Laboratory, StudyDefinition
from assayfolio.study.reading import read_study
from assayfolio.workflow.workspace import Workspace

REGISTRATION_FORMAT = "assayfolio-registration/1"
REGISTRATION_FILE = "data/context/registration.json"
PROTOCOLS_FOLDER = "data/context/protocols"
BEFORE, AFTER = "before data first seen", "after data first seen"
NEEDS_REGISTRATION = frozenset({"pre-registration", "approved-protocol"})


@dataclass(frozen=True, slots=True)
class RegisteredDefinition:
    """A registered plan read back from its folio: the study definition and its bytes."""

    plan: RegisteredPlan
    study: StudyDefinition
    content: bytes


def read_registered(workspace: Workspace, plan: RegisteredPlan) -> RegisteredDefinition:
    """Read the study definition that was registered, from the protocol's folio.

    Raises ChangedError where the folio is gone or not as it was sealed.
    """
    content = _registered_bytes(workspace, plan.study, plan.name, plan.seal, plan.definition)
    return RegisteredDefinition(plan, read_study(content, f"{plan.study}/{plan.name}/study.yaml"), content)


def _registered_bytes(workspace: Workspace, study: str, name: str, seal: str, definition: str) -> bytes:
    folio = workspace.runs / study / name
    try:
        content = read_regular(folio / "data/study.yaml")
        if read_seal(folio) == seal and sha256_hex(content) == definition:
            return content
    except (OSError, AssayfolioError):
        pass
    raise ChangedError(
        f"{workspace.name_of(folio)}: the registered protocol is gone or not as it was sealed, so the plan "
        "in use cannot be held against it. `assayfolio verify` says what is wrong."
    )


def differences_to(registered: RegisteredDefinition, study: StudyDefinition) -> tuple[Difference, ...]:
    """In what `study` differs from the registered plan, as this version understands both."""
    return differences(plan_document(registered.study), plan_document(study))


def require_registered_plan(
    workspace: Workspace, entries: Iterable[TrailEntry], study: StudyDefinition, laboratory: Laboratory
) -> RegisteredPlan | None:
    """The newest registered plan of the study, which the plan in use equals; None where there is none.

    Raises StudyError where they differ, naming each field, and where the laboratory wants a registered (or
    approved) plan and there is none; ChangedError where the registered one cannot be read.
    """
    listed = tuple(entries)
    plans = registered_plans(listed, study.study)
    wanted = sorted(NEEDS_REGISTRATION.intersection(laboratory.require))
    file = study.places[0][1].file
    if not plans:
        if wanted:
            raise _not_registered(study, laboratory, wanted[0], file)
        return None
    latest = plans[-1]
    if latest.plan != plan_digest(study):
        found = differences_to(read_registered(workspace, latest), study)
        if found:
            raise _differs(study, latest, found, file)
    if "approved-protocol" in wanted and not study_standing(listed, study.study).protocol_approved:
        raise StudyError(
            f"{file}: {study.study}/{latest.name} is not approved, which {laboratory.name} requires before a "
            "run; nothing was analysed."
        )
    return latest


def _not_registered(
    study: StudyDefinition, laboratory: Laboratory, requirement: str, file: str
) -> StudyError:
    return StudyError(
        f"{file}: the plan of {study.study} is not pre-registered, and {laboratory.name} requires "
        f"{requirement} of every study; nothing was analysed. `assayfolio preregister {file}` registers it."
    )


def _differs(
    study: StudyDefinition, latest: RegisteredPlan, found: Sequence[Difference], file: str
) -> StudyError:
    faults = tuple(
        Fault(
            _place(study, difference.key, file),
            f"`{difference.key}` is {shortened(difference.new)}; registered is {shortened(difference.old)}",
        )
        for difference in found
    )
    return StudyError(
        f"{file}: this is not the plan that was registered as {study.study}/{latest.name} on "
        f"{minute_text(latest.time)}; nothing was analysed. Put it back, or register the change: "
        f"assayfolio amend {file} --reason ...",
        faults,
    )


def _place(study: StudyDefinition, key: str, file: str) -> Place:
    """Where the key stands, or the nearest that encloses it."""
    parts = key.removesuffix(" (order)").split(".")
    for count in range(len(parts), 0, -1):
        place = study.place_of(".".join(parts[:count]))
        if place is not None:
            return place
    return Place(file)


def minute_text(time: str) -> str:
    """A time of the trail to the minute: "2026-01-31 09:15 UTC"."""
    return f"{time[:10]} {time[11:16]} UTC"


def data_first_seen(
    entries: Iterable[TrailEntry], study: str, digests: Iterable[str] = (), paths: Iterable[str] = ()
) -> ReceivedFile | None:
    """The entry by which raw data of the study were first seen; None where none were.

    Data of the study are files with one of these `digests`, under one of these `paths`, or received for it.
    """
    of_digest, of_path = frozenset(digests), frozenset(paths)
    seen = (
        file
        for file in read_register(entries).received
        if file.sha256 in of_digest or file.path in of_path or file.study == study
    )
    return min(seen, key=lambda file: file.seq, default=None)


def registration_record(
    entries: Sequence[TrailEntry], study: StudyDefinition, data: Mapping[str, str]
) -> dict[str, Json]:
    """How the plan in use stands to what was registered, when a run gets its number.

    `data` are the run's raw data files, SHA-256 by path. `first_seen` is the first entry about these very
    files, `study_first_seen` about any data of the study; a plan counts as registered before the data where
    it was before both. `in_use` is the protocol that the plan in use equals, None where none is registered.
    """
    plans = registered_plans(entries, study.study)
    digests = frozenset(data.values())
    of_run = [file for file in read_register(entries).received if file.sha256 in digests]
    first = min(of_run, key=lambda file: file.seq, default=None)
    of_study = data_first_seen(entries, study.study, digests, data)
    return {
        "format": REGISTRATION_FORMAT,
        "study": study.study,
        "plan_sha256": plan_digest(study),
        "in_use": plans[-1].name if plans else None,
        "first_seen": _seen(first),
        "study_first_seen": _seen(of_study),
        "protocols": [_protocol(plan, entries, of_study) for plan in plans],
    }


def _seen(file: ReceivedFile | None) -> Json:
    if file is None:
        return None
    return {"path": file.path, "sha256": file.sha256, "time": file.time, "seq": file.seq}


def _protocol(plan: RegisteredPlan, entries: Sequence[TrailEntry], seen: ReceivedFile | None) -> Json:
    subject = protocol_subject(plan.study, plan.number)
    allotted = next(
        (entry for entry in entries if entry.subject == subject and entry.action == "protocol-allotted"), None
    )
    details: Mapping[str, Json] = allotted.details if allotted is not None else {}
    return {
        "protocol": plan.name,
        "number": plan.number,
        "time": plan.time,
        "seq": plan.seq,
        "actor": plan.actor,
        "seal": plan.seal,
        "plan_sha256": plan.plan,
        "study_sha256": plan.definition,
        "amends": plan.amends,
        "reason": plan.reason,
        "timing": timing(plan.seq, seen),
        "differences": details.get("differences") or [],
        "data_present": details.get("data_present") or [],
    }


def timing(seq: int | None, seen: ReceivedFile | None) -> str:
    """Whether something entered as `seq` (None: now) came before or after the data were first seen."""
    if seen is None or (seq is not None and seq < seen.seq):
        return BEFORE
    return AFTER


def plans_to_compare(record: Mapping[str, Any]) -> list[Mapping[str, Any]]:
    """The protocols whose result is to stand beside that of the plan in use: those amended after the data.

    That is every protocol that a later one amended after the data were first seen.
    """
    protocols = record["protocols"]
    return [before for before, after in pairwise(protocols) if after["timing"] == AFTER]


def definition_file(protocol: str) -> str:
    """Where a run's folio keeps the study definition of an earlier protocol."""
    return f"{PROTOCOLS_FOLDER}/{protocol}/study.yaml"


def definitions_for_run(workspace: Workspace, record: Mapping[str, Any]) -> dict[str, bytes]:
    """The study definitions that the report needs beside the plan in use, by their paths in the folio.

    The plan in force when the data were first seen says which comparisons were registered; those amended
    later are evaluated beside. Raises ChangedError where one cannot be read as it was registered.
    """
    study = record["study"]
    return {
        definition_file(item["protocol"]): _registered_bytes(
            workspace, study, item["protocol"], item["seal"], item["study_sha256"]
        )
        for item in _needed(record)
    }


def _needed(record: Mapping[str, Any]) -> list[Mapping[str, Any]]:
    names = {item["protocol"] for item in plans_to_compare(record)} | {plan_before_data(record)}
    return [item for item in record["protocols"] if item["protocol"] in names]


def plan_before_data(record: Mapping[str, Any]) -> str | None:
    """The newest protocol that was registered before the data were first seen, if there is one."""
    names = [item["protocol"] for item in record["protocols"] if item["timing"] == BEFORE]
    return str(names[-1]) if names else None


def folio_definitions(folio: Path, record: Mapping[str, Any]) -> dict[str, bytes]:
    """The same files, read back from a run's folio.

    Raises InputError where one cannot be read.
    """
    paths = [definition_file(item["protocol"]) for item in _needed(record)]
    try:
        return {path: read_regular(folio / path) for path in paths}
    except OSError as error:
        raise InputError(f"{folio} cannot be read as a run's folio: {error}.") from error
