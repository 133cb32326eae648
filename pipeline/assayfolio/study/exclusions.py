"""Reading the exclusions file: rows of the raw data that are left out, each with reason and person."""

from dataclasses import dataclass

from assayfolio.errors import Place
from assayfolio.study.dates import date_or_time
from assayfolio.study.faults import Faults, shown
from assayfolio.study.fields import Fields, UnreadableError, Value, each, label, line_of_text
from assayfolio.study.nodes import SequenceNode
from assayfolio.study.numbers import whole_number
from assayfolio.study.paths import path_such_as
from assayfolio.study.reasons import SHORTEST_REASON, emptiness
from assayfolio.study.root import root_fields
from assayfolio.study.vocabulary import EXCLUSION_FILE_KEYS, EXCLUSION_KEYS, LONGEST_REASON

LAST_ROW = 1_000_000_000

_row = whole_number(2, LAST_ROW)  # the first line that can stand below the column names
_file = path_such_as("data/values.csv")
_reason_text = line_of_text(LONGEST_REASON)


@dataclass(frozen=True, slots=True)
class Exclusion:
    """One row that a person leaves out of the analysis.

    `row` is the line of the data file, and `value` the text of the value there, which guards against shifted
    rows. `file` names the data file where there are several, else None. `decided_at` is a day or a point in
    time as typed; `place` is where the entry stands in the exclusions file.
    """

    row: int
    file: str | None
    value: str
    reason: str
    decided_by: str
    decided_at: str
    approved_by: str | None
    place: Place


def read_exclusions(content: bytes, file: str) -> tuple[Exclusion, ...]:
    """The exclusions in `content`, in the order of the file; `file` is its name in messages.

    An empty list is read as no exclusion. Raises StudyError with every fault of the file, each with line and
    column; among them are reasons that say nothing and the same value of a row twice.
    """
    faults = Faults(file)
    fields = root_fields(content, EXCLUSION_FILE_KEYS, faults)
    exclusions = None if fields is None else fields.required("exclusions", _entries)
    _report_repeats(exclusions or (), faults)
    faults.raise_if_any("the exclusions")
    assert exclusions is not None, "a file without faults is complete"
    return exclusions


def _entries(value: Value) -> tuple[Exclusion, ...]:
    if isinstance(value.node, SequenceNode):
        return each(_exclusion, value.items())
    raise value.wrong_kind("a list of entries, each beginning with a hyphen, or [] where nothing is excluded")


def _exclusion(value: Value) -> Exclusion:
    fields = Fields.of(value, EXCLUSION_KEYS)
    row = fields.required("row", _row)
    file = fields.optional("file", _file)
    text = fields.required("value", label)
    reason = fields.required("reason", _reason)
    decided_by = fields.required("decided-by", label)
    decided_at = fields.required("decided-at", date_or_time)
    approved_by = fields.optional("approved-by", label)
    if approved_by is not None and approved_by == decided_by:
        found = f"`{fields.named('approved-by')}` is {shown(approved_by)}, who decided it"
        fields.faults.add(fields.place_of("approved-by"), found, "name another person, or leave the key out")
    if row is None or text is None or reason is None or decided_by is None or decided_at is None:
        raise UnreadableError
    return Exclusion(row, file, text, reason, decided_by, decided_at, approved_by, value.node.place)


def _reason(value: Value) -> str:
    text = _reason_text(value)
    empty = emptiness(text)
    if empty is None:
        return text
    expected = f"what happened, and where that is recorded, in {SHORTEST_REASON} characters or more"
    raise value.unreadable(f"is {shown(text)}, {empty}", expected)


def _report_repeats(exclusions: tuple[Exclusion, ...], faults: Faults) -> None:
    first: dict[tuple[str | None, int, str], Place] = {}
    for exclusion in exclusions:
        key = (exclusion.file, exclusion.row, exclusion.value)
        if key in first:
            found = f"row {exclusion.row} with the value {shown(exclusion.value)} is excluded a second time"
            faults.add(exclusion.place, found, f"the first is on line {first[key].line}; keep one of them")
        first.setdefault(key, exclusion.place)
