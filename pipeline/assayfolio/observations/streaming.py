"""Long texts: the exact sums of each level in one pass and in constant memory, without keeping any row.

The same numbers, counts and faults as `reading` gives. Stretches of plain rows are taken column by column
(`plain_stretch`); whatever is out of the ordinary - a row with another number of cells, an entry that is no
plain number, a blank - goes through the same steps row by row as in a short text, so that every fault is
named with its line and column in the same words.
"""

from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass, replace

import numpy as np

from assayfolio.errors import DataError
from assayfolio.observations.decoding import refuse_empty, refuse_other_kinds, utf8_mark
from assayfolio.observations.faults import FaultList, refusal
from assayfolio.observations.gathering import Gathering
from assayfolio.observations.guard import unguarded
from assayfolio.observations.header import CHARACTERS, Header, find_header
from assayfolio.observations.layout import MOST_LEVELS, extras_of, received_rows
from assayfolio.observations.long_text import BLOCK, LongFile, UnfitTextError, plain_lines, refuse_unfit_text
from assayfolio.observations.plain_stretch import PlainStretches, Stretch
from assayfolio.observations.received import Received, SheetRow
from assayfolio.observations.row_stretches import Feed, Lines, PlainLines, go_through
from assayfolio.observations.rows import Broken, Row, rows
from assayfolio.observations.sheets import Sheet, wanted_columns
from assayfolio.observations.text_file import cells_above, guard_notice, guarded_levels, unguarded_row
from assayfolio.observations.values import Observations, RawFile
from assayfolio.study.plan import DataPlan, MeasurementFact

_HEADER_ROOM = 1 << 17


def kept_from_streaming(plan: DataPlan) -> str | None:
    """What in `plan` needs the single rows, so that files cannot be summed as they come; None for nothing."""
    needs = (
        (plan.layout == "wide", "layout: wide"),
        (plan.encoding != "utf-8", f"encoding: {plan.encoding}"),
        (plan.order is not None, "order"),
        (plan.unit_column is not None, "unit-column"),
        (plan.replicate_unit is not None, "replicate-unit"),
        (plan.exclusions is not None, "exclusions"),
        (plan.below_limit != "refuse", f"below-limit: {plan.below_limit}"),
        (plan.above_limit != "refuse", f"above-limit: {plan.above_limit}"),
    )
    return next((key for needed, key in needs if needed), None)


def stream_observations(
    files: Sequence[LongFile], plan: DataPlan, measurement: Sequence[MeasurementFact] = ()
) -> tuple[Observations, ...]:
    """The observations of each response of `plan`, in its order, as totals: their `rows` are empty.

    The plan must be one that `kept_from_streaming` has nothing against. Raises DataError with all faults of
    the files as `read_all_observations` does, except that reading stops after 1,000 of them, and that more
    than 5,000 levels in all files together are refused.
    """
    gathering = Gathering([file.name for file in files], plan, measurement)
    raws: list[RawFile] = []
    extra_columns: dict[str, None] = {}
    for at, file in enumerate(files):
        beginning = next(file.stretches(), b"")
        refuse_other_kinds(beginning, file.name)
        utf8_mark(beginning, file.name)
        try:
            taking = _FileTaking(gathering, at, file, plan, measurement)
            raws.append(taking.all())
        except (UnfitTextError, DataError) as error:
            refuse_unfit_text(file)  # which comes before everything else that may be wrong
            if isinstance(error, DataError):
                raise
            raise refusal(
                file.name, "the file was changed while it was read", "run the study again"
            ) from None
        extra_columns |= dict.fromkeys(extras_of(taking.opened.header.names, plan))
        if gathering.full:
            break
    return gathering.observations(tuple(raws), tuple(extra_columns))


@dataclass(frozen=True, slots=True)
class _Opened:
    """A file at its first row: its header, what is known of it before it is read, the text of its rows."""

    header: Header
    raw: RawFile
    feed: Feed

    @property
    def separator(self) -> str:
        return CHARACTERS[self.header.separator]


def _opened(file: LongFile, plan: DataPlan, wanted: Sequence[str], faults: FaultList) -> _Opened:
    stretches = file.stretches()
    head = next(stretches, b"")
    while not _holds_header(head, plan.header_row) and (more := next(stretches, b"")):
        head += more
    mark = utf8_mark(head, file.name)
    body = plain_lines(head[len(mark) :])
    text = body.decode("utf-8")
    refuse_empty(text, file.name)
    lines = _around_header(text, plan.header_row).split("\n")[:-1]
    header = find_header(lines, plan.header_row - 1, wanted, faults)
    character = CHARACTERS[header.separator]
    raw = RawFile(
        file=file.name,
        size=0,
        sha256="",
        form="gzip text" if file.packed else "text",
        separator=header.separator,
        encoding=plan.encoding,
        byte_order_mark=bool(mark),
        header_row=plan.header_row,
        metadata=tuple(cells_above(lines, at, character, file.name) for at in range(plan.header_row - 1)),
    )
    below = body[_end_of_line(body, header.next_line) :]
    return _Opened(header, raw, Feed(stretches, below, header.next_line, file.block // 2))


def _around_header(text: str, header_row: int) -> str:
    """The lines of `text` down to the header and some more: as much as its cells may take."""
    at = 0
    for _ in range(header_row):
        at = text.find("\n", at) + 1
        if not at:
            return text
    return text[: text.find("\n", at + _HEADER_ROOM) + 1] or text


def _end_of_line(body: bytes, number: int) -> int:
    """Where line `number` of `body` ends; lines count from one, and 0 is before the first."""
    end = 0
    for _ in range(number):
        end = body.index(b"\n", end) + 1
    return end


def _holds_header(head: bytes, header_row: int) -> bool:
    """Whether all of the header stands in `head`: a cell of it may go on in further lines."""
    return head.count(b"\n") >= header_row and (head.count(b'"') % 2 == 0 or len(head) >= BLOCK)


class _FileTaking:
    """One file on its way into the gathering."""

    def __init__(
        self,
        gathering: Gathering,
        at: int,
        file: LongFile,
        plan: DataPlan,
        measurement: Sequence[MeasurementFact],
    ) -> None:
        self._gathering = gathering
        self._at = at
        self._file = file
        self._plan = plan
        self._measurement = measurement
        self._faults = gathering.faults.of[at]
        self.opened = _opened(file, plan, wanted_columns(plan, measurement), self._faults)
        self._plain = PlainStretches(self.opened.header, plan, measurement)
        self._guards: frozenset[str] | None = None
        self._taken = False

    def all(self) -> RawFile:
        """Take every row; what the file is."""
        go_through(self.opened.feed, self.opened.separator, self._plain.read, self._by_columns, self._by_rows)
        if not self._taken and not self._faults.count:
            raise refusal(self._file.name, "the file has column names but no rows", "add the values")
        notices = (guard_notice(self._guards),) if self._guards else ()
        return replace(self.opened.raw, size=self._file.size, sha256=self._file.sha256, notices=notices)

    def _by_columns(self, stretch: Stretch, body: bytes, line: int) -> None:
        if self._gathering.full:
            return
        self._taken = True
        labels = self._names(stretch.labels)
        lines: list[PlainLines] = []

        def rows_at(numbers: Iterable[int]) -> Iterator[Row | Broken]:
            if not lines:
                lines.append(PlainLines(body, line))
            for number in numbers:
                yield next(rows(lines[0], self.opened.separator, line + number))

        def place(number: int) -> tuple[int, int, int]:
            row = next(rows_at([number]))
            spot = row.spot(self._plain.level_at) if isinstance(row, Row) else (row.line, row.column)
            return (self._at, *spot)

        self._gathering.take_levels(self._at, stretch, labels, place)
        self._gathering.take_values(stretch, labels)
        odd = np.flatnonzero(stretch.odd).tolist()
        if odd:
            self._gathering.take_counted_rows(self._at, self._received(rows_at(odd), lambda: lines[0]))

    def _by_rows(self, found: Iterator[Row | Broken], lines: Lines) -> None:
        if not self._gathering.full:
            self._gathering.take_rows(self._at, self._received(found, lambda: lines))

    def _received(
        self, found: Iterator[Row | Broken], lines: Callable[[], Sequence[str]]
    ) -> Iterator[Received]:
        """The values in rows, as received; `lines` are those that the rows stand on."""

        def loose(row: SheetRow, at: int) -> bool:
            line, column = row.spot(at)
            return not lines()[line - 1].startswith('"', column - 1)

        both_commas = self._plan.decimal_mark == "comma" and self.opened.header.separator == "comma"
        sheet = Sheet(
            self.opened.raw,
            self.opened.header.names,
            self._without_guards(found),
            loose if both_commas else None,
        )
        for row in received_rows(self._at, sheet, self._plan, self._measurement, (), self._gathering.faults):
            self._taken = True
            yield row

    def _without_guards(self, found: Iterator[Row | Broken]) -> Iterator[Row | Broken]:
        at = self._plain.level_at
        for row in found:
            if (
                isinstance(row, Row)
                and at < len(row.cells)
                and self._names([row.cells[at]]) != [row.cells[at]]
            ):
                yield unguarded_row(row, at)
            else:
                yield row

    def _names(self, labels: Sequence[str]) -> list[str]:
        """Labels without the guards that are to be taken off them."""
        if self._guards is None and any(unguarded(label) != label for label in labels):
            self._guards = self._guarded_levels()
        return [unguarded(label) if self._guards and label in self._guards else label for label in labels]

    def _guarded_levels(self) -> frozenset[str]:
        """Which levels of the whole file bear a guard: a pass of its own, for files that have one at all."""
        opened = _opened(self._file, self._plan, wanted_columns(self._plan, ()), FaultList(self._file.name))
        levels: set[str] = set()

        def add(labels: Iterable[str]) -> None:
            if len(levels) <= MOST_LEVELS:  # more are refused in the end
                levels.update(labels)

        def by_columns(stretch: Stretch, _: bytes, __: int) -> None:
            add(stretch.labels)

        def by_rows(found: Iterator[Row | Broken], _: Lines) -> None:
            at = self._plain.level_at
            add(row.cells[at] for row in found if isinstance(row, Row) and at < len(row.cells))

        go_through(opened.feed, opened.separator, self._plain.read, by_columns, by_rows)
        return guarded_levels(levels, self._plan)
