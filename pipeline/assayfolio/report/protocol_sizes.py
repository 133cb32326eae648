"""How many values are planned and what they can show, and the order in which they are to be measured."""

from itertools import groupby

from assayfolio.report.content import Block, Entry, Facts, Items, Paragraph, Section, TableBlock
from assayfolio.report.numbering import Numbering
from assayfolio.report.planned_power import power_blocks
from assayfolio.report.prose import Words, prose
from assayfolio.report.protocol_facts import ProtocolInput
from assayfolio.report.tables import Column, Table, lay_out
from assayfolio.worksheet.order import ALGORITHM
from assayfolio.worksheet.rows import WorksheetRow

_MOST_IN_TABLE = 400
_NO_POWER = (
    "The plan does not say which difference has to be seen, so no power was computed, and nothing says "
    "whether the planned numbers of values are enough."
)


def power_section(content: ProtocolInput, numbering: Numbering, number: int) -> Section:
    """The power of the planned tests at the planned numbers of values."""
    blocks: list[Block] = []
    if content.power is not None:
        blocks += power_blocks(content.study, content.power, numbering)
    elif content.study.power is None:
        blocks.append(Paragraph(prose(_NO_POWER)))
    if content.power_gaps:
        words = "{what} cannot be given: {reason}"
        blocks.append(
            Items(tuple(prose(words, what=gap.what, reason=gap.reason) for gap in content.power_gaps))
        )
    return Section("power", number, "Sample size and power", tuple(blocks))


def worksheet_section(content: ProtocolInput, numbering: Numbering, number: int) -> Section:
    """The measuring order, row by row, and from what it can be drawn again."""
    plan = content.study.worksheet
    if plan is None:
        words = "The plan has no worksheet: the order of the measurements is not fixed by it."
        return Section("worksheet", number, "Measuring order", (Paragraph(prose(words)),))
    blocked = f"at random within each {plan.block}: {', '.join(plan.blocks)}" if plan.blocks else "at random"
    facts = Facts(
        (
            Entry(prose("Order"), prose("{blocked}", blocked=blocked)),
            Entry(prose("Drawn by"), prose("{how}, seed {seed}", how=ALGORITHM, seed=str(plan.seed))),
            Entry(
                prose("Digest"),
                prose("of the order: {count} measurements", count=str(len(content.rows))),
                content.facts.order_sha256 or "",
            ),
        )
    )
    blocks: list[Block] = [facts]
    if len(content.rows) <= _MOST_IN_TABLE:
        blocks += [TableBlock(_table(content.rows, content.study.data.factor, numbering))]
    else:
        words = "More measurements than are printed here; the worksheet in the folio lists them all."
        blocks.append(Paragraph(prose(words)))
    return Section("worksheet", number, "Measuring order", tuple(blocks))


def _table(rows: tuple[WorksheetRow, ...], factor: str, numbering: Numbering) -> Table:
    """Positions one after the other, several in a line, so that the order takes little room."""
    labelled = any(row.item is not None for row in rows)
    columns = [
        Column("Positions", kind="words"),
        Column(f"{factor} (replicate{', item' if labelled else ''})", kind="text"),
    ]
    lines: list[list[Words]] = []
    for block, share in groupby(rows, key=lambda row: row.block):
        held = list(share)
        for at in range(0, len(held), _PER_LINE):
            part = held[at : at + _PER_LINE]
            name = f"{block}, " if block is not None else ""
            span = f"{part[0].position}–{part[-1].position}" if len(part) > 1 else str(part[0].position)
            lines.append([f"{name}{span}", ", ".join(_row(row) for row in part)])
    caption = prose("The measuring order, from top to bottom and from left to right.")
    return lay_out(numbering.table(), caption, columns, lines)


_PER_LINE = 6


def _row(row: WorksheetRow) -> str:
    item = f", {row.item}" if row.item is not None else ""
    return f"{row.level} ({row.replicate}{item})"
