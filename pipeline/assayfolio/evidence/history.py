"""What the audit trail says of each run: allotted, ended or not, and which number comes next.

Only entries are read here, no files; whether a run that has not ended is at work or was killed is told by
its lock (`folio.is_locked`).
"""

import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from assayfolio.evidence.entries import TrailEntry

ALLOTTED = "allotted"
STAGED = "staged"
SEALED = "sealed"
FAILED = "failed"
INTERRUPTED = "interrupted"
COMPUTED = "computed"
RENDERED = "rendered"
DISPOSED = "disposed"

_SUBJECT = re.compile(r"([A-Z0-9][A-Z0-9-]{0,39})/(run-([0-9]{4,}))", re.ASCII)


def run_name(number: int) -> str:
    """The folder name of a run: "run-0001"; more digits from 10000 on."""
    return f"run-{number:04d}"


def run_subject(study: str, number: int) -> str:
    """What the entries of a run are about: "STUDY/run-0001"."""
    return f"{study}/{run_name(number)}"


def split_subject(subject: str) -> tuple[str, int] | None:
    """Study and number of a run's subject; None for any other subject or spelling of the number."""
    if "/run-" not in subject:
        return None
    matched = _SUBJECT.fullmatch(subject)
    if not matched or run_name(int(matched[3])) != matched[2]:
        return None
    return matched[1], int(matched[3])


def up_to_staged(entries: Sequence[TrailEntry]) -> tuple[TrailEntry, ...]:
    """The entries up to the last "staged", that included; all of them where there is none."""
    places = [place for place, entry in enumerate(entries, start=1) if entry.action == STAGED]
    return tuple(entries[: places[-1]] if places else entries)


@dataclass(frozen=True, slots=True)
class RunHistory:
    """The entries of one run, in order; the first is its allotment."""

    study: str
    number: int
    entries: tuple[TrailEntry, ...]

    @property
    def name(self) -> str:
        """The run's folder name."""
        return run_name(self.number)

    @property
    def subject(self) -> str:
        """What its entries are about."""
        return run_subject(self.study, self.number)

    @property
    def allotted(self) -> TrailEntry:
        """The entry that gave the run its number."""
        return self.entries[0]

    def entry(self, action: str) -> TrailEntry | None:
        """The first entry of this action, if there is one."""
        return next((entry for entry in self.entries if entry.action == action), None)

    @property
    def sealed(self) -> TrailEntry | None:
        """The entry that holds the folio's seal."""
        return self.entry(SEALED)

    @property
    def failure(self) -> TrailEntry | None:
        """The entry that says why the run failed."""
        return self.entry(FAILED)

    @property
    def interrupted(self) -> TrailEntry | None:
        """The entry by which a later writer stated that the run was killed."""
        return self.entry(INTERRUPTED)

    @property
    def ended(self) -> TrailEntry | None:
        """The entry that ended the run: sealed, else interrupted, else failed (folio still to be sealed)."""
        return self.sealed or self.interrupted or self.failure

    @property
    def is_closed(self) -> bool:
        """Whether nothing of the run itself is still to come: sealed, or entered as interrupted."""
        return self.sealed is not None or self.interrupted is not None

    @property
    def to_be_staged(self) -> tuple[TrailEntry, ...]:
        """The entries that the folio's data/trail.jsonl holds: from allotment to the last "staged".

        A run whose staging fails is staged a second time, with the reason of its failure.
        """
        return up_to_staged(self.entries)


def run_histories(entries: Iterable[TrailEntry]) -> tuple[RunHistory, ...]:
    """The history of every allotted run, sorted by study and number.

    Entries about a run before its allotment are left out (`unallotted` gives them).
    """
    found: dict[tuple[str, int], list[TrailEntry]] = {}
    for entry in entries:
        run = split_subject(entry.subject)
        if run is not None and (run in found or entry.action == ALLOTTED):
            found.setdefault(run, []).append(entry)
    return tuple(RunHistory(*run, tuple(found[run])) for run in sorted(found))


def unallotted(entries: Iterable[TrailEntry]) -> tuple[TrailEntry, ...]:
    """Entries about a run that no earlier entry allotted."""
    known: set[str] = set()
    found = []
    for entry in entries:
        if entry.action == ALLOTTED:
            known.add(entry.subject)
        elif split_subject(entry.subject) is not None and entry.subject not in known:
            found.append(entry)
    return tuple(found)


def next_number(entries: Iterable[TrailEntry], study: str) -> int:
    """The number that the next run of `study` gets: one more than the highest allotted, 1 for the first."""
    highest = 0
    for entry in entries:
        run = split_subject(entry.subject) if entry.action == ALLOTTED else None
        if run is not None and run[0] == study:
            highest = max(highest, run[1])
    return highest + 1


def runs_not_closed(entries: Iterable[TrailEntry]) -> tuple[RunHistory, ...]:
    """Runs neither sealed nor entered as interrupted: at work where locked, otherwise killed."""
    return tuple(run for run in run_histories(entries) if not run.is_closed)


def trail_extract(entries: Sequence[TrailEntry]) -> bytes:
    """The bytes of data/trail.jsonl: the entries' very lines, each with its line end."""
    return b"".join(entry.line + b"\n" for entry in entries)
