"""The states of studies and runs, derived from the audit trail alone; nothing stores them.

A run is a *draft* until somebody has signed it, *in review* until everybody has who is asked to, and then
*approved*; *failed* where it came to no result; *superseded* when a completed run replaces it; *void* when it
was declared so, which outlasts everything else. A study is a *draft* until its plan is *registered*, its
*data are locked* when the first of them was entered, and it is *in review* or *approved* as its newest run
that still stands.
"""

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Literal

from assayfolio.evidence.entries import TrailEntry
from assayfolio.evidence.history import RunHistory, run_histories, split_subject
from assayfolio.evidence.protocols import protocol_subject, registered_plans
from assayfolio.evidence.register import COMPLETED, data_digests, received_file

SIGNED = "signed"
VOIDED = "voided"
REPLACES = "replaces"
TRAIL_REVIEWED = "trail-reviewed"
APPROVER = "approver"

RunState = Literal["draft", "in review", "approved", "superseded", "void", "failed"]
StudyState = Literal["draft", "registered", "data locked", "in review", "approved"]


@dataclass(frozen=True, slots=True)
class Signature:
    """Who signed in which role: the account, and the person as the entry names him."""

    role: str
    account: str
    person: str | None
    seq: int


@dataclass(frozen=True, slots=True)
class Voiding:
    """The entry that declared a run void: why, and the reference of the investigation."""

    seq: int
    time: str
    actor: str
    reason: str
    investigation: str
    folio: str


@dataclass(frozen=True, slots=True)
class RunStanding:
    """How one run stands.

    `asked` are the roles that its plan asks to sign; `signatures` those that did, the newest of each role
    last. `data_locked`: all its raw data were entered before it got its number. `runner` is the account that
    ran it, `reviewed_by` are the accounts that reviewed its trail. `ended` is False while it is at work.
    """

    subject: str
    study: str
    number: int
    state: RunState
    completed: bool
    ended: bool
    data_locked: bool
    runner: str
    asked: tuple[str, ...]
    signatures: tuple[Signature, ...]
    reviewed_by: tuple[str, ...]
    voided: Voiding | None
    replaces: str | None
    superseded_by: str | None

    @property
    def stands(self) -> bool:
        """Whether its result is still the laboratory's word: completed, not void, not superseded."""
        return self.completed and self.state not in ("void", "superseded")


@dataclass(frozen=True, slots=True)
class StudyStanding:
    """How one study stands: `protocol` is the newest registered plan's folder name, if there is one."""

    study: str
    state: StudyState
    protocol: str | None
    protocol_approved: bool
    data_locked: bool
    runs: tuple[RunStanding, ...]

    def run(self, subject: str) -> RunStanding | None:
        """The run with this subject, or None."""
        return next((run for run in self.runs if run.subject == subject), None)


def run_standings(entries: Iterable[TrailEntry]) -> Mapping[str, RunStanding]:
    """How every run of the trail stands, by its subject, sorted by study and number."""
    listed = tuple(entries)
    first_seen = _first_seen(listed)
    reviews = _reviews(listed)
    histories = run_histories(listed)
    superseded = _superseded(histories)
    return {
        run.subject: _run_standing(run, first_seen, reviews.get(run.subject, ()), superseded)
        for run in histories
    }


def study_standing(entries: Iterable[TrailEntry], study: str) -> StudyStanding:
    """How `study` stands by the trail."""
    listed = tuple(entries)
    runs = tuple(run for run in run_standings(listed).values() if run.study == study)
    plans = registered_plans(listed, study)
    protocol = plans[-1] if plans else None
    received = (received_file(entry) for entry in listed)
    locked = any(file is not None and file.study == study for file in received)
    locked = locked or any(run.data_locked for run in runs)
    approved = False
    if protocol is not None:
        subject = protocol_subject(study, protocol.number)
        own = [entry for entry in listed if entry.subject == subject]
        approved = is_approved(asked_roles(own[0]) if own else (), signatures_in(own))
    return StudyStanding(
        study=study,
        state=_study_state(runs, registered=protocol is not None, locked=locked),
        protocol=None if protocol is None else protocol.name,
        protocol_approved=approved,
        data_locked=locked,
        runs=runs,
    )


def is_approved(asked: Sequence[str], signatures: Iterable[Signature]) -> bool:
    """Whether everybody who is asked to has signed, an approver at any rate."""
    signed = [signature.role for signature in signatures]
    return all(signed.count(role) >= list(asked).count(role) for role in asked) and APPROVER in signed


def standing_words(run: RunStanding) -> list[str]:
    """What is to be said of a run that no longer stands: superseded by which, void since when and why."""
    words = []
    if run.voided is not None:
        void = run.voided
        words.append(
            f"void since {void.time[:10]} (entry {void.seq}): {void.reason}; investigation "
            f"{void.investigation}, folio {void.folio}"
        )
    if run.superseded_by is not None:
        words.append(f"superseded by {run.superseded_by}")
    if run.replaces is not None:
        words.append(f"replaces {run.replaces}")
    return words


def _study_state(runs: Sequence[RunStanding], *, registered: bool, locked: bool) -> StudyState:
    standing = [run for run in runs if run.stands]
    newest = standing[-1].state if standing else None
    if newest == "approved":
        return "approved"
    if newest == "in review":
        return "in review"
    if locked:
        return "data locked"
    return "registered" if registered else "draft"


def _run_standing(
    run: RunHistory,
    first_seen: Mapping[str, int],
    reviewed_by: tuple[str, ...],
    superseded: Mapping[str, str],
) -> RunStanding:
    signatures, asked = signatures_in(run.entries), asked_roles(run.allotted)
    voided = next((void for entry in run.entries if (void := _voiding(entry)) is not None), None)
    completed, by = _completed(run), superseded.get(run.subject)
    state: RunState = "draft"
    if voided is not None:
        state = "void"
    elif by is not None:
        state = "superseded"
    elif run.is_closed and not completed:
        state = "failed"
    elif is_approved(asked, signatures):
        state = "approved"
    elif signatures:
        state = "in review"
    data = data_digests(run.allotted, first_seen)
    locked = bool(data) and all(first_seen.get(one, run.allotted.seq) < run.allotted.seq for one in data)
    return RunStanding(
        subject=run.subject,
        study=run.study,
        number=run.number,
        state=state,
        completed=completed,
        ended=run.is_closed,
        data_locked=locked,
        runner=run.allotted.actor,
        asked=asked,
        signatures=signatures,
        reviewed_by=reviewed_by,
        voided=voided,
        replaces=_replaced(run),
        superseded_by=by,
    )


def _completed(run: RunHistory) -> bool:
    return run.sealed is not None and run.sealed.details.get("outcome") == COMPLETED


def asked_roles(allotted: TrailEntry) -> tuple[str, ...]:
    """The roles that are asked to sign, one for each field, as the entry that gave the number has them."""
    asked = allotted.details.get("sign_off")
    return tuple(role for role in asked if isinstance(role, str)) if isinstance(asked, list) else ()


def signatures_in(entries: Iterable[TrailEntry]) -> tuple[Signature, ...]:
    """The signatures among `entries`, in their order."""
    found = []
    for entry in entries:
        role, person = entry.details.get("role"), entry.details.get("person")
        if entry.action == SIGNED and isinstance(role, str):
            found.append(Signature(role, entry.actor, person if isinstance(person, str) else None, entry.seq))
    return tuple(found)


def _voiding(entry: TrailEntry) -> Voiding | None:
    investigation, folio = entry.details.get("investigation"), entry.details.get("folio")
    if entry.action != VOIDED or not isinstance(investigation, str) or not isinstance(folio, str):
        return None
    return Voiding(entry.seq, entry.time, entry.actor, entry.reason or "", investigation, folio)


def _replaced(run: RunHistory) -> str | None:
    entry = run.entry(REPLACES)
    replaced = None if entry is None else entry.details.get("replaced")
    return replaced if isinstance(replaced, str) and split_subject(replaced) is not None else None


def _superseded(histories: Iterable[RunHistory]) -> Mapping[str, str]:
    """Which completed run replaces which: the first one that does."""
    found: dict[str, str] = {}
    for run in histories:
        replaced = _replaced(run)
        if replaced is not None and _completed(run):
            found.setdefault(replaced, run.subject)
    return found


def _first_seen(entries: Iterable[TrailEntry]) -> Mapping[str, int]:
    """The number of the entry by which each raw data file was first seen, by its digest."""
    found: dict[str, int] = {}
    for entry in entries:
        file = received_file(entry)
        if file is not None:
            found.setdefault(file.sha256, file.seq)
    return found


def _reviews(entries: Iterable[TrailEntry]) -> Mapping[str, tuple[str, ...]]:
    """The accounts that reviewed the trail of each run."""
    found: dict[str, tuple[str, ...]] = {}
    for entry in entries:
        if entry.action == TRAIL_REVIEWED:
            run = entry.details.get("run")
            subject = run if isinstance(run, str) else entry.subject
            found[subject] = (*found.get(subject, ()), entry.actor)
    return found
