"""What was not done as planned, and what was looked at to find it."""

from assayfolio.findings_intake import Deviation
from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, Paragraph, Section, TableBlock
from assayfolio.report.numbering import Numbering, Part
from assayfolio.report.prose import Prose, Words, prose
from assayfolio.report.tables import Column, lay_out
from assayfolio.report.wording import BLANK, capitalised, counted, first_of, listed

_MOST_LINES = 12
_MOST_ON_PAGE_1 = 2
_OTHERS = (
    "the dates on record, the arrival of the data and the computer’s clock were looked at as well; any other "
    "deviation stands here where a person entered it"
)


def looked_at(basis: Basis) -> list[str]:
    """What of the plan was held against the data."""
    what = []
    if basis.study.data.replicates is not None:
        what.append("numbers of values")
    if basis.study.worksheet is not None:
        what += ["measuring order", "labels of the worksheet"]
    return what


def search_words(basis: Basis) -> str:
    """What was held against the data and what was found there, for a plan from which nothing deviates."""
    what = looked_at(basis)
    if not what:
        return (
            "The plan fixes neither numbers of values nor a worksheet, so the data could not be held against "
            f"it; {_OTHERS}."
        )
    return f"No deviation was found in {listed(what)}, which were held against the data; {_OTHERS}."


def deviations_section(basis: Basis, numbering: Numbering) -> Section:
    """Every deviation in words, with the lines that show it."""
    place = basis.place(Part.DEVIATIONS)
    found = basis.content.findings.deviations
    with_lines = any(_lines(basis, one) for one in found)
    columns = [
        *([Column("Response", kind="text")] if basis.several else []),
        Column("What was not as planned", kind="text"),
        Column("What is on record", kind="text"),
        *([Column(f"{capitalised(basis.line_word)}s of the data", kind="text")] if with_lines else []),
    ]
    rows: list[list[Words]] = [
        [
            *([one.response or "all"] if basis.several else []),
            prose("{what}", what=one.what),
            prose("{reason}", reason=one.reason or BLANK),
            *([_lines(basis, one) or BLANK] if with_lines else []),
        ]
        for one in found
    ]
    blocks: list[Block] = [
        Paragraph(
            prose(
                "#{count} from the plan#. Held against the data: {what}; {others}. What a deviation means "
                "for the results is for the responsible persons to say.",
                count=capitalised(counted(len(found), "deviation")),
                what=listed(looked_at(basis) or ["the data as received"]),
                others=_OTHERS,
            )
        ),
        TableBlock(lay_out(numbering.table(), "Deviations from the plan.", columns, rows)),
    ]
    return Section(place.anchor, place.number, "Deviations", tuple(blocks))


def _lines(basis: Basis, one: Deviation) -> str:
    """The lines that show a deviation; with several files the words of the deviation itself name them."""
    if len(basis.observations.files) > 1:
        return ""
    return first_of([str(line) for line in one.lines], _MOST_LINES, ", ")


def deviations_line(basis: Basis) -> Prose:
    """The line on deviations for the first page."""
    found = basis.content.findings.deviations
    if found:
        named = first_of([one.what for one in found], _MOST_ON_PAGE_1, "; ")
        return prose("#{count} from the plan#: {named}", count=counted(len(found), "deviation"), named=named)
    what = looked_at(basis)
    if not what:
        return prose(
            "none found in dates, arrival of the data and clock; the plan fixes no numbers of values and no "
            "worksheet"
        )
    return prose("none found in {what}", what=listed(what))
