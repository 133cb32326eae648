"""What the register remembers between two calls: where each run's entries stand, and its line of the lists.

A small database beside the pages. It is never evidence and never needed: where it is missing, damaged or of
another version everything is read again.
"""

import json
import sqlite3
from collections.abc import Iterable, Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from assayfolio.errors import MachineError
from assayfolio.evidence.entries import TrailHead
from assayfolio.pages.values import (
    RunRow,
    RunSeries,
    StudyRow,
    row_from_json,
    series_from_json,
    study_from_json,
)
from assayfolio.workflow.index_trail import START, Mark

_SCHEMA = """
CREATE TABLE meta (one INTEGER PRIMARY KEY CHECK (one = 1), made_by TEXT, seq INTEGER, sha256 TEXT,
                   begins INTEGER, ends INTEGER, faults INTEGER);
CREATE TABLE runs (place INTEGER PRIMARY KEY, study TEXT, number INTEGER, lines TEXT, data TEXT,
                   replaces TEXT, line TEXT, series TEXT, state TEXT, title TEXT, folio TEXT, stands INTEGER);
CREATE UNIQUE INDEX by_name ON runs (study, number);
CREATE INDEX by_data ON runs (data);
CREATE INDEX by_replaced ON runs (replaces) WHERE replaces IS NOT NULL;
CREATE INDEX by_state ON runs (state);
CREATE INDEX by_folio ON runs (folio);
CREATE TABLE files (sha256 TEXT PRIMARY KEY, study TEXT, begins INTEGER, size INTEGER);
CREATE INDEX by_study ON files (study, begins);
CREATE TABLE protocols (study TEXT, number INTEGER, lines TEXT, PRIMARY KEY (study, number));
CREATE TABLE records (subject TEXT PRIMARY KEY, place INTEGER, lines TEXT);
CREATE TABLE studies (study TEXT PRIMARY KEY, line TEXT);
"""

Places = list[tuple[int, int]]


@dataclass(frozen=True, slots=True)
class RememberedRun:
    """A run: its place among all, the places of its entries, the run it replaces.

    `data` is a key that the runs of a study on exactly the same data share; empty where none were read.
    """

    place: int
    study: str
    number: int
    lines: Places
    data: str
    replaces: str | None


class Memory:
    """The database of one register."""

    def __init__(self, connection: sqlite3.Connection) -> None:
        self._db = connection

    def begin(self, made_by: str) -> None:
        """Start anew, for the version `made_by` of program and pages."""
        self._db.executescript(_SCHEMA)
        self._db.execute("INSERT INTO meta VALUES (1, ?, ?, ?, ?, ?, 0)", (made_by, *_mark_values(START)))

    def made_by(self) -> str:
        """The version that filled it; empty where it holds nothing."""
        try:
            found = self._db.execute("SELECT made_by FROM meta").fetchone()
        except sqlite3.DatabaseError:
            return ""
        return str(found[0]) if found else ""

    @property
    def mark(self) -> Mark:
        """How far the trail was read."""
        seq, sha256, begins, ends = self._db.execute("SELECT seq, sha256, begins, ends FROM meta").fetchone()
        return Mark(TrailHead(seq, sha256), begins, ends)

    @property
    def faults(self) -> int:
        """How many lines of the trail were no orderly entries."""
        return int(self._db.execute("SELECT faults FROM meta").fetchone()[0])

    def advance(self, mark: Mark, faults: int) -> None:
        """The trail was read up to `mark`, with so many more faults."""
        self._db.execute(
            "UPDATE meta SET seq = ?, sha256 = ?, begins = ?, ends = ?, faults = faults + ?",
            (*_mark_values(mark), faults),
        )

    # runs

    def add_run(self, study: str, number: int, data: str) -> bool:
        """A run that was given its number; False where there is one already."""
        cursor = self._db.execute(
            "INSERT OR IGNORE INTO runs (place, study, number, lines, data) "
            "SELECT coalesce(max(place), 0) + 1, ?, ?, '[]', ? FROM runs",
            (study, number, data),
        )
        return cursor.rowcount == 1

    def add_line(self, study: str, number: int, begin: int, size: int) -> bool:
        """One more entry about a run; False where the run is not known."""
        cursor = self._db.execute(
            "UPDATE runs SET lines = json_insert(lines, '$[#]', json_array(?, ?)) "
            "WHERE study = ? AND number = ?",
            (begin, size, study, number),
        )
        return cursor.rowcount == 1

    def set_replaced(self, study: str, number: int, replaced: str) -> None:
        """The run replaces another."""
        self._db.execute(
            "UPDATE runs SET replaces = ? WHERE study = ? AND number = ?", (replaced, study, number)
        )

    def run(self, study: str, number: int) -> RememberedRun | None:
        """The run of this number."""
        found = self._db.execute(_RUN + "WHERE study = ? AND number = ?", (study, number)).fetchone()
        return None if found is None else _remembered(found)

    def replacing(self, subject: str) -> list[RememberedRun]:
        """The runs that replace the run `subject`."""
        found = self._db.execute(_RUN + "WHERE replaces = ? ORDER BY place", (subject,))
        return [_remembered(one) for one in found]

    def on_same_data(self, data: str) -> list[int]:
        """The numbers of the runs with this key: of one study, on exactly the same data."""
        found = self._db.execute("SELECT number FROM runs WHERE data = ? ORDER BY number", (data,))
        return [int(one[0]) for one in found]

    def put_row(self, row: RunRow, series: RunSeries | None, stands: bool) -> None:
        """The run's line of the lists, and its figures where it stands."""
        self._db.execute(
            "UPDATE runs SET line = ?, series = ?, state = ?, title = ?, folio = ?, stands = ? "
            "WHERE place = ?",
            (
                _text(row.as_json()),
                None if series is None else _text(series.as_json()),
                row.state,
                row.title,
                row.folio,
                int(stands),
                row.place,
            ),
        )

    def rows(self, first: int, last: int) -> list[RunRow]:
        """The lines of the runs at these places, both included, in their order."""
        return _rows(
            self._db.execute(
                "SELECT line FROM runs WHERE place BETWEEN ? AND ? ORDER BY place", (first, last)
            )
        )

    def newest(self, count: int) -> list[RunRow]:
        """The newest runs of all studies, newest first."""
        return _rows(self._db.execute("SELECT line FROM runs ORDER BY place DESC LIMIT ?", (count,)))

    def rows_of(self, study: str, first: int, last: int) -> list[RunRow]:
        """The lines of a study's runs by their order among its runs, from one."""
        return _rows(
            self._db.execute(
                "SELECT line FROM runs WHERE study = ? ORDER BY number LIMIT ? OFFSET ?",
                (study, last - first + 1, first - 1),
            )
        )

    def newest_of(self, study: str, count: int) -> list[RunRow]:
        """The newest runs of a study, newest first."""
        return _rows(
            self._db.execute(
                "SELECT line FROM runs WHERE study = ? ORDER BY number DESC LIMIT ?", (study, count)
            )
        )

    def newest_standing(self, study: str) -> RememberedRun | None:
        """The newest run of a study that stands."""
        found = self._db.execute(
            _RUN + "WHERE study = ? AND stands = 1 ORDER BY number DESC LIMIT 1", (study,)
        ).fetchone()
        return None if found is None else _remembered(found)

    def series_of(self, study: str, count: int) -> list[RunSeries]:
        """The figures of the newest runs of a study that stand, oldest first."""
        found = self._db.execute(
            "SELECT series FROM runs WHERE study = ? AND stands = 1 AND series IS NOT NULL "
            "ORDER BY number DESC LIMIT ?",
            (study, count),
        ).fetchall()
        return [series_from_json(json.loads(one[0])) for one in reversed(found)]

    def title_of(self, study: str) -> str:
        """The title of the newest run of a study that tells one."""
        found = self._db.execute(
            "SELECT title FROM runs WHERE study = ? AND title != '' ORDER BY number DESC LIMIT 1", (study,)
        ).fetchone()
        return "" if found is None else str(found[0])

    def count(self, study: str | None = None) -> int:
        """How many runs there are, of all studies or of one."""
        if study is None:
            return int(self._db.execute("SELECT coalesce(max(place), 0) FROM runs").fetchone()[0])
        return int(self._db.execute("SELECT count(*) FROM runs WHERE study = ?", (study,)).fetchone()[0])

    def order_in_study(self, study: str, number: int) -> int:
        """Which of its study's runs this one is, from one."""
        found = self._db.execute("SELECT count(*) FROM runs WHERE study = ? AND number <= ?", (study, number))
        return int(found.fetchone()[0])

    def states(self) -> list[tuple[str, int]]:
        """How many runs are in each state."""
        found = self._db.execute("SELECT state, count(*) FROM runs GROUP BY state ORDER BY state")
        return [(str(state), int(count)) for state, count in found]

    def with_folio(self, results: Sequence[str]) -> list[tuple[str, int]]:
        """Study and number of the runs whose folio was one of `results` when it was looked at."""
        wanted = json.dumps(list(results))
        found = self._db.execute(
            "SELECT study, number FROM runs WHERE folio IN (SELECT value FROM json_each(?))", (wanted,)
        )
        return [(str(study), int(number)) for study, number in found]

    def folio_of(self, study: str, number: int) -> str:
        """What the folio of a run was when it was looked at."""
        found = self._db.execute("SELECT folio FROM runs WHERE study = ? AND number = ?", (study, number))
        return str(found.fetchone()[0])

    # received files, protocols, the laboratory's records, studies

    def add_file(self, sha256: str, study: str | None, begin: int, size: int) -> None:
        """A raw data file that was entered; the first entry of a digest counts."""
        self._db.execute("INSERT OR IGNORE INTO files VALUES (?, ?, ?, ?)", (sha256, study, begin, size))

    def knows_file(self, sha256: str) -> bool:
        """Whether a raw data file with this digest was entered."""
        return self._db.execute("SELECT 1 FROM files WHERE sha256 = ?", (sha256,)).fetchone() is not None

    def first_file(self, study: str) -> Places:
        """The place of the entry of the first raw data file of a study."""
        found = self._db.execute(
            "SELECT begins, size FROM files WHERE study = ? ORDER BY begins LIMIT 1", (study,)
        )
        return [(int(begin), int(size)) for begin, size in found]

    def add_protocol_line(self, study: str, number: int, begin: int, size: int) -> None:
        """One more entry about a protocol."""
        self._db.execute(
            "INSERT INTO protocols VALUES (?, ?, json_array(json_array(?, ?))) ON CONFLICT DO UPDATE "
            "SET lines = json_insert(lines, '$[#]', json_array(?, ?))",
            (study, number, begin, size, begin, size),
        )

    def protocol_lines(self, study: str) -> Places:
        """The places of all entries about a study's protocols."""
        found = self._db.execute("SELECT lines FROM protocols WHERE study = ? ORDER BY number", (study,))
        return [place for one in found for place in _places(one[0])]

    def add_record_line(self, subject: str, begin: int, size: int) -> None:
        """One more entry about one of the laboratory's own folios."""
        self._db.execute(
            "INSERT INTO records VALUES (?, ?, json_array(json_array(?, ?))) ON CONFLICT DO UPDATE "
            "SET lines = json_insert(lines, '$[#]', json_array(?, ?))",
            (subject, begin, begin, size, begin, size),
        )

    def newest_records(self, count: int) -> list[Places]:
        """The places of the entries about the newest of the laboratory's folios, newest first."""
        found = self._db.execute("SELECT lines FROM records ORDER BY place DESC LIMIT ?", (count,))
        return [_places(one[0]) for one in found]

    def put_study(self, row: StudyRow) -> None:
        """The study's line of the list."""
        self._db.execute("INSERT OR REPLACE INTO studies VALUES (?, ?)", (row.study, _text(row.as_json())))

    def studies(self) -> list[StudyRow]:
        """The lines of all studies, by name."""
        found = self._db.execute("SELECT line FROM studies ORDER BY study")
        return [study_from_json(json.loads(one[0])) for one in found]


_RUN = "SELECT place, study, number, lines, data, replaces FROM runs "


def _remembered(found: Sequence[Any]) -> RememberedRun:
    place, study, number, lines, data, replaces = found
    return RememberedRun(place, study, number, _places(lines), data, replaces)


def _places(text: str) -> Places:
    return [(begin, size) for begin, size in json.loads(text)]


def _rows(found: Iterable[Sequence[Any]]) -> list[RunRow]:
    return [row_from_json(json.loads(one[0])) for one in found]


def _text(value: object) -> str:
    return json.dumps(value, ensure_ascii=False, separators=(",", ":"))


def _mark_values(mark: Mark) -> tuple[int, str, int, int]:
    return mark.head.seq, mark.head.sha256, mark.begin, mark.end


@contextmanager
def open_memory(path: Path) -> Iterator[Memory]:
    """The database at `path`, made where it is missing; changes are kept unless something is raised."""
    try:
        connection = sqlite3.connect(path)
        try:
            connection.execute("BEGIN")
            yield Memory(connection)
            connection.commit()
        finally:
            connection.close()
    except sqlite3.Error as error:
        raise MachineError(
            f"{path}: what the register remembers cannot be used: {error}. "
            "It is no record: remove it, and run `assayfolio index --rebuild`."
        ) from error
