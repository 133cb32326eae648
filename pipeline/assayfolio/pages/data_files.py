"""The data files that the pages load: scripts with rows of text and numbers, a page of runs in each.

They are scripts because a browser lets a page that was opened from a disk load scripts beside it, and no
other kind of data. Each holds one call with JSON in it, in ASCII; the characters that mean something in
markup are escaped, so that no place where such a file might be pasted could take a label for an element.
"""

import json
from collections.abc import Sequence

from assayfolio.canonical import Json
from assayfolio.pages.values import FrontPage, Head, RunRow, StudyRow

PAGE_SIZE = 500
"""Runs in one data file."""

_ESCAPES = str.maketrans({"<": "\\u003c", ">": "\\u003e", "&": "\\u0026", "'": "\\u0027", "\x7f": "\\u007f"})


def page_of(place: int) -> int:
    """The data file, counted from one, that holds the run at `place`."""
    return (place - 1) // PAGE_SIZE + 1


def pages_for(total: int) -> int:
    """How many data files `total` runs fill."""
    return -(-total // PAGE_SIZE)


def page_name(page: int) -> str:
    """The name of a data file."""
    return f"runs-{page:04d}.js"


def runs_file(page: int, rows: Sequence[RunRow]) -> bytes:
    """One data file of runs, in the order in which they got their numbers."""
    lines = ",\n".join(_text(_row(row)) for row in rows)
    return f"register.take({page},[\n{lines}\n]);\n".encode("ascii")


def contents_file(front: FrontPage) -> bytes:
    """What the data files hold altogether: how many there are, and the studies' titles."""
    return _contents(front.total, front.studies)


def study_contents_file(row: StudyRow) -> bytes:
    """The same for the runs of one study."""
    return _contents(row.runs, (row,))


def head_file(head: Head) -> bytes:
    """Up to which entry of the trail the register tells, for pages that were made earlier."""
    return f"register.stands({head.seq},{_text(head.sha256)});\n".encode("ascii")


def _contents(total: int, studies: Sequence[StudyRow]) -> bytes:
    value: dict[str, Json] = {
        "total": total,
        "pageSize": PAGE_SIZE,
        "studies": [[row.study, row.title] for row in studies],
    }
    return f"register.begin({_text(value)});\n".encode("ascii")


def _row(row: RunRow) -> list[Json]:
    # The order is that of the script that reads it.
    return [
        row.study,
        row.number,
        row.lot,
        row.time,
        row.state,
        row.standing,
        row.overall,
        row.criteria,
        row.execution,
        row.executions,
        row.folio,
        row.by,
    ]


def _text(value: Json) -> str:
    return json.dumps(value, ensure_ascii=True, separators=(",", ":")).translate(_ESCAPES)
