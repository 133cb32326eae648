"""What came in: the files as they were read, how values came about, facts about the measurements."""

from collections import Counter
from collections.abc import Iterator

from assayfolio.observations.values import Observation, RawFile
from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, Entry, Facts, Heading, Items, Paragraph, TableBlock
from assayfolio.report.counts import counts_table, counts_words, is_whole, total_of
from assayfolio.report.notation import decimal
from assayfolio.report.numbering import Numbering, Part
from assayfolio.report.prose import Prose, Words, legible, prose, verbatim
from assayfolio.report.tables import Column, Table, lay_out
from assayfolio.report.wording import capitalised, counted, first_of, listed
from assayfolio.study.plan import MeasurementFact

_FORMS = {"text": "text", "gzip text": "text, gzip compressed", "spreadsheet": "spreadsheet"}
_ENCODINGS = {
    "utf-8": "UTF-8",
    "utf-16": "UTF-16",
    "windows-1252": "Windows-1252",
    "iso-8859-1": "ISO 8859-1",
    "iso-8859-15": "ISO 8859-15",
}
_KEYS = {"measured-at": "Measured at", "supplied-by": "Supplied by", "method-version": "Method version"}
_MOST_ENTRIES = 12
_MOST_ROWS_ABOVE = 40
_CELLS_APART = 3


def received_blocks(basis: Basis, numbering: Numbering) -> list[Block]:
    """The counts, the files, how values came about, and the facts about the measurements.

    The files and the measurements are those of all responses and stand with the first.
    """
    blocks: list[Block] = [Paragraph(_opening(basis))]
    if not is_whole(basis):
        blocks.append(TableBlock(counts_table(basis, numbering)))
    rules = list(_rules(basis))
    if rules:
        blocks += [Heading(prose("How values came about")), Items(tuple(rules))]
    if basis.index:
        return blocks
    files = _files(basis, numbering)
    if files:
        blocks += [Heading(prose("Files as read")), *files]
    if basis.study.measurement:
        blocks.append(Heading(prose("Measurements")))
        blocks.append(Facts(tuple(_fact(basis, fact) for fact in basis.study.measurement)))
    return blocks


def has_headings(blocks: list[Block]) -> bool:
    """Whether what follows needs a heading of its own to stand apart."""
    return any(isinstance(block, Heading) for block in blocks)


def files_words(basis: Basis) -> Words:
    """The data file by name, or how many there are and the first of them."""
    files = basis.observations.files
    if len(files) == 1:
        return verbatim(files[0].file)
    return prose(
        "{count} ({first} and {rest} more)",
        count=counted(len(files), "file"),
        first=verbatim(files[0].file),
        rest=str(len(files) - 1),
    )


def _opening(basis: Basis) -> Prose:
    files = basis.observations.files
    data = basis.study.data
    put_in = any(row.kind != "measured" for row in basis.observations.rows)
    whole = is_whole(basis) and not put_in and not data.convert
    every = " Every value is analysed as it was received." if whole else ""
    marks = {raw.separator for raw in files} - {None}
    separated = f"columns separated by {listed(sorted(map(str, marks)))}, " if marks else ""
    read = prose(
        " Values were read as exact decimals from their text ({separated}decimal {mark}); at most {places} "
        "recorded.",
        separated=separated,
        mark=data.decimal_mark,
        places=counted(basis.observations.places, "decimal place"),
    )
    if len(files) > 1:
        return (
            *prose(
                "{counts}, from {count}.{every}",
                counts=counts_words(basis),
                every=every,
                count=counted(len(files), "file"),
            ),
            *read,
        )
    number = str(basis.place(Part.PROVENANCE).number)
    raw = files[0]
    return (
        *prose(
            "{counts}, from {file} ({form}; {size} bytes, SHA-256 in section {number}).{every}",
            counts=counts_words(basis),
            file=verbatim(raw.file),
            form=_form_words(raw),
            size=str(raw.size),
            number=number,
            every=every,
        ),
        *read,
    )


def _form_words(raw: RawFile) -> Words:
    """The form of a file, with what of it is not as usual."""
    row = "" if raw.header_row == 1 else f", column names in {_row_word(raw)} {raw.header_row}"
    if raw.sheet is not None:
        return prose("spreadsheet, sheet {sheet}{row}", sheet=verbatim(legible(raw.sheet)), row=row)
    return f"{_FORMS[raw.form]}, {_encoding(raw)}{row}"


def _encoding(raw: RawFile) -> str:
    return _ENCODINGS.get(raw.encoding, raw.encoding) + (
        " with byte order mark" if raw.byte_order_mark else ""
    )


def _row_word(raw: RawFile) -> str:
    return "row" if raw.form == "spreadsheet" else "line"


# how values came about


def _rules(basis: Basis) -> Iterator[Prose]:
    data = basis.study.data
    total = total_of(basis.flow)
    if data.layout == "wide":
        yield prose(
            "Each level has a column of its own, named by the level; blank cells below the last value "
            "of a column are none of its values."
        )
    if total.missing:
        codes = [f"“{code}”" for code in data.missing_codes]
        yield prose(
            "{count} for a missing value ({codes}); omitted, as planned.",
            count=counted(total.missing, "entry stands", "entries stand"),
            codes=" or ".join(["blank", *codes]),
        )
    if basis.response.censoring is not None:
        number = str(basis.place(Part.LIMITS).number)
        yield prose(
            "Values were reported as beyond a limit; section {number} has their counts and what the "
            "plan makes of them.",
            number=number,
        )
    if data.unit_column is not None:
        yield _unit_words(basis, data.unit_column)
    if data.replicate_unit is not None:
        yield _repeats_words(basis, data.replicate_unit)
    if total.excluded:
        number = str(basis.place(Part.EXCLUSIONS).number)
        yield prose(
            "{count} excluded by decision of a person; section {number} has each with its reason, and "
            "the results with and without.",
            count=counted(total.excluded, "value was", "values were"),
            number=number,
        )


def _unit_words(basis: Basis, column: str) -> Prose:
    data = basis.study.data
    unit = data.unit_of(basis.response.response) or ""
    met = Counter(unit for row in singles(basis) if (unit := extra_of(basis, row, column).strip()))
    converted = [
        f"{count} in {name} multiplied by exactly {decimal(factor)}"
        for name, factor in data.convert
        if name != unit and (count := met[name])
    ]
    pattern = "The unit of each value stands in column {column}: {count} in {unit}{converted}."
    return prose(
        pattern,
        column=verbatim(column),
        count=str(met[unit]),
        unit=unit,
        converted="".join(f"; {words}" for words in converted),
    )


def _repeats_words(basis: Basis, column: str) -> Prose:
    means = [row for row in basis.observations.rows if row.repeats]
    rule = (
        "Rows of one level with the same entry in column {column} are repeats of one replicate: they are "
        "averaged exactly to one value, and *n* counts replicates"
    )
    if not means:
        return prose(rule + "; no replicate has more than one value.", column=verbatim(column))
    return prose(
        rule + ". {repeats} became {means}; section {number} lists them.",
        column=verbatim(column),
        repeats=counted(sum(len(row.repeats) for row in means), "repeat"),
        means=counted(len(means), "mean"),
        number=str(basis.place(Part.LISTING).number),
    )


def singles(basis: Basis) -> Iterator[Observation]:
    """The analysed values as received: the repeats of a mean one by one."""
    for row in basis.observations.rows:
        yield from row.repeats or (row,)


def extra_of(basis: Basis, row: Observation, column: str) -> str:
    """The cell of a carried column; empty where the file of the row does not have it."""
    columns = basis.observations.extra_columns
    at = columns.index(column) if column in columns else len(row.extras)
    return row.extras[at] if at < len(row.extras) else ""


# files


def _files(basis: Basis, numbering: Numbering) -> list[Block]:
    files = basis.observations.files
    blocks: list[Block] = []
    if len(files) > 1:
        blocks.append(TableBlock(_files_table(basis, numbering)))
    notices = [(raw, notice) for raw in files for notice in raw.notices]
    if notices:
        blocks.append(Paragraph(prose("Noticed in reading, and taken as it says:"), "lead"))
        blocks.append(
            Items(
                tuple(
                    prose(
                        "{file}: {notice}",
                        file=verbatim(raw.file),
                        notice=verbatim(legible(notice.replace("`", ""))),
                    )
                    for raw, notice in notices
                )
            )
        )
    blocks += [TableBlock(_above_table(raw, numbering)) for raw in files if any(raw.metadata)]
    return blocks


def _files_table(basis: Basis, numbering: Numbering) -> Table:
    columns = [
        Column("No.", kind="words"),
        Column("File", kind="text"),
        Column("Form", kind="text"),
        Column("Bytes"),
    ]
    rows: list[list[Words]] = [
        [str(number), verbatim(raw.file), _form_words(raw), str(raw.size)]
        for number, raw in enumerate(basis.observations.files, start=1)
    ]
    words = "Data files, in the order in which they were read; their SHA-256 stand in section {number}."
    caption = prose(words, number=str(basis.place(Part.PROVENANCE).number))
    return lay_out(numbering.table(), caption, columns, rows)


def _above_table(raw: RawFile, numbering: Numbering) -> Table:
    """The rows above the column names, cell by cell; what stands behind the third cell is joined."""
    rows_above = [(at, cells) for at, cells in enumerate(raw.metadata, start=1) if any(cells)]
    width = min(_CELLS_APART, max(len(cells) for _, cells in rows_above))
    heads = ["First cell", "Second cell", "Further cells"][:width]
    columns = [
        Column(capitalised(_row_word(raw)), kind="words"),
        *(Column(head, kind="text") for head in heads),
    ]
    rows: list[list[Words]] = [
        [str(at), *(verbatim(legible(cell)) for cell in _apart(cells, width))]
        for at, cells in rows_above[:_MOST_ROWS_ABOVE]
    ]
    caption = prose("What stands above the column names in {file}, as typed.", file=verbatim(raw.file))
    rest = len(rows_above) - len(rows)
    notes = [f"{counted(rest, 'further row stands', 'further rows stand')} in the file."] if rest else []
    return lay_out(numbering.table(), caption, columns, rows, notes)


def _apart(cells: tuple[str, ...], width: int) -> list[str]:
    first, rest = list(cells[: width - 1]), cells[width - 1 :]
    return [*first, *[""] * (width - 1 - len(first)), " | ".join(rest).rstrip(" |")]


# facts about the measurements


def _fact(basis: Basis, fact: MeasurementFact) -> Entry:
    name = _KEYS.get(fact.key, fact.key.capitalize())
    if fact.column is None:
        return Entry(prose(name), verbatim(legible(fact.text or "")))
    rows = Counter(extra_of(basis, row, fact.column).strip() for row in singles(basis))
    if not rows or basis.totals is not None:
        words = "in column {column} of the data, not blank in any row"
        return Entry(prose(name), prose(words, column=verbatim(fact.column)))
    entries = [f"{legible(entry)} ({count})" for entry, count in rows.items()]
    return Entry(
        prose(name),
        prose(
            "{entries} ~(column {column}; numbers of analysed values)~",
            entries=verbatim(first_of(entries, _MOST_ENTRIES, ", ")),
            column=verbatim(fact.column),
        ),
    )
