"""Many invented runs: as rows of the register, as a trail with their entries, as looks at their folios."""

import hashlib
from collections.abc import Iterator
from datetime import UTC, datetime, timedelta
from pathlib import Path

from assayfolio.evidence.entries import HEAD_FILE, NO_LINE, TRAIL_FILE, TrailEntry, TrailHead
from assayfolio.pages.data_files import (
    PAGE_SIZE,
    contents_file,
    head_file,
    page_name,
    pages_for,
    runs_file,
)
from assayfolio.pages.site import NEWEST_SHOWN, Site
from assayfolio.pages.values import FrontPage, Head, RunRow, StudyRow
from assayfolio.workflow.index_assets import page_files, page_templates
from assayfolio.workflow.index_folio import FolioLook

STUDIES = ("MLK-001", "OIL-014", "SEA-203", "TST-1", "WAX-077")
TITLES = {
    "MLK-001": "Fat in raw milk by three instruments",
    "OIL-014": "Acid value of rapeseed oil, four analysts",
    "SEA-203": "Salinity of brine by position in the tank",
    "TST-1": "Sulfate by three methods",
    "WAX-077": "Melting point of wax <b>by</b> two & more methods",
}
_STATES = ("approved", "approved", "approved", "in review", "draft", "draft", "superseded", "void", "failed")
_BEGIN = datetime(2030, 1, 1, 22, 0, tzinfo=UTC)


def run_rows(count: int) -> list[RunRow]:
    """`count` runs in turn of the studies; every 1,009th has a lot identifier that looks like markup."""
    return [_row(place) for place in range(1, count + 1)]


def _row(place: int) -> RunRow:
    study = STUDIES[place % len(STUDIES)]
    number = (place - 1) // len(STUDIES) + 1
    state = _STATES[place % len(_STATES)]
    result = state != "failed"
    lot = f"L{place:06d}" if place % 1009 else f"<img src=x onerror=alert({place})>&amp;"
    met = "not met (1 of 3)" if place % 97 == 0 else "met (3 of 3)"
    return RunRow(
        place=place,
        study=study,
        number=number,
        name=f"run-{number:04d}",
        lot=lot,
        title=TITLES[study],
        time=f"{(_BEGIN + timedelta(minutes=29 * place)).isoformat()[:19]}.000000Z",
        state=state,
        standing=f"superseded by {study}/run-{number + 1:04d}" if state == "superseded" else "",
        overall=("difference shown" if place % 3 else "difference not shown") if result else "no result",
        criteria=met if result else "no result",
        execution=1,
        executions=1 if place % 50 else 2,
        folio="changed" if place % 601 == 0 else "unchanged",
        by=("Iris Invented", "Otto Invented", "night-service")[place % 3],
    )


def front_of(rows: list[RunRow], head: Head) -> FrontPage:
    """The first page of a register with these rows."""
    by_study = {row.study: row for row in rows}
    counts = {study: sum(row.study == study for row in rows) for study in by_study}
    states = sorted({row.state for row in rows})
    return FrontPage(
        laboratory="Invented laboratory",
        head=head,
        faults=0,
        total=len(rows),
        states=tuple((state, sum(row.state == state for row in rows)) for state in states),
        studies=tuple(_study(by_study[study], counts[study]) for study in sorted(by_study)),
        newest=tuple(reversed(rows[-NEWEST_SHOWN:])),
        records=(),
    )


def _study(newest: RunRow, runs: int) -> StudyRow:
    return StudyRow(
        study=newest.study,
        title=newest.title,
        state="data locked",
        runs=runs,
        newest=newest.name,
        time=newest.time,
        overall=newest.overall,
        criteria=newest.criteria,
    )


def write_front(runs: Path, rows: list[RunRow]) -> Path:
    """The first page with all that it loads, in the folder `runs`; return the page."""
    front = front_of(rows, Head(len(rows) * 4, "0" * 64))
    files = {f"_register/{path}": content for path, content in page_files().items()}
    files["index.html"] = Site(page_templates()).front_page(front)
    files["_register/data/contents.js"] = contents_file(front)
    files["_register/data/head.js"] = head_file(front.head)
    for page in range(1, pages_for(len(rows)) + 1):
        part = rows[(page - 1) * PAGE_SIZE : page * PAGE_SIZE]
        files[f"_register/data/{page_name(page)}"] = runs_file(page, part)
    for path, content in files.items():
        (runs / path).parent.mkdir(parents=True, exist_ok=True)
        (runs / path).write_bytes(content)
    return runs / "index.html"


def write_trail(runs: Path, rows: list[RunRow]) -> None:
    """An orderly trail in which each of `rows` was received, allotted, staged and sealed."""
    runs.mkdir(parents=True, exist_ok=True)
    head = TrailHead(0, NO_LINE)
    with (runs / TRAIL_FILE).open("wb") as file:
        for row in rows:
            for entry in _entries(row, head):
                file.write(entry.line + b"\n")
                head = TrailHead(entry.seq, entry.sha256)
    (runs / HEAD_FILE).write_bytes(head.content)


def seal_of(row: RunRow) -> str:
    """The seal that the trail has of the run."""
    return hashlib.sha256(row.subject.encode()).hexdigest()


def _entries(row: RunRow, head: TrailHead) -> Iterator[TrailEntry]:
    data = hashlib.sha256(f"data of {row.subject}".encode()).hexdigest()
    path = f"configs/data/{row.study}-{row.number}.csv"
    by = {"by": {"person": row.by, "roles": ["runner"]}}
    events = (
        ("received", row.study, {"path": path, "size": 402, "sha256": data, "study": row.study}),
        (
            "allotted",
            row.subject,
            {"number": row.number, "inputs": {path: data}, "data": [path], "sign_off": ["author"]},
        ),
        ("staged", row.subject, {"files": 21}),
        ("sealed", row.subject, {"outcome": "completed", "seal": seal_of(row)}),
    )
    seq, previous = head.seq, head.sha256
    for action, subject, details in events:
        seq += 1
        entry = TrailEntry(seq, row.time, "account", action, subject, None, {**details, **by}, previous)
        previous = entry.sha256
        yield entry


def look_at_invented(folder: Path, seal: str | None) -> FolioLook:
    """What a look at the folio of one of these runs finds, without the folio."""
    number = int(folder.name.removeprefix("run-").removeprefix("protocol-"))
    levels = [
        {"level": level, "n": 6, "mean": 4 + at + number % 17 / 100, "sd": 0.05, "ci": [3.9, 4.1]}
        for at, level in enumerate(("bench", "portable", "inline"))
    ]
    response = {
        "unit": "g/100 g",
        "alpha": 0.05,
        "omnibus": "f",
        "levels": levels,
        "anova": {"verdict": "difference shown", "residual_sd": 0.05 + number % 7 / 1000},
        "criteria": [
            {
                "quantity": "repeatability-rsd",
                "level": None,
                "value": 1.1,
                "relation": "at most",
                "limit": 2,
                "unit": "%",
                "verdict": "criterion met",
            }
        ],
    }
    findings = {"format": "assayfolio-findings/1", "responses": {"content": response}}
    files = frozenset({"data/report.pdf", "data/findings.json", "data/study.yaml"})
    title = TITLES.get(folder.parent.name, "")
    return FolioLook("unchanged", (), title, {"lot": f"L{number:06d}"}, findings, files)
