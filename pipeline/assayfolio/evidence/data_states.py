"""The state of every raw data file: what the register says of it, against what lies in the workspace now.

used    - a completed run has read it; its bytes are kept in that run's folio
open    - named by a study definition, and not yet in any completed run
orphan  - in no completed run, and no study definition would bring it into one: none names it, or the bytes
          that were seen are gone or changed
"""

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from typing import Literal

from assayfolio.evidence.register import COMPLETED, DataUse, ReceivedFile, Refusal, Register

State = Literal["used", "open", "orphan"]


@dataclass(frozen=True, slots=True)
class StandingFile:
    """A data file as it lies in the workspace now.

    `sha256` is None where it cannot be read; `named_by` holds the study definitions that name it.
    """

    path: str
    size: int
    sha256: str | None
    named_by: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class DataFile:
    """One data file of the register; `received` is None where no run has seen it yet.

    `path` is where it was first seen, or else where it lies. `notes` say in words why the state is what it
    is and what has become of the file since.
    """

    path: str
    size: int
    sha256: str | None
    state: State
    notes: tuple[str, ...]
    named_by: tuple[str, ...]
    received: ReceivedFile | None
    uses: tuple[DataUse, ...]
    refusals: tuple[Refusal, ...]


def data_files(register: Register, standing: Sequence[StandingFile]) -> tuple[DataFile, ...]:
    """Every file that was received, in that order, then those that lie there unseen, by path."""
    by_path = {file.path: file for file in standing}
    by_digest: dict[str, list[StandingFile]] = {}
    for file in standing:
        if file.sha256 is not None:
            by_digest.setdefault(file.sha256, []).append(file)
    seen = [
        _of_received(register, file, by_digest.get(file.sha256, ()), by_path.get(file.path))
        for file in register.received
    ]
    known_paths = {file.path for file in register.received}
    unseen = [
        _of_unseen(file)
        for file in standing
        if file.sha256 not in register.digests and (file.sha256 is not None or file.path not in known_paths)
    ]
    return (*seen, *sorted(unseen, key=lambda file: file.path))


def _of_received(
    register: Register,
    file: ReceivedFile,
    copies: Iterable[StandingFile],
    there: StandingFile | None,
) -> DataFile:
    uses, refusals = register.uses_of(file.sha256), register.refusals_of(file.sha256)
    unreadable = [there] if there is not None and there.sha256 is None else []
    places = sorted([*copies, *unreadable], key=lambda copy: (copy.path != file.path, copy.path))
    named_by = tuple(sorted({name for copy in places for name in copy.named_by}))
    used = any(use.outcome == COMPLETED for use in uses)
    state: State = "used" if used else "open" if named_by else "orphan"
    notes = list(_whereabouts(file, places, there))
    if not used and places and not named_by:
        notes.append("no study definition names it any more")
    if not used:
        notes.append(_why_not_used(uses, refusals))
    return DataFile(file.path, file.size, file.sha256, state, tuple(notes), named_by, file, uses, refusals)


def _whereabouts(
    file: ReceivedFile, places: Sequence[StandingFile], there: StandingFile | None
) -> Iterator[str]:
    """What has become of the bytes that were seen; nothing where they lie where they were."""
    if there is None:
        yield "no longer there"
    elif there.sha256 is None:
        yield "cannot be read now, so whether it is as it was seen is not known"
    elif there.sha256 != file.sha256:
        yield f"changed since: other bytes lie there now (SHA-256 {there.sha256[:8]})"
    elsewhere = [copy.path for copy in places if copy.path != file.path]
    if elsewhere:
        yield f"the same bytes lie at {', '.join(elsewhere)}"


def _why_not_used(uses: Sequence[DataUse], refusals: Sequence[Refusal]) -> str:
    if uses:
        return "in no completed run"
    return "in refused runs only" if refusals else "seen, and then in no run"


def _of_unseen(file: StandingFile) -> DataFile:
    note = "no run has seen it yet" if file.named_by else "no study definition names it"
    if file.sha256 is None:
        note = f"{note}; it cannot be read"
    state: State = "open" if file.named_by else "orphan"
    return DataFile(file.path, file.size, file.sha256, state, (note,), file.named_by, None, (), ())
