"""The summary of a sweep: rows for programs (CSV and JSON), counts for a terminal, one paper for the file."""

import csv
import io
from collections import Counter
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

from assayfolio.canonical import Json, canonical_bytes, sha256_hex
from assayfolio.errors import ExitCode
from assayfolio.evidence.environment import environment_record
from assayfolio.evidence.history import split_subject
from assayfolio.evidence.outcomes import CheckOutcome, Verification
from assayfolio.report.record_page import RecordFact, RecordPage, RecordSection, RecordTable, record_pdf
from assayfolio.version import VERSION
from assayfolio.workflow.laboratory_folio import Record, laboratory_name
from assayfolio.workflow.sampling import ALGORITHM
from assayfolio.workflow.surroundings import Surroundings
from assayfolio.workflow.sweep import SweepPlan, SweepRow

SWEEP_FORMAT = "assayfolio-sweep/1"
MOST_PRINTED = 200
MOST_PRINTED_IN_ORDER = 40
_TITLES = {
    "rerun": "Folios computed and rendered again",
    "verify": "Folios verified",
    "restore": "Folios verified after they were restored",
}


@dataclass(frozen=True, slots=True)
class SweepRecord:
    """A finished sweep: `kind` is rerun, verify or restore; `others` are checks that belong to no single run.

    `restored` says which backup the workspace was brought back from.
    """

    kind: str
    plan: SweepPlan
    rows: tuple[SweepRow, ...]
    others: tuple[CheckOutcome, ...]
    surroundings: Surroundings
    ended: str
    restored: str | None = None

    @property
    def bad(self) -> tuple[SweepRow, ...]:
        """The rows that somebody has to look at."""
        return tuple(row for row in self.rows if not row.is_fine)

    @property
    def exit_code(self) -> ExitCode:
        """FINDING where something differs or failed, NOT_CHECKABLE where something could not be looked at."""
        if any(row.outcome != "not checkable" for row in self.bad):
            return ExitCode.FINDING
        outcomes = {one.outcome for one in self.others}
        if "failed" in outcomes:
            return ExitCode.FINDING
        return ExitCode.NOT_CHECKABLE if self.bad or "not checkable" in outcomes else ExitCode.DONE

    @property
    def counts(self) -> Mapping[str, int]:
        """How many folios came out how."""
        return dict(sorted(Counter(row.outcome for row in self.rows).items()))

    @property
    def document(self) -> Mapping[str, Json]:
        """The sweep for programs."""
        sample = self.plan.sample
        return {
            "format": SWEEP_FORMAT,
            "kind": self.kind,
            "begun": self.surroundings.started_utc,
            "ended": self.ended,
            "actor": self.surroundings.actor,
            "host": self.surroundings.host,
            "program": f"assayfolio {VERSION}",
            "restored_from": self.restored,
            "folios": self.plan.total,
            "sample": None
            if sample is None
            else {"number": sample.number, "seed": sample.seed, "algorithm": ALGORITHM},
            "counts": self.counts,
            "exit_code": int(self.exit_code),
            "rows": [_row_document(row) for row in self.rows],
            "other_findings": [
                {
                    "number": one.number,
                    "subject": one.subject,
                    "outcome": one.outcome,
                    "notes": list(one.notes),
                }
                for one in self.others
                if one.outcome != "passed"
            ],
        }

    def lines(self) -> Iterator[str]:
        """The end of a sweep for a terminal: what is not fine, then the counts."""
        for one in self.others:
            if one.outcome != "passed":
                yield f"{one.outcome}  {one.number} {one.subject}: {'; '.join(one.notes)}"
        for row in self.bad[:MOST_PRINTED]:
            yield f"{row.outcome}  {row.subject}: {'; '.join(row.notes)}"
        if len(self.bad) > MOST_PRINTED:
            yield f"and {len(self.bad) - MOST_PRINTED} more; the summary lists them all"
        counted = ", ".join(f"{count} {outcome}" for outcome, count in self.counts.items())
        yield f"{self.words}: {counted}"

    @property
    def words(self) -> str:
        """How many folios were taken, of how many, and how they were chosen."""
        taken = f"{len(self.rows):,} of {self.plan.total:,} folios"
        sample = self.plan.sample
        return taken if sample is None else f"{taken}, drawn with seed {sample.seed}"


def _row_document(row: SweepRow) -> Mapping[str, Json]:
    return {
        "folio": row.subject,
        "seal": row.seal,
        "outcome": row.outcome,
        "notes": list(row.notes),
        "seconds": row.seconds,
        "done_earlier": row.earlier,
    }


def verified_rows(
    plan: SweepPlan, verification: Verification, seals: Mapping[str, str]
) -> tuple[SweepRow, ...]:
    """A row for each folio of a verification: the worst of its checks, and the notes of those not passed."""
    by_subject: dict[str, list[CheckOutcome]] = {subject: [] for subject in plan.folders}
    for one in verification.outcomes:
        if one.subject in by_subject:
            by_subject[one.subject].append(one)
    return tuple(
        SweepRow(
            subject,
            seals.get(subject, ""),
            _worst(found),
            tuple(f"{one.number} {note}" for one in found if one.outcome != "passed" for note in one.notes),
            0.0,
        )
        for subject, found in by_subject.items()
    )


def _worst(found: Sequence[CheckOutcome]) -> str:
    outcomes = {one.outcome for one in found}
    return next((one for one in ("failed", "not checkable") if one in outcomes), "passed")


def checks_of_no_run(plan: SweepPlan, verification: Verification) -> tuple[CheckOutcome, ...]:
    """The checks of trail, settings and the laboratory's own folios, and of runs without a folder."""
    return tuple(
        one
        for one in verification.outcomes
        if one.subject not in plan.folders and (split_subject(one.subject) is None or one.outcome == "failed")
    )


def as_record(record: SweepRecord) -> Record:
    """What is sealed: CSV, JSON and PDF, and the environment of the sweep."""
    document = canonical_bytes(record.document)
    payload = {
        "data/sweep.csv": _csv(record),
        "data/sweep.json": document,
        "data/sweep.pdf": record_pdf(_page(record, sha256_hex(document))),
        "data/environment.json": canonical_bytes(environment_record()),
    }
    about = f"{_TITLES[record.kind].lower()}: {record.words}"
    details: dict[str, Json] = {
        "sweep": record.kind,
        "folios": len(record.rows),
        "counts": dict(record.counts),
        "seed": None if record.plan.sample is None else record.plan.sample.seed,
    }
    kind = "restore" if record.kind == "restore" else "sweep"
    return Record(kind, about, record.surroundings.started_utc, payload, details)


def _csv(record: SweepRecord) -> bytes:
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(("folio", "outcome", "seal", "seconds", "done earlier", "remarks"))
    for row in record.rows:
        remarks = "; ".join(row.notes)
        # A cell that a spreadsheet program would take for a formula gets a leading apostrophe.
        safe = f"'{remarks}" if remarks.startswith(("=", "+", "-", "@")) else remarks
        writer.writerow((row.subject, row.outcome, row.seal, row.seconds, row.earlier or "", safe))
    return text.getvalue().encode("utf-8")


def _page(record: SweepRecord, digest: str) -> RecordPage:
    seen = record.surroundings
    local = f"{seen.started_local[:19].replace('T', ' ')} {seen.started_local[-6:]}"
    bad = len(record.bad) + sum(one.outcome != "passed" for one in record.others)
    box = "Nothing to look at." if not bad else f"{bad} to look at, listed below."
    return RecordPage(
        kind="Record of a restoration" if record.restored is not None else "Record of a sweep",
        title=f"{_TITLES[record.kind]}: {record.words}",
        number=local[:10],
        laboratory=laboratory_name(record.plan.workspace),
        created=f"{seen.started_utc[:19]}Z",
        generator=f"Assayfolio {VERSION}",
        box=box,
        box_notes=tuple(f"{count:,} {outcome}" for outcome, count in record.counts.items()),
        sections=tuple(_sections(record, local)),
        foot=f"sweep of {local} · sweep.json {digest[:16]}",
    )


def _sections(record: SweepRecord, local: str) -> Iterator[RecordSection]:
    facts = [
        RecordFact("Workspace", record.plan.workspace.root.name),
        RecordFact("Begun", local),
        RecordFact("Ended", f"{record.ended[:19].replace('T', ' ')} UTC"),
        RecordFact(
            "By", f"account {record.surroundings.actor} on {record.surroundings.host}, this computer's clock"
        ),
        RecordFact("With", f"Assayfolio {VERSION}"),
    ]
    if record.restored is not None:
        facts.insert(0, RecordFact("Brought back", record.restored))
    sample = record.plan.sample
    if sample is not None:
        facts.append(RecordFact("Sample", f"{sample.number} with seed {sample.seed}, algorithm {ALGORITHM}"))
    earlier = [row.earlier for row in record.rows if row.earlier]
    if earlier:
        words = f"{len(earlier)} folios were done by an interrupted sweep, from {min(earlier)[:19]} UTC on"
        facts.append(RecordFact("Taken up", words))
    yield RecordSection("Who, when, with what", facts=tuple(facts))
    others = [one for one in record.others if one.outcome != "passed"]
    if others:
        rows = tuple((f"{one.number} {one.subject}", one.outcome, "\n".join(one.notes)) for one in others)
        columns = (("check", 28), ("outcome", 16), ("remarks", 56))
        yield RecordSection(
            "Checks beside those of single runs", table=RecordTable(columns, rows[:MOST_PRINTED])
        )
    if record.bad:
        yield _table("To look at", record.bad, MOST_PRINTED)
    fine = tuple(row for row in record.rows if row.is_fine)
    if fine:
        yield _table("In order", fine, MOST_PRINTED_IN_ORDER)


def _table(title: str, rows: Sequence[SweepRow], most: int) -> RecordSection:
    words = f"{most} of {len(rows):,} are shown; sweep.csv lists them all." if len(rows) > most else ""
    columns = (("folio", 28), ("outcome", 20), ("remarks, first digits of the seal", 52))
    return RecordSection(
        title,
        (words,) if words else (),
        table=RecordTable(
            columns,
            tuple(
                (row.subject, row.outcome, "\n".join((*row.notes, f"seal {row.seal[:16]}")))
                for row in rows[:most]
            ),
        ),
    )
