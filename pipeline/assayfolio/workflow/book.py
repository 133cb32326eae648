"""The one way in which commands open the audit trail: who and when go into every entry by themselves."""

from collections.abc import Iterator, Mapping, Sequence
from contextlib import contextmanager

from assayfolio.canonical import Json
from assayfolio.evidence.trail import TrailEntry, TrailWriter, open_trail
from assayfolio.evidence.witnesses import Witness
from assayfolio.workflow.actors import actor_of
from assayfolio.workflow.clock import EntryClock
from assayfolio.workflow.witnessing import witnesses_of
from assayfolio.workflow.workspace import Workspace


@contextmanager
def trail_book(workspace: Workspace, wait_seconds: float) -> Iterator[TrailWriter]:
    """Hold the workspace's trail for writing.

    Every entry names the account that runs this process and carries, in its details, `by` (person and roles)
    and `at` (local time, start-up and counter, whether the clock is kept, and that it stands behind the last
    entry where it does), and the witnesses that the settings name are told of it. Raises what `open_trail`
    raises.
    """
    actor = actor_of(workspace)
    by: Json = {"person": actor.person, "roles": list(actor.roles)}
    clock = EntryClock()

    def stamp(last: TrailEntry | None) -> Mapping[str, Json]:
        return {"by": by, "at": clock.at(last)}

    def witnesses(entries: Sequence[TrailEntry]) -> Sequence[Witness]:
        return witnesses_of(workspace, entries)

    with open_trail(workspace.runs, actor.account, clock.now, wait_seconds, stamp, witnesses) as trail:
        yield trail
