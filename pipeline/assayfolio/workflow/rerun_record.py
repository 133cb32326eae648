"""The dated record of a re-run: as a document for programs, as words for a terminal, and on paper."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass

from assayfolio.canonical import Json, canonical_bytes, sha256_hex
from assayfolio.evidence.environment import environment_record
from assayfolio.report.pdf import Look
from assayfolio.report.record_page import RecordFact, RecordPage, RecordSection, RecordTable, record_pdf
from assayfolio.version import VERSION
from assayfolio.workflow.environment_changes import EnvironmentChange
from assayfolio.workflow.laboratory_folio import Record
from assayfolio.workflow.rerun import EXCLUDED, Rerun
from assayfolio.workflow.rerun_compare import Difference
from assayfolio.workflow.surroundings import Surroundings

RERUN_FORMAT = "assayfolio-rerun/1"
MOST_SHOWN = 40
"""As many differences are printed; the document holds them all."""

_HOW_COMPARED = (
    "Exact numbers and texts are compared by equality, approximate numbers within 1 part in 10¹¹ (intervals "
    "relative to half their width), the Shapiro-Wilk test within 1 part in 10⁸. Digits lost are counted of "
    "the 15.95 that a double holds, and of the 12 that are stated for an approximate number."
)
SENTENCES = {
    "identical": "Identical: what was archived came out again, to the byte where bytes can be compared.",
    "equal within the bound": "Equal within the stated bound: no field is different, and the approximate "
    "numbers that are not the same keep their stated bounds.",
    "different": "Different: at least one part is not what was archived. Below stands which, and where.",
}


@dataclass(frozen=True, slots=True)
class ArchivedEnvironmentRerun:
    """What the same re-run came to in the environment that the run was made with.

    `wheel` is the digest of the program that ran, `vouched` says what vouched for it.
    """

    outcome: str
    parts: tuple[tuple[str, str, tuple[str, ...]], ...]
    wheel: str
    vouched: str
    python: str


@dataclass(frozen=True, slots=True)
class RerunRecord:
    """A re-run with who made it, when and where; `archived` beside it where it was asked for."""

    rerun: Rerun
    surroundings: Surroundings
    trail_head: tuple[int, str] | None
    archived: ArchivedEnvironmentRerun | None = None

    @property
    def document(self) -> Mapping[str, Json]:
        """The record for programs."""
        rerun, seen = self.rerun, self.surroundings
        return {
            "format": RERUN_FORMAT,
            "run": rerun.subject,
            "seal": rerun.seal,
            "made": seen.started_utc,
            "made_local": seen.started_local,
            "actor": seen.actor,
            "host": seen.host,
            "program": f"assayfolio {VERSION}",
            "self_check": rerun.self_check,
            "trail_head": None
            if self.trail_head is None
            else {"seq": self.trail_head[0], "sha256": self.trail_head[1]},
            "outcome": rerun.outcome,
            "exit_code": int(rerun.exit_code),
            "parts": [
                {"part": part.name, "outcome": part.outcome, "notes": list(part.notes)}
                for part in rerun.parts
            ],
            "differences": [one.document for one in rerun.differences],
            "environment": [change.document for change in rerun.changes],
            "not_compared": [{"what": what, "reason": reason} for what, reason in EXCLUDED],
            "archived_environment": None if self.archived is None else _archived_document(self.archived),
        }

    def lines(self) -> Iterator[str]:
        """The record for a terminal."""
        rerun = self.rerun
        yield f"{rerun.subject}: {rerun.outcome}"
        width = max(len(part.name) for part in rerun.parts)
        for part in rerun.parts:
            first, *rest = part.notes or ("",)
            yield f"  {part.name:<{width}}  {part.outcome}{f': {first}' if first else ''}"
            yield from (f"  {'':<{width}}  {note}" for note in rest)
        for one in rerun.differences[:MOST_SHOWN]:
            yield f"  {_difference_line(one)}"
        if len(rerun.differences) > MOST_SHOWN:
            yield f"  and {len(rerun.differences) - MOST_SHOWN} more fields; the record holds them all"
        if rerun.changes:
            yield "Environment, where it is another now:"
            yield from (f"  {change}" for change in rerun.changes)
        if self.archived is not None:
            yield f"In the archived environment ({self.archived.python}): {self.archived.outcome}"
            for name, outcome, notes in self.archived.parts:
                yield f"  {name:<{width}}  {outcome}{': ' + notes[0] if notes else ''}"
        yield "Not compared:"
        yield from (f"  {what}: {reason}" for what, reason in EXCLUDED)


def _archived_document(one: ArchivedEnvironmentRerun) -> Json:
    return {
        "outcome": one.outcome,
        "parts": [
            {"part": name, "outcome": outcome, "notes": list(notes)} for name, outcome, notes in one.parts
        ],
        "wheel_sha256": one.wheel,
        "vouched_for_by": one.vouched,
        "python": one.python,
    }


def _value(value: Json) -> str:
    if isinstance(value, float):
        return repr(value)
    return "none" if value is None else str(value)


def _difference_line(one: Difference) -> str:
    about = f" ({one.about})" if one.about else ""
    if one.kind in ("only archived", "only now"):
        verdict = "" if not one.within else ", not compared"
        return f"{one.place}{about}: {one.kind}{verdict}"
    lost = "" if one.digits_lost is None else f", {one.digits_lost} digits lost"
    within = ", within the bound" if one.within else ""
    return f"{one.place}{about}: {_value(one.old)} then, {_value(one.new)} now{lost}{within}"


def as_record(record: RerunRecord, laboratory: str, look: Look) -> Record:
    """What is sealed: the record as JSON and PDF, the environment, and whatever came out differently."""
    document = canonical_bytes(record.document)
    payload = {
        "data/rerun.json": document,
        "data/rerun.pdf": record_pdf(_page(record, laboratory, look, sha256_hex(document))),
        "data/environment.json": canonical_bytes(environment_record()),
        **{f"data/made-again/{name}": content for name, content in record.rerun.made},
    }
    rerun = record.rerun
    details: dict[str, Json] = {"run": rerun.subject, "run_seal": rerun.seal, "outcome": rerun.outcome}
    about = f"re-run of {rerun.subject}: {rerun.outcome}"
    return Record("rerun", about, record.surroundings.started_utc, payload, details)


def _page(record: RerunRecord, laboratory: str, look: Look, digest: str) -> RecordPage:
    rerun, seen = record.rerun, record.surroundings
    return RecordPage(
        kind="Record of a re-run",
        title=f"{rerun.subject} computed and rendered again from its folio",
        number=rerun.subject,
        laboratory=laboratory,
        created=f"{seen.started_utc[:19]}Z",
        generator=f"Assayfolio {VERSION}",
        box=SENTENCES[rerun.outcome],
        box_notes=_archived_notes(record.archived),
        sections=tuple(_sections(record)),
        foot=f"{rerun.subject} · record of {seen.started_local[:19].replace('T', ' ')} "
        f"{seen.started_local[-6:]} · rerun.json {digest[:16]}",
        look=look,
    )


def _archived_notes(archived: ArchivedEnvironmentRerun | None) -> tuple[str, ...]:
    if archived is None:
        return ()
    return (f"In the environment that the run was made with: {archived.outcome}.",)


def _sections(record: RerunRecord) -> Iterator[RecordSection]:
    rerun = record.rerun
    yield RecordSection(
        "What was compared",
        ("Computed again from the archived definition and data alone; the folio was only read.",),
        table=RecordTable(
            (("part", 18), ("outcome", 22), ("remarks", 60)),
            tuple((part.name, part.outcome, "\n".join(part.notes)) for part in rerun.parts),
        ),
    )
    yield RecordSection("Who, when, with what", facts=tuple(_facts(record)))
    if rerun.differences:
        yield _difference_section(rerun.differences)
    if rerun.changes:
        yield _change_section(rerun.changes)
    if record.archived is not None:
        yield RecordSection(
            "In the archived environment",
            (_archived_words(record.archived),),
            table=RecordTable(
                (("part", 18), ("outcome", 22), ("remarks", 60)),
                tuple((name, outcome, "\n".join(notes)) for name, outcome, notes in record.archived.parts),
            ),
        )
    yield RecordSection(
        "Not compared",
        table=RecordTable((("what", 38), ("why", 62)), EXCLUDED),
    )


def _archived_words(archived: ArchivedEnvironmentRerun) -> str:
    return f"{archived.python}; the program with SHA-256 {archived.wheel}, {archived.vouched}."


def _facts(record: RerunRecord) -> Iterator[RecordFact]:
    rerun, seen = record.rerun, record.surroundings
    yield RecordFact("Folio", rerun.subject, rerun.seal)
    yield RecordFact("Made", f"{seen.started_local[:19].replace('T', ' ')} {seen.started_local[-6:]}")
    yield RecordFact("By", f"account {seen.actor} on {seen.host}, by this computer's clock")
    yield RecordFact("With", f"Assayfolio {VERSION}")
    yield RecordFact("Self-check", rerun.self_check)
    if record.trail_head is not None:
        yield RecordFact("Trail head", f"entry {record.trail_head[0]}", record.trail_head[1])


def _difference_section(found: tuple[Difference, ...]) -> RecordSection:
    words = [_HOW_COMPARED]
    if len(found) > MOST_SHOWN:
        words.append(f"{MOST_SHOWN} of {len(found)} are shown; rerun.json holds them all.")
    rows = tuple(
        (
            f"{one.place}{f' ({one.about})' if one.about else ''}",
            _value(one.old),
            _value(one.new),
            "" if one.digits_lost is None else str(one.digits_lost),
            one.kind
            if not one.within
            else "within the bound"
            if one.kind == "approximate"
            else "not compared",
        )
        for one in found[:MOST_SHOWN]
    )
    columns = (("field", 38), ("archived", 19), ("now", 19), ("digits lost", 10), ("kind", 14))
    return RecordSection("Fields that are not the same", tuple(words), table=RecordTable(columns, rows))


def _change_section(changes: tuple[EnvironmentChange, ...]) -> RecordSection:
    words = "Programs and libraries with a share in the results or in how the report is set."
    rows = tuple((change.what, change.old, change.new, change.share) for change in changes)
    return RecordSection(
        "Environment, where it is another now",
        (words,),
        table=RecordTable((("what", 28), ("then", 30), ("now", 30), ("share", 12)), rows),
    )
