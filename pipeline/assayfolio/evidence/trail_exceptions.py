"""The entries that a reviewer of the audit trail should see first, by kind."""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

from assayfolio.evidence.entries import HEAD_RESTORED, TORN_LINE_SET_ASIDE, TrailEntry
from assayfolio.evidence.history import ALLOTTED, FAILED, INTERRUPTED, split_subject
from assayfolio.evidence.protocols import REGISTERED, split_protocol
from assayfolio.evidence.register import RECEIVED, REFUSED, Register, read_register
from assayfolio.evidence.settings import PROPOSED, SETTINGS
from assayfolio.evidence.signers import ABOUT_SIGNERS, PASSPHRASE_WRONG, SIGNING_LOCKED
from assayfolio.evidence.stamps import clock_remarks
from assayfolio.evidence.telling import ABOUT_WITNESSES

URGENT = "wrong passphrases"
FAILURES = "failures and refusals"
REPEATED = "runs repeated on the same data"
EXCLUSIONS = "runs with exclusions"
LATE_PLANS = "plans registered or amended after the data were first seen"
DEVIATIONS = "deviations"
LATE_DATA = "raw data that came after the first run of their study"
WITHDRAWN = "runs voided or replaced"
SETTINGS_CHANGED = "changes of settings and roles"
SIGNERS_CHANGED = "certificates enrolled, renewed or withdrawn"
REPAIRS = "interruptions and repairs of the trail, witnesses out of reach"
CLOCK = "the clock"

KINDS = (
    URGENT,
    FAILURES,
    REPEATED,
    EXCLUSIONS,
    LATE_PLANS,
    DEVIATIONS,
    LATE_DATA,
    WITHDRAWN,
    SETTINGS_CHANGED,
    SIGNERS_CHANGED,
    REPAIRS,
    CLOCK,
)
"""In the order in which they are shown."""

_BY_ACTION: Mapping[str, str] = {
    FAILED: FAILURES,
    REFUSED: FAILURES,
    INTERRUPTED: FAILURES,
    "attempt-refused": FAILURES,
    "sign-refused": FAILURES,
    PASSPHRASE_WRONG: URGENT,
    SIGNING_LOCKED: URGENT,
    **dict.fromkeys(ABOUT_SIGNERS, SIGNERS_CHANGED),
    "deviation-recorded": DEVIATIONS,
    "voided": WITHDRAWN,
    "replaces": WITHDRAWN,
    PROPOSED: SETTINGS_CHANGED,
    TORN_LINE_SET_ASIDE: REPAIRS,
    HEAD_RESTORED: REPAIRS,
    "rename-completed": REPAIRS,
    **dict.fromkeys(ABOUT_WITNESSES, REPAIRS),
}


@dataclass(frozen=True, slots=True)
class TrailException:
    """One entry out of the ordinary: of which kind, and in a few words why."""

    kind: str
    entry: TrailEntry
    words: str


def trail_exceptions(entries: Sequence[TrailEntry]) -> tuple[TrailException, ...]:
    """Every exception, sorted by kind in the order of `KINDS` and then by entry.

    An entry stands under each kind that it belongs to.
    """
    register = read_register(entries)
    seen = _first_seen(register)
    first_run = _first_runs(entries)
    found = [
        TrailException(_BY_ACTION[entry.action], entry, _plain_words(entry))
        for entry in entries
        if entry.action in _BY_ACTION
    ]
    judges = (_of_run(register), _of_plan(seen), _of_data(first_run), _of_settings())
    for entry in entries:
        for judge in judges:
            found.extend(judge(entry))
    found.extend(TrailException(CLOCK, remark.entry, remark.words) for remark in clock_remarks(entries))
    order = {kind: place for place, kind in enumerate(KINDS)}
    return tuple(sorted(found, key=lambda each: (order[each.kind], each.entry.seq)))


def _plain_words(entry: TrailEntry) -> str:
    if entry.action in ABOUT_SIGNERS:
        person = entry.details.get("person")
        words = entry.action if not isinstance(person, str) else f"{entry.action}, {person}"
        return f"{words}: {entry.reason}" if entry.reason else words
    return entry.reason or entry.action


def _first_seen(register: Register) -> dict[str, int]:
    """The entry by which data of each study were first seen."""
    seen: dict[str, int] = {}
    for file in register.received:
        if file.study is not None:
            seen.setdefault(file.study, file.seq)
    return seen


def _first_runs(entries: Sequence[TrailEntry]) -> dict[str, int]:
    first: dict[str, int] = {}
    for entry in entries:
        run = split_subject(entry.subject) if entry.action == ALLOTTED else None
        if run is not None:
            first.setdefault(run[0], entry.seq)
    return first


_Judge = Callable[[TrailEntry], list[TrailException]]


def _of_run(register: Register) -> _Judge:
    def judge(entry: TrailEntry) -> list[TrailException]:
        if entry.action != ALLOTTED:
            return []
        found = []
        executions = register.executions(entry.subject)
        if executions is not None and executions.number > 1:
            words = f"execution {executions.number} of {len(executions.same)} on these data"
            found.append(TrailException(REPEATED, entry, words))
        exclusions = entry.details.get("exclusions")
        if isinstance(exclusions, str):
            found.append(TrailException(EXCLUSIONS, entry, f"exclusions in {exclusions}"))
        return found

    return judge


def _of_plan(seen: Mapping[str, int]) -> _Judge:
    def judge(entry: TrailEntry) -> list[TrailException]:
        protocol = split_protocol(entry.subject) if entry.action == REGISTERED else None
        if protocol is None or seen.get(protocol[0], entry.seq) >= entry.seq:
            return []
        deed = "registered" if entry.details.get("amends") is None else "amended"
        words = f"{deed} after entry {seen[protocol[0]]}, by which the data were first seen"
        return [TrailException(LATE_PLANS, entry, f"{words}: {entry.reason}" if entry.reason else words)]

    return judge


def _of_data(first_run: Mapping[str, int]) -> _Judge:
    def judge(entry: TrailEntry) -> list[TrailException]:
        study = entry.details.get("study") if entry.action == RECEIVED else None
        if not isinstance(study, str) or first_run.get(study, entry.seq) >= entry.seq:
            return []
        path = entry.details.get("path")
        return [
            TrailException(LATE_DATA, entry, f"{path} came after entry {first_run[study]}, a run of {study}")
        ]

    return judge


def _of_settings() -> _Judge:
    """Each entry of settings that replaces others; the first ones are no change."""

    def judge(entry: TrailEntry) -> list[TrailException]:
        if entry.action != SETTINGS or entry.details.get("was") is None:
            return []
        changes = entry.details.get("differences")
        keys = (
            [str(each.get("key")) for each in changes if isinstance(each, dict)]
            if isinstance(changes, list)
            else []
        )
        return [TrailException(SETTINGS_CHANGED, entry, ", ".join(keys) or _plain_words(entry))]

    return judge
