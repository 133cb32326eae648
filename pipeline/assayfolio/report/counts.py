"""How many values were received, what became of them, how many are analysed: the counts that add up."""

from collections.abc import Sequence

from assayfolio.findings_intake import FlowFindings
from assayfolio.report.basis import Basis
from assayfolio.report.numbering import Numbering
from assayfolio.report.prose import Words, prose
from assayfolio.report.tables import Column, Table, lay_out

_STEPS = (
    ("missing", "missing", "Missing"),
    ("below_limit", "below a limit and omitted", "Below a limit, omitted"),
    ("above_limit", "above a limit and omitted", "Above a limit, omitted"),
    ("excluded", "excluded", "Excluded"),
    ("merged", "fewer by averaging repeats", "Fewer by averaging repeats"),
)
_ALWAYS = "excluded"
TOTAL = "All levels"


def total_of(flow: Sequence[FlowFindings]) -> FlowFindings:
    """The counts of all levels together."""
    return FlowFindings(
        level=TOTAL,
        received=sum(counts.received for counts in flow),
        missing=sum(counts.missing for counts in flow),
        below_limit=sum(counts.below_limit for counts in flow),
        above_limit=sum(counts.above_limit for counts in flow),
        excluded=sum(counts.excluded for counts in flow),
        merged=sum(counts.merged for counts in flow),
        analysed=sum(counts.analysed for counts in flow),
    )


def is_whole(basis: Basis) -> bool:
    """Whether every value that was received is analysed as it was received."""
    return all(counts.received == counts.analysed for counts in basis.flow)


def counts_words(basis: Basis) -> str:
    """The counts of all levels in one line: "28 received, 1 missing, 2 excluded, 25 analysed"."""
    total = total_of(basis.flow)
    parts = [f"{total.received} received"]
    for name, words, _ in _STEPS:
        number = getattr(total, name)
        if number or name == _ALWAYS:
            parts.append(f"{number} {words}")
    return ", ".join([*parts, f"{total.analysed} analysed"])


def counts_table(basis: Basis, numbering: Numbering) -> Table:
    """The counts of each level, and of all of them in the last row; steps that took nothing are left out."""
    total = total_of(basis.flow)
    steps = [(name, head) for name, _, head in _STEPS if getattr(total, name) or name == _ALWAYS]
    columns = [
        Column("Level", kind="text"),
        Column("Received"),
        *(Column(head) for _, head in steps),
        Column("Analysed"),
    ]
    rows: list[list[Words]] = [
        [
            prose("#{all}#", all=TOTAL) if counts is total else counts.level,
            str(counts.received),
            *(str(getattr(counts, name)) for name, _ in steps),
            str(counts.analysed),
        ]
        for counts in (*basis.flow, total)
    ]
    caption = prose(
        "Values of {response} from received to analysed; each row adds up.", response=basis.response.response
    )
    return lay_out(numbering.table(), caption, columns, rows)
