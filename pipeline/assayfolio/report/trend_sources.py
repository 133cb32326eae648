"""What the pages of control charts are made from, and the sections that say so."""

from dataclasses import dataclass

from assayfolio.report.content import Block, Entry, Facts, Paragraph, Section, TableBlock
from assayfolio.report.numbering import Numbering
from assayfolio.report.prose import Words, legible, prose
from assayfolio.report.tables import Column
from assayfolio.report.tables import lay_out as table_of
from assayfolio.report.wording import counted
from assayfolio.study.plan import Laboratory
from assayfolio.trending.charts import TrendFindings

MOST_LISTED = 60
MOST_LOTS_LISTED = 120


@dataclass(frozen=True, slots=True)
class LeftOutRun:
    """A run that is not on the charts: its name, its lot where it is known, and why."""

    run: str
    lot: str
    reason: str


@dataclass(frozen=True, slots=True)
class TrendInput:
    """What the pages are made from.

    `changed` are runs whose folios are not as they were sealed. Times are texts: `created` RFC 3339 in UTC,
    `made` as it is printed. `trail` is number and digest of the newest entry of the audit trail.
    """

    findings: TrendFindings
    laboratory: Laboratory
    left_out: tuple[LeftOutRun, ...]
    changed: tuple[LeftOutRun, ...]
    created: str
    made: str
    by: str
    generator: str
    trail: tuple[int, str]
    plan_sha256: str
    data_sha256: str


def lots_section(content: TrendInput, numbering: Numbering) -> Section:
    """The lots on the charts, and the runs that are left out with the reasons."""
    found = content.findings
    columns = [
        Column("Lot", kind="text"),
        Column("Run", kind="words"),
        Column("Started", "UTC", kind="words"),
        Column("Seal of the run", "first digits", kind="words"),
        Column("Definition", "first digits", kind="words"),
    ]
    listed = found.results[-MOST_LOTS_LISTED:]
    rows: list[list[Words]] = [
        [
            legible(one.lot),
            one.run,
            one.started[:16].replace("T", " "),
            one.seal[:12],
            one.study_sha256[:12],
        ]
        for one in listed
    ]
    more = len(found.results) - len(listed)
    notes = [prose("{more} earlier lots are in trend.csv.", more=str(more))] if more else []
    versions = len({one.study_sha256 for one in found.results})
    caption = prose(
        "Lots on the charts, in the order in which they came; {versions} of the study definition.",
        versions=counted(versions, "version"),
    )
    blocks: list[Block] = [TableBlock(table_of(numbering.table(), caption, columns, rows, notes))]
    left = (*content.changed, *content.left_out)
    if left:
        shown: list[list[Words]] = [
            [one.run, legible(one.lot) or "–", legible(one.reason)] for one in left[:MOST_LOTS_LISTED]
        ]
        heads = [Column("Run", kind="words"), Column("Lot", kind="text"), Column("Why", kind="text")]
        blocks.append(TableBlock(table_of(numbering.table(), prose("Runs that are left out."), heads, shown)))
    return Section("lots", 0, "Lots", tuple(blocks))


def provenance_section(content: TrendInput) -> Section:
    """Who made the charts, when, with what, from which plan and data."""
    seq, head = content.trail
    entries = (
        Entry(prose("Made"), prose("{made}, by this computer’s clock", made=content.made)),
        Entry(prose("By"), prose("{by}", by=content.by)),
        Entry(prose("With"), prose("{generator}", generator=content.generator)),
        Entry(prose("Plan"), prose("the section “trend” of the study definition"), content.plan_sha256),
        Entry(prose("Data"), prose("trend.json in this folio"), content.data_sha256),
        Entry(prose("Audit trail"), prose("entry {seq} when the runs were read", seq=str(seq)), head),
    )
    words = (
        "Findings, record and definition of each run were read from its folio and held against the seal in "
        "the audit trail. Void, superseded and failed runs are left out."
    )
    return Section("provenance", 0, "Where the values come from", (Paragraph(prose(words)), Facts(entries)))
