"""What persons left out, each with its reason, and every result with and without it."""

from assayfolio.findings_intake import ExclusionFindings
from assayfolio.report.agreement import agreement_words, verdicts_of
from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, Heading, Paragraph, Section, TableBlock
from assayfolio.report.numbering import Numbering, Part
from assayfolio.report.prose import Prose, Words, legible, prose, verbatim
from assayfolio.report.results_table import results_tables
from assayfolio.report.tables import Column, Table, lay_out
from assayfolio.report.wording import BLANK, capitalised, counted

AS_ANALYSED = "as analysed"
NOTHING_EXCLUDED = "with nothing excluded"


def exclusions_of(basis: Basis) -> tuple[ExclusionFindings, ...]:
    """The exclusions from this response."""
    every = basis.content.findings.exclusions
    return tuple(one for one in every if one.response == basis.response.response)


def exclusions_section(basis: Basis, numbering: Numbering) -> Section:
    """Every exclusion as decided, then the whole analysis with and without, side by side."""
    place = basis.place(Part.EXCLUSIONS)
    excluded = exclusions_of(basis)
    blocks: list[Block] = [Paragraph(_what(basis, excluded))]
    if excluded:
        blocks.append(TableBlock(_exclusions_table(basis, excluded, numbering)))
    without = basis.response.without_exclusions
    if without is not None:
        blocks.append(
            Heading(prose("Results with and without the exclusions"), basis.anchor("with-and-without"))
        )
        blocks.append(Paragraph(agreement(basis)))
        analyses = [(AS_ANALYSED, basis.response), (NOTHING_EXCLUDED, without)]
        blocks += results_tables(basis, analyses, numbering)
        blocks.append(Paragraph(prose(_REST, dash=BLANK, number=_unreported(basis)), "note"))
    return Section(place.anchor, place.number, basis.title("Exclusions"), tuple(blocks))


_REST = (
    "Every other result with nothing excluded stands in findings.json, under “without_exclusions”. A row "
    "that one analysis cannot give is marked {dash}; section {number} has the reason."
)


def _unreported(basis: Basis) -> str:
    return str(basis.place(Part.NOT_REPORTED).number)


def agreement(basis: Basis) -> Prose:
    """Whether the verdicts are the same with nothing excluded."""
    without = basis.response.without_exclusions
    if without is None:
        return ()
    return agreement_words(
        {
            AS_ANALYSED: verdicts_of(basis, basis.response),
            NOTHING_EXCLUDED: verdicts_of(basis, without),
        },
        "With and without the exclusions these are the same",
        "With nothing excluded the verdict is another",
    )


def _what(basis: Basis, excluded: tuple[ExclusionFindings, ...]) -> Prose:
    if not excluded:
        return prose(
            "No value of {response} was excluded. As *p* is adjusted over the responses together, exclusions "
            "from another one bear on these verdicts.",
            response=basis.response.response,
        )
    return prose(
        "#{count} of {response} excluded# by decision of a person, {each} reason; what was recorded stays in "
        "the data file and in this report, and the program leaves out nothing by itself. Each exclusion "
        "names the {line} and the text that stands there, and was held against the file.",
        count=counted(len(excluded), "value"),
        each="with its" if len(excluded) == 1 else "each with its",
        response=basis.response.response,
        line=basis.line_word,
    )


def files_note(basis: Basis) -> str:
    """How a place is read where there are several files."""
    number = basis.outline.place(Part.DATA).number
    return f"2:14 is {basis.line_word} 14 of file 2, as section {number} numbers the files."


def _exclusions_table(basis: Basis, excluded: tuple[ExclusionFindings, ...], numbering: Numbering) -> Table:
    files = [raw.file for raw in basis.observations.files]
    approved = any(one.approved_by for one in excluded)
    columns = [
        Column(capitalised(basis.line_word), kind="words"),
        Column("Level", kind="text"),
        Column("As recorded", kind="words"),
        Column("Reason", kind="text"),
        Column("Decided by", kind="text"),
        Column("on", kind="words"),
        *([Column("Approved by", kind="text")] if approved else []),
    ]
    rows: list[list[Words]] = [
        [
            basis.spot(files.index(one.file), one.line),
            one.level,
            verbatim(legible(one.text)),
            verbatim(legible(one.reason)),
            one.decided_by,
            one.decided_at,
            *([one.approved_by or BLANK] if approved else []),
        ]
        for one in excluded
    ]
    caption = prose(
        "Values of {response} that were excluded, in the order of the data.", response=basis.response.response
    )
    notes: list[Words] = []
    if len(files) > 1:
        notes.append(files_note(basis))
    if not approved:
        notes.append("No approval is recorded for any of them.")
    return lay_out(numbering.table(), caption, columns, rows, notes)
