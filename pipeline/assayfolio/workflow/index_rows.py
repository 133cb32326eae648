"""From the audit trail and the folios to what the pages show of runs, studies and records."""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from assayfolio.evidence.entries import TrailEntry, is_digest
from assayfolio.evidence.history import DISPOSED as DISPOSED_ENTRY
from assayfolio.evidence.history import RunHistory, run_histories, run_name, run_subject
from assayfolio.evidence.laboratory_folios import laboratory_folios
from assayfolio.evidence.protocols import RegisteredPlan, protocol_name, registered_plans
from assayfolio.evidence.states import RunStanding, run_standings, standing_words, study_standing
from assayfolio.pages.site import NEWEST_SHOWN
from assayfolio.pages.sparklines import MOST_RUNS
from assayfolio.pages.values import (
    CHANGED,
    DISPOSED,
    MISSING,
    NO_RESULT,
    NOT_READABLE,
    Event,
    LaboratoryRow,
    Link,
    ProtocolRow,
    RunPage,
    RunRow,
    RunSeries,
    StudyPage,
    StudyRow,
)
from assayfolio.pages.wording import criteria_words, overall_words, series_of
from assayfolio.workflow.index_folio import FINDINGS_FILE, FolioLook
from assayfolio.workflow.index_memory import Memory, RememberedRun
from assayfolio.workflow.index_trail import TrailLines

LookAtFolio = Callable[[Path, str | None], FolioLook]

NOT_ENDED = "not ended"
NOT_QUOTED = "not quoted"
_REPORT = "data/report.pdf"
_SIGNED_REPORT = "sign-off/report.pdf"
_STUDY = "data/study.yaml"
_MOST_RECORDS = 20


@dataclass(frozen=True, slots=True)
class Sources:
    """Where the pages come from: the folder with the folios, the trail's lines, the memory, and a look."""

    runs: Path
    lines: TrailLines
    memory: Memory
    look: LookAtFolio
    laboratory: str


@dataclass(frozen=True, slots=True)
class FoundRun:
    """A run as it was found: its page, its figures where it came to a result, whether it stands."""

    page: RunPage
    series: RunSeries | None
    stands: bool


def find_run(sources: Sources, run: RememberedRun) -> FoundRun:
    """Read what the trail and its folio say of `run`."""
    subject = run_subject(run.study, run.number)
    replacing = sources.memory.replacing(subject)
    places = [place for one in (run, *replacing) for place in one.lines]
    entries = sources.lines.entries_at(sorted(places))
    history = next(one for one in run_histories(entries) if one.subject == subject)
    standing = run_standings(entries)[subject]
    look = _look(sources, history)
    kin = sources.memory.on_same_data(run.data) if run.data else []
    row = _row(run, history, standing, look, kin)
    page = RunPage(
        row=row,
        laboratory=sources.laboratory,
        seal=_seal(history) or "",
        registered=_registered_words(look),
        findings=look.findings,
        folio_notes=look.notes,
        links=_run_links(row, look),
        kin=tuple(run_name(number) for number in kin if number != run.number),
        events=tuple(_event(entry) for entry in history.entries),
    )
    series = None if look.findings is None else RunSeries(history.name, series_of(look.findings))
    return FoundRun(page, series, standing.stands and look.findings is not None)


def _look(sources: Sources, history: RunHistory) -> FolioLook:
    disposed = history.entry(DISPOSED_ENTRY)
    look = sources.look(sources.runs / history.study / history.name, _seal(history))
    if disposed is not None and look.result == MISSING:
        return FolioLook(DISPOSED, (f"after its retention: entry {disposed.seq}",))
    return look


def _seal(history: RunHistory) -> str | None:
    seal = None if history.sealed is None else history.sealed.details.get("seal")
    return str(seal) if is_digest(seal) else None


def _row(
    run: RememberedRun, history: RunHistory, standing: RunStanding, look: FolioLook, kin: Sequence[int]
) -> RunRow:
    quoted = look.result not in (CHANGED, NOT_READABLE)
    return RunRow(
        place=run.place,
        study=run.study,
        number=run.number,
        name=history.name,
        lot=_lot(look.run),
        title=look.title,
        time=history.allotted.time,
        state=standing.state if standing.ended else NOT_ENDED,
        standing="; ".join((*_unattended(standing, look.run), *standing_words(standing))),
        overall=overall_words(look.findings) if quoted else NOT_QUOTED,
        criteria=criteria_words(look.findings) if quoted else NOT_QUOTED,
        execution=sum(number <= run.number for number in kin),
        executions=len(kin),
        folio=look.result,
        by=_person(history.allotted),
    )


def _lot(run: Mapping[str, Any] | None) -> str:
    """The lot that the run's record names, where the study has lots."""
    lot = None if run is None else run.get("lot")
    if isinstance(lot, Mapping):
        lot = lot.get("lot")
    return lot if isinstance(lot, str) else ""


def _unattended(standing: RunStanding, run: Mapping[str, Any] | None) -> tuple[str, ...]:
    unattended = run is not None and bool(run.get("unattended"))
    return ("unattended, not reviewed",) if unattended and standing.state == "draft" else ()


def _person(entry: TrailEntry) -> str:
    by = entry.details.get("by")
    person = by.get("person") if isinstance(by, Mapping) else None
    return person if isinstance(person, str) else entry.actor


def _registered_words(look: FolioLook) -> str:
    if look.run is None:
        return ""
    if look.run.get("pre_registration") is None:
        return "The plan was not pre-registered: every result is exploratory."
    return "The plan was pre-registered; the report says how it stands to the data."


def _event(entry: TrailEntry) -> Event:
    return Event(entry.seq, entry.time, entry.action, _person(entry), entry.reason or "")


def _run_links(row: RunRow, look: FolioLook) -> tuple[Link, ...]:
    listed = (
        ("Signed report, PDF", _SIGNED_REPORT),
        ("Report as sealed, PDF", _REPORT),
        ("Findings, JSON", FINDINGS_FILE),
        ("Study definition", _STUDY),
    )
    found = [Link(words, f"{row.subject}/{path}") for words, path in listed if path in look.files]
    return (*found, Link("Folio, folder", f"{row.subject}/")) if look.files else ()


# studies


def find_study(sources: Sources, study: str) -> StudyPage:
    """What the page of `study` shows, from its runs as they are remembered and the trail's entries."""
    memory = sources.memory
    newest = tuple(memory.newest_of(study, NEWEST_SHOWN))
    standing = memory.newest_standing(study)
    places = [*memory.protocol_lines(study), *memory.first_file(study)]
    entries = sources.lines.entries_at(sorted([*places, *(standing.lines if standing else [])]))
    plans = registered_plans(entries, study)
    protocols = tuple(_protocol(sources, plan) for plan in plans)
    look = FolioLook(MISSING)
    links: tuple[Link, ...] = ()
    if standing is not None:
        name = run_name(standing.number)
        history = run_histories(entries)[-1]
        look = sources.look(sources.runs / study / name, _seal(history))
        if _STUDY in look.files:
            links = (Link(f"study definition of {name}", f"{study}/{name}/{_STUDY}"),)
    row = StudyRow(
        study=study,
        title=memory.title_of(study) or _protocol_title(sources, plans),
        state=study_standing(entries, study).state,
        runs=memory.count(study),
        newest=newest[0].name if newest else "",
        time=newest[0].time if newest else "",
        overall=newest[0].overall if newest else NO_RESULT,
        criteria=newest[0].criteria if newest else NO_RESULT,
    )
    series = tuple(memory.series_of(study, MOST_RUNS))
    return StudyPage(row, sources.laboratory, protocols, newest, series, look.findings, links)


def _protocol(sources: Sources, plan: RegisteredPlan) -> ProtocolRow:
    path = f"{plan.study}/{plan.name}/data/protocol.pdf"
    there = (sources.runs / path).is_file()
    amends = "" if plan.amends is None else protocol_name(plan.amends)
    link = Link("Protocol" if plan.amends is None else "Amendment", path) if there else None
    return ProtocolRow(plan.name, plan.time, plan.actor, amends, plan.reason or "", link)


def _protocol_title(sources: Sources, plans: Sequence[RegisteredPlan]) -> str:
    if not plans:
        return ""
    return sources.look(sources.runs / plans[-1].study / plans[-1].name, plans[-1].seal).title


# the laboratory's own records


def find_records(sources: Sources) -> tuple[LaboratoryRow, ...]:
    """The newest of the laboratory's own folios, newest first."""
    found = []
    for places in sources.memory.newest_records(_MOST_RECORDS):
        for folio in laboratory_folios(sources.lines.entries_at(places)):
            if folio.sealed is None:
                continue
            folder = sources.runs / folio.subject
            pdfs = sorted(folder.glob("data/*.pdf")) if folder.is_dir() and not folder.is_symlink() else []
            links = [Link("PDF", f"{folio.subject}/data/{pdf.name}") for pdf in pdfs[:1]]
            if folder.is_dir():
                links.append(Link("Folio", f"{folio.subject}/"))
            about = folio.sealed.reason or ""
            found.append(LaboratoryRow(folio.name, folio.sealed.time, about, tuple(links)))
    return tuple(found)
