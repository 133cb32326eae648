"""How long a folio is kept, and its disposal afterwards: by two persons, leaving a tombstone with its seal.

The end of the retention is the time of the seal and the years that the settings give; where the settings
under which a run was made gave more, those count. Disposal is proposed by one person and confirmed by
another; the tombstone `runs/_laboratory/disposal-NNNN` keeps both manifests, so that whoever has a copy of
the folio can still show that it is the one that was sealed. The trail keeps every entry.
"""

import shutil
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from pathlib import Path

from assayfolio.canonical import Json, canonical_bytes, sha256_hex
from assayfolio.errors import AssayfolioError, ChangedError, InputError
from assayfolio.evidence.files import explained, read_regular, sync_folder
from assayfolio.evidence.history import DISPOSED, RunHistory, run_histories
from assayfolio.evidence.manifest import BAG_INFO_FILE, BAGIT_FILE, MANIFEST_FILE, TAG_MANIFEST_FILE
from assayfolio.evidence.trail import TrailEntry, TrailWriter
from assayfolio.evidence.verification import verify_workspace
from assayfolio.report.record_page import RecordFact, RecordPage, RecordSection, record_pdf
from assayfolio.study.laboratory import Laboratory, Retention
from assayfolio.study.laboratory_file import read_laboratory
from assayfolio.study.reasons import SHORTEST_REASON, emptiness
from assayfolio.version import VERSION
from assayfolio.workflow.authority import allowed, refused
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.laboratory_folio import Record, SealedRecord, seal_in_trail
from assayfolio.workflow.recovery import acknowledge_interruptions, found_trail
from assayfolio.workflow.settings_files import standing_settings
from assayfolio.workflow.surroundings import Surroundings, look_around
from assayfolio.workflow.void import run_named
from assayfolio.workflow.workspace import Workspace

DISPOSAL_PROPOSED = "disposal-proposed"
TOMBSTONE_FORMAT = "assayfolio-tombstone/1"
_SETTINGS_IN_FOLIO = "data/context/lab.yaml"
_KEPT = (TAG_MANIFEST_FILE, MANIFEST_FILE, BAG_INFO_FILE, BAGIT_FILE)


@dataclass(frozen=True, slots=True)
class Kept:
    """How long a folio is kept: the class and the day of its end ("2041-03-04")."""

    retention: Retention
    end: str


@dataclass(frozen=True, slots=True)
class Disposal:
    """A disposal that was proposed, or done: then with its tombstone."""

    subject: str
    kept: Kept
    reason: str
    tombstone: SealedRecord | None
    is_done: bool

    def lines(self) -> list[str]:
        """For people."""
        kept = f"kept until {self.kept.end} ({self.kept.retention.name})"
        if not self.is_done:
            return [
                f"{self.subject}: disposal proposed; {kept}. Another person confirms it: --dispose --confirm"
            ]
        tombstone = [] if self.tombstone is None else [f"Tombstone  {self.tombstone.folio}"]
        return [f"{self.subject}: disposed of; it was {kept}", *tombstone]

    @property
    def document(self) -> Mapping[str, Json]:
        """For programs."""
        return {
            "run": self.subject,
            "state": "disposed" if self.is_done else "disposal proposed",
            "kept_until": self.kept.end,
            "class": self.kept.retention.name,
            "reason": self.reason,
            "tombstone": None if self.tombstone is None else str(self.tombstone.folio),
        }


def kept_until(sealed: str, *found: Retention | None) -> Kept | None:
    """The latest end of the retentions that were found, from the time `sealed`; None where there are none.

    The 29th of February ends on the 28th where the year has none later.
    """
    year, month, day = int(sealed[:4]), sealed[5:7], sealed[8:10]

    def end(one: Retention) -> str:
        last = year + one.years
        leap = last % 4 == 0 and (last % 100 != 0 or last % 400 == 0)
        return f"{last:04d}-{month}-{'28' if month + day == '0229' and not leap else day}"

    ends = [Kept(one, end(one)) for one in found if one is not None]
    return max(ends, key=lambda kept: kept.end, default=None)


def propose_disposal(workspace: Workspace, named: Path, reason: str) -> Disposal:
    """Propose the disposal of a run's folio; another person confirms it.

    Raises InputError for a reason that says nothing and where there is no such folio; NotAllowedError, after
    an entry of the attempt, before the end of its retention and for an account that may not; ChangedError
    where the folio is not as it was sealed.
    """
    subject, laboratory = run_named(workspace, named), standing_settings(workspace).laboratory
    reason = reason.strip()
    empty = emptiness(reason)
    if empty is not None:
        raise InputError(f"The reason is {empty}; say why, in {SHORTEST_REASON} characters or more.")
    _require_whole(workspace, subject)
    around = look_around()
    with trail_book(workspace, laboratory.wait_seconds) as trail:
        found_trail(workspace, trail)
        allowed(workspace, trail, "archive --dispose")
        history = _history(trail, subject)
        kept = _require_ended(workspace, trail, history, laboratory, around)
        details: dict[str, Json] = {"run_seal": _seal(history), **_kept_details(kept)}
        trail.append(DISPOSAL_PROPOSED, subject, reason, details)
        return Disposal(subject, kept, reason, None, is_done=False)


def confirm_disposal(workspace: Workspace, named: Path) -> Disposal:
    """Dispose of a run's folio whose disposal another person proposed: seal the tombstone, remove the folio.

    A disposal that was interrupted after its entry is completed. Raises as `propose_disposal` does, and
    InputError where nothing was proposed.
    """
    subject, laboratory = run_named(workspace, named), standing_settings(workspace).laboratory
    around = look_around()
    with trail_book(workspace, laboratory.wait_seconds) as trail:
        found_trail(workspace, trail)
        actor = allowed(workspace, trail, "archive --dispose --confirm")
        acknowledge_interruptions(workspace, trail)
        history = _history(trail, subject)
        proposal = history.entry(DISPOSAL_PROPOSED)
        if proposal is None:
            raise InputError(f"Nobody has proposed to dispose of {subject}; --dispose --reason comes first.")
        if proposal.actor == actor.account and not laboratory.one_person:
            why = f"{actor.account} proposed it; somebody else has to confirm it"
            raise refused(trail, "archive --dispose --confirm", why, "another person")
        kept = _require_ended(workspace, trail, history, laboratory, around)
        tombstone = None
        if history.entry(DISPOSED) is None:
            record = _record(
                workspace, history, proposal, kept, replace(around, actor=actor.account), laboratory
            )
            tombstone = seal_in_trail(workspace, trail, record, DISPOSED, subject)
        _remove(workspace.runs / subject)
        return Disposal(subject, kept, proposal.reason or "", tombstone, is_done=True)


def _history(trail: TrailWriter, subject: str) -> RunHistory:
    for history in run_histories(trail.entries):
        if history.subject == subject and history.sealed is not None:
            return history
    raise InputError(f"{subject} is not a sealed run of this workspace.")


def _seal(history: RunHistory) -> Json:
    return None if history.sealed is None else history.sealed.details.get("seal")


def _require_whole(workspace: Workspace, subject: str) -> None:
    """A folio that does not verify is evidence of something else, and is not disposed of."""
    failed = verify_workspace(workspace.runs, [workspace.runs / subject]).with_outcome("failed")
    if failed:
        lines = [f"  {one.number} {one.title}: {'; '.join(one.notes)}" for one in failed]
        raise ChangedError("\n".join([f"{subject} does not verify, so it is not disposed of.", *lines]))


def _require_ended(
    workspace: Workspace,
    trail: TrailWriter,
    history: RunHistory,
    laboratory: Laboratory,
    around: Surroundings,
) -> Kept:
    assert history.sealed is not None, "only sealed runs get here"
    archived = _archived_retention(workspace.runs / history.subject)
    kept = kept_until(history.sealed.time, laboratory.retention, archived)
    if kept is None:
        why = "the settings give no retention, so nothing says how long it has to be kept"
        raise refused(trail, "archive --dispose", why, "`retention` in configs/lab.yaml")
    if around.started_utc[:10] <= kept.end:
        why = f"{history.subject} is kept until {kept.end} ({kept.retention.name})"
        raise refused(trail, "archive --dispose", why, f"the end of the retention, {kept.end}")
    return kept


def _archived_retention(folio: Path) -> Retention | None:
    try:
        return read_laboratory(read_regular(folio / _SETTINGS_IN_FOLIO), _SETTINGS_IN_FOLIO).retention
    except (OSError, AssayfolioError):
        return None  # a disposal is being completed, or an earlier form of the settings


def _kept_details(kept: Kept) -> Mapping[str, Json]:
    return {"class": kept.retention.name, "years": kept.retention.years, "kept_until": kept.end}


def _record(
    workspace: Workspace,
    history: RunHistory,
    proposal: TrailEntry,
    kept: Kept,
    around: Surroundings,
    laboratory: Laboratory,
) -> Record:
    """The tombstone: who, why, when; the seal, and the files from which it can be computed again."""
    folio = workspace.runs / history.subject
    document: dict[str, Json] = {
        "format": TOMBSTONE_FORMAT,
        "run": history.subject,
        "run_seal": _seal(history),
        "sealed": None if history.sealed is None else history.sealed.time,
        **_kept_details(kept),
        "reason": proposal.reason,
        "proposed": proposal.time,
        "proposed_by": proposal.actor,
        "disposed": around.started_utc,
        "disposed_by": around.actor,
        "host": around.host,
    }
    with explained("read what the tombstone keeps", folio):
        payload = {f"data/{name}": read_regular(folio / name) for name in _KEPT}
    payload["data/tombstone.json"] = canonical_bytes(document)
    payload["data/tombstone.pdf"] = record_pdf(_page(document, kept, laboratory.name))
    details: dict[str, Json] = {"run_seal": _seal(history), **_kept_details(kept)}
    return Record("disposal", proposal.reason or "", around.started_utc, payload, details)


def _page(document: Mapping[str, Json], kept: Kept, laboratory: str) -> RecordPage:
    run, made = str(document["run"]), str(document["disposed"])
    return RecordPage(
        kind="Tombstone",
        title=f"{run} was disposed of after its retention",
        number=run,
        laboratory=laboratory,
        created=f"{made[:19]}Z",
        generator=f"Assayfolio {VERSION}",
        box=str(document["reason"]),
        box_notes=("The audit trail keeps every entry; a copy of the folio can be held against this seal.",),
        sections=(RecordSection("What, when, by whom", facts=tuple(_facts(document, kept))),),
        foot=f"{run} · tombstone.json {sha256_hex(canonical_bytes(document))[:16]}",
    )


def _facts(document: Mapping[str, Json], kept: Kept) -> Iterator[RecordFact]:
    yield RecordFact("Folio", str(document["run"]), str(document["run_seal"]))
    yield RecordFact("Sealed", f"{str(document['sealed'])[:19].replace('T', ' ')} UTC")
    yield RecordFact("Kept until", f"{kept.end}, {kept.retention.name}, {kept.retention.years} years")
    for what in ("proposed", "disposed"):
        moment = f"{str(document[what])[:19].replace('T', ' ')} UTC"
        yield RecordFact(what.capitalize(), f"{moment}, account {document[f'{what}_by']}")
    yield RecordFact("Clock", "times are by this computer's clock")


def _remove(folio: Path) -> None:
    if folio.exists():
        with explained("remove the folio that was disposed of", folio):
            shutil.rmtree(folio)
        sync_folder(folio.parent)
