"""The intake register: every raw data file that was ever seen, derived from the audit trail alone.

A raw data file is entered once, by its digest, in an entry `received`, before it is validated: path, size,
SHA-256 and the study it was seen for. The entries `allotted` and `refused` say which of their inputs are raw
data (`data`) and which is the plan (`plan`). Entries of a version that did not say so are understood by the
digests that were received.

The *executions* of a study on a set of data files are its runs that were given a number on exactly these
digests, whatever became of them: completed, failed, or killed.
"""

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property

from assayfolio.canonical import Json
from assayfolio.evidence.entries import TrailEntry, is_digest
from assayfolio.evidence.history import RunHistory, run_histories

RECEIVED = "received"
REFUSED = "refused"

COMPLETED = "completed"
FAILED = "failed"
INTERRUPTED = "interrupted"
NOT_ENDED = "not ended"


def received_details(path: str, size: int, sha256: str, study: str | None) -> dict[str, Json]:
    """What an entry `received` says of a raw data file."""
    return {"path": path, "size": size, "sha256": sha256, "study": study}


def inputs_details(
    inputs: Mapping[str, str], plan: str | None, exclusions: str | None, data: Sequence[str]
) -> dict[str, Json]:
    """What `allotted` and `refused` say of their inputs: digests by path, and which path is what.

    `plan` is None where a run was refused before the study definition could be read, `exclusions` where none
    were made.
    """
    return {"inputs": dict(inputs), "plan": plan, "exclusions": exclusions, "data": list(data)}


@dataclass(frozen=True, slots=True)
class ReceivedFile:
    """A raw data file as it was first seen: `path` in the workspace, `time` and `seq` of the entry."""

    sha256: str
    path: str
    size: int
    study: str | None
    time: str
    seq: int


@dataclass(frozen=True, slots=True)
class DataUse:
    """One run and what it read: the digests of its plan and its raw data, and what became of it.

    `plan` is None where the trail does not say which input was the plan, `exclusions` where there were none.
    """

    study: str
    number: int
    subject: str
    plan: str | None
    exclusions: str | None
    data: frozenset[str]
    outcome: str


@dataclass(frozen=True, slots=True)
class Refusal:
    """A run that was refused: its entry, what it was about, the raw data that had been read by then."""

    seq: int
    time: str
    subject: str
    data: frozenset[str]


@dataclass(frozen=True, slots=True)
class Executions:
    """The place of one run among the executions of its study on exactly its data.

    `same` holds every such run in the order of their numbers, `number` is the run's own place from one.
    `others` are the runs, of any study, that used some of these data without being one of `same`.
    """

    use: DataUse
    number: int
    same: tuple[DataUse, ...]
    others: tuple[DataUse, ...]

    @property
    def earlier(self) -> tuple[DataUse, ...]:
        """The executions before this one."""
        return self.same[: self.number - 1]


@dataclass(frozen=True)
class Register:
    """Files in the order in which they were first seen, runs in the order of their allotment."""

    received: tuple[ReceivedFile, ...]
    uses: tuple[DataUse, ...]
    refusals: tuple[Refusal, ...]

    @cached_property
    def digests(self) -> frozenset[str]:
        """The digests of every file that was received."""
        return frozenset(file.sha256 for file in self.received)

    @cached_property
    def _by_data(self) -> Mapping[tuple[str, frozenset[str]], tuple[DataUse, ...]]:
        grouped: dict[tuple[str, frozenset[str]], list[DataUse]] = {}
        for use in self.uses:
            grouped.setdefault((use.study, use.data), []).append(use)
        return {key: tuple(sorted(uses, key=lambda use: use.number)) for key, uses in grouped.items()}

    @cached_property
    def _by_digest(self) -> Mapping[str, tuple[DataUse, ...]]:
        grouped: dict[str, list[DataUse]] = {}
        for use in self.uses:
            for digest in use.data:
                grouped.setdefault(digest, []).append(use)
        return {digest: tuple(uses) for digest, uses in grouped.items()}

    @cached_property
    def _places(self) -> Mapping[str, int]:
        return {use.subject: place for place, use in enumerate(self.uses)}

    def uses_of(self, sha256: str) -> tuple[DataUse, ...]:
        """The runs that read this file."""
        return self._by_digest.get(sha256, ())

    def refusals_of(self, sha256: str) -> tuple[Refusal, ...]:
        """The refused runs that had read this file."""
        return tuple(refusal for refusal in self.refusals if sha256 in refusal.data)

    def executions(self, subject: str) -> Executions | None:
        """The place of the run `subject` among the executions on its data; None where it read no data."""
        place = self._places.get(subject)
        use = None if place is None else self.uses[place]
        if use is None or not use.data:
            return None
        same = self._by_data[(use.study, use.data)]
        sharing = {self._places[other.subject] for digest in use.data for other in self.uses_of(digest)}
        others = sharing.difference(self._places[other.subject] for other in same)
        number = 1 + sum(other.number < use.number for other in same)
        return Executions(use, number, same, tuple(self.uses[place] for place in sorted(others)))


def read_register(entries: Iterable[TrailEntry]) -> Register:
    """The register that the trail's `entries` amount to; a malformed entry adds nothing."""
    listed = tuple(entries)
    received: dict[str, ReceivedFile] = {}
    for entry in listed:
        file = received_file(entry)
        if file is not None:
            received.setdefault(file.sha256, file)
    histories = sorted(run_histories(listed), key=lambda run: run.allotted.seq)
    refusals = tuple(
        Refusal(entry.seq, entry.time, entry.subject, data_digests(entry, received))
        for entry in listed
        if entry.action == REFUSED
    )
    uses = tuple(_use_of(run, received) for run in histories)
    return Register(tuple(received.values()), uses, refusals)


def received_file(entry: TrailEntry) -> ReceivedFile | None:
    """The file that an entry `received` tells of; None for any other entry, and where it is malformed."""
    if entry.action != RECEIVED:
        return None
    path, size, digest, study = (entry.details.get(key) for key in ("path", "size", "sha256", "study"))
    if not isinstance(path, str) or not isinstance(size, int) or isinstance(size, bool) or size < 0:
        return None
    if not is_digest(digest) or not (study is None or isinstance(study, str)):
        return None
    return ReceivedFile(str(digest), path, size, study, entry.time, entry.seq)


def named_data(entry: TrailEntry) -> tuple[str, ...] | None:
    """The paths of the raw data among the inputs, as the entry says; None where it does not say."""
    listed = entry.details.get("data")
    if not isinstance(listed, list):
        return None
    return tuple(path for path in listed if isinstance(path, str))


def data_digests(entry: TrailEntry, received: Iterable[str]) -> frozenset[str]:
    """The digests of the raw data among the inputs of an entry `allotted` or `refused`."""
    inputs = _inputs(entry)
    paths = named_data(entry)
    if paths is None:
        return frozenset(inputs.values()) & frozenset(received)
    return frozenset(inputs[path] for path in paths if path in inputs)


def _inputs(entry: TrailEntry) -> Mapping[str, str]:
    inputs = entry.details.get("inputs")
    if not isinstance(inputs, dict):
        return {}
    return {path: str(digest) for path, digest in inputs.items() if is_digest(digest)}


def _use_of(run: RunHistory, received: Mapping[str, ReceivedFile]) -> DataUse:
    inputs, details = _inputs(run.allotted), run.allotted.details
    plan, exclusions = (
        inputs.get(path) if isinstance(path, str) else None
        for path in (details.get("plan"), details.get("exclusions"))
    )
    return DataUse(
        study=run.study,
        number=run.number,
        subject=run.subject,
        plan=plan,
        exclusions=exclusions,
        data=data_digests(run.allotted, received),
        outcome=_outcome(run),
    )


def _outcome(run: RunHistory) -> str:
    if run.sealed is not None:
        return FAILED if run.failure is not None else COMPLETED
    if run.interrupted is not None:
        return INTERRUPTED
    return FAILED if run.failure is not None else NOT_ENDED
