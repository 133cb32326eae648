"""The register: pages under `runs/` about all runs, derived from the audit trail and the folios alone.

Two calls come to the same bytes: one that reads what was added to the trail since the last, looks at the
runs that these entries concern and writes the pages that change by it; and one that reads everything. Nothing
is entered in the trail, and no folio is touched.
"""

import os
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field
from pathlib import Path

from assayfolio.errors import AssayfolioError, MachineError
from assayfolio.evidence.files import explained, make_folder
from assayfolio.evidence.history import run_subject
from assayfolio.evidence.locks import lock_path, take_lock
from assayfolio.evidence.register_pages import (
    INDEX_FILE,
    LOCK,
    MEMORY_FILE,
    REGISTER_FOLDER,
    STANDS_FILE,
    stands_bytes,
)
from assayfolio.pages.data_files import (
    PAGE_SIZE,
    contents_file,
    head_file,
    page_name,
    page_of,
    pages_for,
    runs_file,
    study_contents_file,
)
from assayfolio.pages.site import NEWEST_SHOWN, Site
from assayfolio.pages.values import CHANGED, MISSING, NOT_READABLE, FrontPage, Head
from assayfolio.study.laboratory_file import read_laboratory
from assayfolio.study.settings_document import LABORATORY_FILE
from assayfolio.workflow.index_assets import made_by, page_files, page_templates
from assayfolio.workflow.index_folio import look_at_folio
from assayfolio.workflow.index_intake import Touched, take_in
from assayfolio.workflow.index_memory import open_memory
from assayfolio.workflow.index_outcome import IndexOutcome
from assayfolio.workflow.index_pages import PageFolder
from assayfolio.workflow.index_rows import LookAtFolio, Sources, find_records, find_run, find_study
from assayfolio.workflow.index_trail import TrailLines, open_lines
from assayfolio.workflow.workspace import Workspace, read_input

Told = Callable[[int, int], None]

_WAIT_SECONDS = 10.0
_TROUBLED = (CHANGED, MISSING, NOT_READABLE)
_FEW = 50
"""Up to so many runs of a study their data files are found one by one."""


def _tell_nothing(_done: int, _of: int) -> None:
    """Nobody is told."""


def update_register(
    workspace: Workspace, told: Told = _tell_nothing, look: LookAtFolio = look_at_folio
) -> IndexOutcome:
    """Bring the register up to the end of the trail; build it from everything where that is needed.

    It is needed where there is no register yet, where it was made by another version of the program or under
    another name of the laboratory, or from another trail. `told` hears of progress, `look` looks at a folio.
    Raises BusyError where another process is at it, MachineError where the disk refuses.
    """
    with _held(workspace), open_lines(workspace.runs) as lines:
        laboratory = _laboratory_name(workspace)
        if not _is_usable(workspace, lines, made_by(laboratory)):
            return _build(workspace, laboratory, lines, look, told)
        with open_memory(_memory_path(workspace)) as memory:
            sources = Sources(workspace.runs, lines, memory, look, laboratory)
            return _Update(sources, told).make(rebuilt=False)


def rebuild_register(
    workspace: Workspace, told: Told = _tell_nothing, look: LookAtFolio = look_at_folio
) -> IndexOutcome:
    """Build the register from everything; `told`, `look` and errors as in `update_register`."""
    with _held(workspace), open_lines(workspace.runs) as lines:
        return _build(workspace, _laboratory_name(workspace), lines, look, told)


def _build(
    workspace: Workspace, laboratory: str, lines: TrailLines, look: LookAtFolio, told: Told
) -> IndexOutcome:
    path = _memory_path(workspace)
    for old in (path, path.with_name(f"{path.name}-journal")):
        with explained("remove what the register remembered", old):
            old.unlink(missing_ok=True)
    with open_memory(path) as memory:
        memory.begin(made_by(laboratory))
        return _Update(Sources(workspace.runs, lines, memory, look, laboratory), told).make(rebuilt=True)


@contextmanager
def _held(workspace: Workspace) -> Iterator[None]:
    """Hold the register: one process at a time makes pages."""
    folder = workspace.runs / REGISTER_FOLDER
    if folder.is_symlink():
        raise MachineError(f"{folder} is a symbolic link, so no page is written there. Remove it.")
    make_folder(folder)
    lock = take_lock(lock_path(folder, LOCK), _WAIT_SECONDS)
    try:
        yield
    finally:
        os.close(lock)


def _laboratory_name(workspace: Workspace) -> str:
    """The laboratory's name; empty where its settings cannot be read."""
    try:
        content = read_input(workspace, workspace.settings, "laboratory's settings file")
        return read_laboratory(content, LABORATORY_FILE).name
    except AssayfolioError:
        return ""


def _memory_path(workspace: Workspace) -> Path:
    return workspace.runs / REGISTER_FOLDER / MEMORY_FILE


def _is_usable(workspace: Workspace, lines: TrailLines, wanted: str) -> bool:
    """Whether the register on the disk can be carried on."""
    folder = workspace.runs / REGISTER_FOLDER
    if not _memory_path(workspace).is_file() or not (workspace.runs / INDEX_FILE).is_file():
        return False
    if not (folder / STANDS_FILE).is_file():
        return False
    with open_memory(_memory_path(workspace)) as memory:
        return memory.made_by() == wanted and lines.follows(memory.mark)


@dataclass(slots=True)
class _Update:
    """One call at work."""

    sources: Sources
    told: Told
    site: Site = field(default_factory=lambda: Site(page_templates()))
    places: set[int] = field(default_factory=set)

    def make(self, *, rebuilt: bool) -> IndexOutcome:
        memory = self.sources.memory
        pages = PageFolder(self.sources.runs)
        touched = take_in(self.sources.lines, memory)
        for study, number in memory.with_folio(_TROUBLED):
            touched.add_run(study, number)  # it may have been put right, or only now got its name
        self._put_runs(pages, touched)
        self._put_studies(pages, touched)
        self._put_lists(pages)
        for path, content in page_files().items():
            pages.put(f"{REGISTER_FOLDER}/{path}", content)
        if rebuilt:
            pages.remove_others()
        pages.settle()
        troubled = sorted(memory.with_folio(_TROUBLED))
        return IndexOutcome(
            index=self.sources.runs / INDEX_FILE,
            head=memory.mark.head,
            rebuilt=rebuilt,
            runs=memory.count(),
            looked_at=len(touched.runs),
            written=pages.written,
            faults=memory.faults,
            troubled=tuple((run_subject(*run), memory.folio_of(*run)) for run in troubled),
        )

    def _put_runs(self, pages: PageFolder, touched: Touched) -> None:
        memory, runs = self.sources.memory, sorted(touched.runs)
        for done, (study, number) in enumerate(runs):
            self.told(done, len(runs))
            run = memory.run(study, number)
            if run is None:
                continue
            found = find_run(self.sources, run)
            memory.put_row(found.page.row, found.series, found.stands)
            path = f"{REGISTER_FOLDER}/studies/{study}/{found.page.row.name}.html"
            pages.put(path, self.site.run_page(found.page))
            self.places.add(page_of(run.place))

    def _put_studies(self, pages: PageFolder, touched: Touched) -> None:
        memory = self.sources.memory
        by_study: dict[str, list[int]] = {study: [] for study in sorted(touched.studies)}
        for study, number in touched.runs:
            by_study.setdefault(study, []).append(number)
        for study, numbers in by_study.items():
            count = memory.count(study)
            if not count and not memory.protocol_lines(study):
                continue  # data were entered for it, and nothing came of them yet
            page = find_study(self.sources, study)
            memory.put_study(page.row)
            folder = f"{REGISTER_FOLDER}/studies/{study}"
            pages.put(f"{folder}/index.html", self.site.study_page(page))
            pages.put(f"{folder}/contents.js", study_contents_file(page.row))
            which = set(range(1, pages_for(count) + 1))
            if len(numbers) <= _FEW:
                which &= {page_of(memory.order_in_study(study, number)) for number in numbers}
            for one in sorted(which):
                rows = memory.rows_of(study, (one - 1) * PAGE_SIZE + 1, one * PAGE_SIZE)
                pages.put(f"{folder}/{page_name(one)}", runs_file(one, rows))

    def _put_lists(self, pages: PageFolder) -> None:
        memory, head = self.sources.memory, self.sources.memory.mark.head
        front = FrontPage(
            laboratory=self.sources.laboratory,
            head=Head(head.seq, head.sha256),
            faults=memory.faults,
            total=memory.count(),
            states=tuple(memory.states()),
            studies=tuple(memory.studies()),
            newest=tuple(memory.newest(NEWEST_SHOWN)),
            records=find_records(self.sources),
        )
        data = f"{REGISTER_FOLDER}/data"
        for one in sorted(self.places):
            rows = memory.rows((one - 1) * PAGE_SIZE + 1, one * PAGE_SIZE)
            pages.put(f"{data}/{page_name(one)}", runs_file(one, rows))
        pages.put(f"{data}/contents.js", contents_file(front))
        pages.put(f"{data}/head.js", head_file(front.head))
        pages.put(INDEX_FILE, self.site.front_page(front))
        pages.put(f"{REGISTER_FOLDER}/{STANDS_FILE}", stands_bytes(head))
