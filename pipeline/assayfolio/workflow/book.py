"""The one way in which commands open the audit trail: who and when go into every entry by themselves."""

from collections.abc import Iterator, Mapping, Sequence
from contextlib import contextmanager

from assayfolio.canonical import Json
from assayfolio.evidence.settings import SETTINGS
from assayfolio.evidence.trail import TrailEntry, TrailWriter, open_trail
from assayfolio.evidence.witnesses import Witness
from assayfolio.workflow import surroundings
from assayfolio.workflow.actors import person_in_force
from assayfolio.workflow.clock import EntryClock
from assayfolio.workflow.witnessing import witnesses_of
from assayfolio.workflow.workspace import Workspace


@contextmanager
def trail_book(workspace: Workspace, wait_seconds: float) -> Iterator[TrailWriter]:
    """Hold the workspace's trail for writing.

    Every entry names the account that runs this process and carries, in its details, `by` (person and roles
    as the settings in force have them; before there are any, as the list of people has them) and `at` (local
    time, start-up and counter, whether the clock is kept, and that it stands behind the last entry where it
    does), and the witnesses that the settings name are told of it. Raises what `open_trail` raises.
    """
    account = surroundings.account_name()
    by: dict[str, Json] = {"person": None, "roles": []}
    clock = EntryClock()

    def stamp(last: TrailEntry | None) -> Mapping[str, Json]:
        if last is not None and last.action == SETTINGS:
            by.update(person_in_force(workspace, [last], account))
        return {"by": dict(by), "at": clock.at(last)}

    def witnesses(entries: Sequence[TrailEntry]) -> Sequence[Witness]:
        by.update(person_in_force(workspace, entries, account))
        return witnesses_of(workspace, entries)

    with open_trail(workspace.runs, account, clock.now, wait_seconds, stamp, witnesses) as trail:
        yield trail
