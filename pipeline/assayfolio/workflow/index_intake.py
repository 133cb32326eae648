"""Taking new entries of the audit trail into the register's memory, and what they concern."""

from dataclasses import dataclass, field

from assayfolio.canonical import canonical_digest
from assayfolio.evidence.entries import TrailEntry
from assayfolio.evidence.history import ALLOTTED, split_subject
from assayfolio.evidence.laboratory_folios import split_folio
from assayfolio.evidence.protocols import split_protocol
from assayfolio.evidence.register import data_digests, received_file
from assayfolio.evidence.states import REPLACES
from assayfolio.workflow.index_memory import Memory
from assayfolio.workflow.index_trail import PlacedEntry, TrailLines


@dataclass(slots=True)
class Touched:
    """The runs and studies whose pages may change by what was taken in."""

    runs: set[tuple[str, int]] = field(default_factory=set)
    studies: set[str] = field(default_factory=set)

    def add_run(self, study: str, number: int) -> None:
        """The run, and its study with it."""
        self.runs.add((study, number))
        self.studies.add(study)


def take_in(lines: TrailLines, memory: Memory) -> Touched:
    """Read the trail from where the memory stands to its end."""
    touched = Touched()
    for block in lines.blocks(memory.mark):
        for placed in block.entries:
            _take_entry(memory, placed, touched)
        memory.advance(block.mark, block.faults)
    return touched


def _take_entry(memory: Memory, placed: PlacedEntry, touched: Touched) -> None:
    entry = placed.entry
    run, protocol = split_subject(entry.subject), split_protocol(entry.subject)
    if run is not None:
        _take_run_entry(memory, placed, *run, touched)
    elif protocol is not None:
        memory.add_protocol_line(*protocol, placed.begin, placed.size)
        touched.studies.add(protocol[0])
    file = received_file(entry)
    if file is not None:
        memory.add_file(file.sha256, file.study, placed.begin, placed.size)
        if file.study is not None:
            touched.studies.add(file.study)
    for subject in {entry.subject, entry.details.get("folio")}:
        if isinstance(subject, str) and split_folio(subject) is not None:
            memory.add_record_line(subject, placed.begin, placed.size)


def _take_run_entry(memory: Memory, placed: PlacedEntry, study: str, number: int, touched: Touched) -> None:
    entry = placed.entry
    if entry.action == ALLOTTED:
        data = _data_key(memory, study, entry)
        if memory.add_run(study, number, data) and data:
            for other in memory.on_same_data(data):
                touched.add_run(study, other)  # each says which execution of how many it is
    if not memory.add_line(study, number, placed.begin, placed.size):
        return  # about a run that was never allotted: verification names it
    touched.add_run(study, number)
    if entry.action == REPLACES:
        replaced = entry.details.get("replaced")
        if isinstance(replaced, str) and split_subject(replaced) is not None:
            memory.set_replaced(study, number, replaced)
    remembered = memory.run(study, number)
    replaced_run = split_subject(remembered.replaces) if remembered and remembered.replaces else None
    if replaced_run is not None:
        touched.add_run(*replaced_run)


def _data_key(memory: Memory, study: str, allotted: TrailEntry) -> str:
    """A digest of a study and the set of raw data files that a run of it reads; empty where it reads none."""
    inputs = allotted.details.get("inputs")
    listed = inputs.values() if isinstance(inputs, dict) else ()
    known = [one for one in listed if isinstance(one, str) and memory.knows_file(one)]
    digests = data_digests(allotted, known)
    return canonical_digest([study, *sorted(digests)]) if digests else ""
