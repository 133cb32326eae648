"""Declaring a run void: with a reason and the reference of an investigation, in a folio of its own.

Nothing of the run is touched: it keeps its folio and its number and stays listed, as void. The trail is held
from the number of the void folio to its name.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

from assayfolio.canonical import Json, canonical_bytes
from assayfolio.errors import Fault, InputError, Place
from assayfolio.evidence.folio import stage_folio
from assayfolio.evidence.history import run_histories, split_subject, trail_extract
from assayfolio.evidence.laboratory_folios import (
    FOLDER,
    FOLIO_ALLOTTED,
    TRAIL_FILE,
    folio_name,
    folio_subject,
    next_folio_number,
)
from assayfolio.evidence.moves import Move, rules_of, why_not
from assayfolio.evidence.states import VOIDED, study_standing
from assayfolio.evidence.trail import TrailWriter
from assayfolio.study.laboratory import Laboratory
from assayfolio.study.reasons import SHORTEST_REASON, emptiness
from assayfolio.version import VERSION
from assayfolio.workflow.actors import Actor
from assayfolio.workflow.authority import allowed, refused
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.recovery import acknowledge_interruptions, found_trail
from assayfolio.workflow.settings_files import settings_texts, standing_settings
from assayfolio.workflow.surroundings import Surroundings, look_around
from assayfolio.workflow.workspace import Workspace, shown_path

KIND = "void"
VOID_FORMAT = "assayfolio-void/1"
VOID_FILE = "data/void.json"
MOST_CHARACTERS = 500


@dataclass(frozen=True, slots=True)
class VoidedRun:
    """A run that is void now: its subject, the folio that says why, and that folio's seal."""

    run: str
    folio: Path
    seal: str
    reason: str
    investigation: str

    def document(self) -> Mapping[str, Json]:
        """For programs."""
        return {
            "run": self.run,
            "state": "void",
            "folio": f"runs/{FOLDER}/{self.folio.name}",
            "seal": self.seal,
            "reason": self.reason,
            "investigation": self.investigation,
        }


def void_run(workspace: Workspace, named: Path, reason: str, investigation: str) -> VoidedRun:
    """Declare the run whose folio is `named` void.

    Raises InputError for a reason or reference that says nothing and where there is no such run;
    NotAllowedError, after an entry of the attempt, for an account that may not, and where the run has no
    result or is void already; BusyError and MachineError as the trail and the disk do.
    """
    subject = run_named(workspace, named)
    reason, investigation = reason.strip(), investigation.strip()
    _require_words(reason, investigation)
    standing = standing_settings(workspace)
    around = look_around()
    with trail_book(workspace, standing.laboratory.wait_seconds) as trail:
        found_trail(workspace, trail)
        actor = allowed(workspace, trail, "void")
        acknowledge_interruptions(workspace, trail)
        study = subject.partition("/")[0]
        run = study_standing(trail.entries, study).run(subject)
        move = Move("void", actor.account)
        why = why_not(move, study_standing(trail.entries, study), run, rules_of(standing.laboratory))
        if why is not None:
            raise refused(trail, "void", why, "a completed run that is not void")
        return _seal(workspace, trail, subject, reason, investigation, (actor, around, standing.laboratory))


def run_named(workspace: Workspace, named: Path) -> str:
    """The subject of the run whose folio is `named`, as a path or as STUDY/run-0001.

    Raises InputError where it is not the place of a run of this workspace.
    """
    place = named.resolve()
    inside = place.relative_to(workspace.runs) if place.is_relative_to(workspace.runs) else named
    subject = inside.as_posix()
    if split_subject(subject) is None:
        fault = Fault(
            Place(shown_path(named)), "is not the folio of a run", "name one, such as runs/LOT-7/run-0001"
        )
        raise InputError("There is nothing to declare void.", (fault,))
    return subject


def _require_words(reason: str, investigation: str) -> None:
    empty = emptiness(reason)
    if empty is not None:
        raise InputError(
            f"The reason is {empty}; say what is wrong with the run, in {SHORTEST_REASON} characters or more."
        )
    if not any(character.isalnum() for character in investigation):
        raise InputError(
            "The reference of the investigation is missing: --investigation, such as INV-2031-014."
        )
    if max(len(reason), len(investigation)) > MOST_CHARACTERS or "\n" in reason + investigation:
        raise InputError(f"Reason and reference are one line each, of at most {MOST_CHARACTERS} characters.")


def _seal(
    workspace: Workspace,
    trail: TrailWriter,
    subject: str,
    reason: str,
    investigation: str,
    who: tuple[Actor, Surroundings, Laboratory],
) -> VoidedRun:
    actor, around, laboratory = who
    number = next_folio_number(trail.entries, KIND)
    allotted = trail.append(
        FOLIO_ALLOTTED, folio_subject(KIND, number), None, {"kind": KIND, "number": number, "run": subject}
    )
    record: dict[str, Json] = {
        "format": VOID_FORMAT,
        "number": number,
        "run": subject,
        "run_seal": _seal_of(trail, subject),
        "reason": reason,
        "investigation": investigation,
        "declared": around.started_utc,
        "declared_local": around.started_local,
        "actor": actor.account,
        "person": actor.person,
        "roles": list(actor.roles),
        "host": around.host,
    }
    payload = {VOID_FILE: canonical_bytes(record), TRAIL_FILE: trail_extract([allotted])}
    for file, text in settings_texts(workspace).items():
        if text is not None:
            payload[f"data/context/{Path(file).name}"] = text.encode("utf-8")
    info = [
        ("Source-Organization", laboratory.name),
        ("External-Identifier", folio_subject(KIND, number)),
        ("External-Description", f"{subject} declared void"),
        ("Bagging-Date", around.started_utc[:10]),
        ("Bag-Software-Agent", f"assayfolio {VERSION}"),
    ]
    staged = stage_folio(workspace.runs / FOLDER, folio_name(KIND, number), payload, info)
    details: dict[str, Json] = {
        "investigation": investigation,
        "folio": folio_subject(KIND, number),
        "seal": staged.seal,
        "run_seal": record["run_seal"],
    }
    trail.append(VOIDED, subject, reason, details)
    return VoidedRun(subject, staged.publish(), staged.seal, reason, investigation)


def _seal_of(trail: TrailWriter, subject: str) -> Json:
    run = next(run for run in run_histories(trail.entries) if run.subject == subject)
    return None if run.sealed is None else run.sealed.details.get("seal")
