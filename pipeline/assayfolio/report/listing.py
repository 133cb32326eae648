"""The raw data themselves, as typed."""

from assayfolio.observations.values import Observation
from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, Listing, ListingRow, Paragraph, Section, TableBlock
from assayfolio.report.exclusions import files_note
from assayfolio.report.listing_apart import aside_table, otherwise_table
from assayfolio.report.notation import kept_together, split_at_point
from assayfolio.report.numbering import Numbering, Part
from assayfolio.report.prose import Prose, legible, prose, verbatim
from assayfolio.report.received import files_words, singles
from assayfolio.report.tables import TEXT_WIDTH_MM, UNBROKEN_TO
from assayfolio.report.typeface import POINTS_PER_MM, figures_width, text_width
from assayfolio.report.wording import counted

MOST_LISTED = 600
_SIZE = 8.0
_LINE_SIZE = 6.4


def listing_section(bases: tuple[Basis, ...], numbering: Numbering) -> Section:
    """The raw data as typed, with line numbers, response by response; long files are left to the file.

    Entries that are analysed as another number, and those that are not analysed, follow with the reason.
    """
    place = bases[0].place(Part.LISTING)
    blocks: list[Block] = []
    if not is_listed(bases[0]):
        blocks.append(Paragraph(_not_listed(bases[0])))
    for basis in bases:
        if is_listed(bases[0]):
            blocks.append(_listing(basis, numbering.table(), _caption(basis)))
            otherwise = otherwise_table(basis, numbering)
            blocks += [TableBlock(otherwise)] if otherwise is not None else []
        blocks += _aside(basis, numbering)
    return Section(place.anchor, place.number, "Data listing", tuple(blocks))


def is_listed(basis: Basis) -> bool:
    """Whether the report lists the values one by one."""
    return basis.totals is None and sum(1 for _ in singles(basis)) <= MOST_LISTED


def _aside(basis: Basis, numbering: Numbering) -> list[Block]:
    count = len(basis.observations.set_aside)
    if count > MOST_LISTED:
        words = "{count} of {response} set aside; as they are so many, only section {number} counts them."
        number = str(basis.place(Part.DATA).number)
        entries = counted(count, "entry was", "entries were")
        return [Paragraph(prose(words, count=entries, response=basis.response.response, number=number))]
    table = aside_table(basis, numbering)
    return [] if table is None else [TableBlock(table)]


def _caption(basis: Basis) -> Prose:
    files = basis.observations.files
    of = "Values of {response} as typed" if basis.several else "Values as typed"
    if len(files) == 1:
        where = f", each beside the number of its {basis.line_word} in {{file}}."
    else:
        where = ", each beside its place. {files}"
    if any(row.repeats for row in basis.observations.rows):
        where += " Repeats stand one by one; their means are in the table below."
    return prose(
        of + where + _extra(basis),
        response=basis.response.response,
        file=verbatim(files[0].file),
        files=files_note(basis),
        columns=", ".join(_unused(basis)),
    )


def _unused(basis: Basis) -> list[str]:
    """The carried columns that nothing in the plan uses."""
    data = basis.study.data
    used = {data.unit_column, data.replicate_unit, *(fact.column for fact in basis.study.measurement)}
    if basis.study.worksheet is not None:
        used |= {basis.study.worksheet.block, basis.study.worksheet.item}
    return [column for column in basis.observations.extra_columns if column not in used]


def _extra(basis: Basis) -> str:
    if basis.index or not _unused(basis):
        return ""
    return " Further columns of the file are carried along and not analysed: {columns}."


def _not_listed(basis: Basis) -> Prose:
    each = " of each response" if basis.several else ""
    return prose(
        f"{_which(basis)} {{total}}{each}; a listing stops at {{most}} and is left to "
        + _where(basis)
        + " in section {number}."
        + _extra(basis),
        total=counted(_number(basis), "value"),
        most=str(MOST_LISTED),
        file=files_words(basis),
        number=str(basis.place(Part.PROVENANCE).number),
        columns=", ".join(_unused(basis)),
    )


def _which(basis: Basis) -> str:
    return "The file has" if len(basis.observations.files) == 1 else "The files have"


def _where(basis: Basis) -> str:
    """Where the values are to be found, and that the folio has them if they do not travel in the report."""
    several = len(basis.observations.files) > 1
    itself = "the files themselves, {file}, " if several else "the file itself, {file}, "
    copy = "" if basis.totals is None else "of which the folio holds a copy (data/inputs), "
    return itself + copy + "whose SHA-256 " + ("stand" if several else "stands")


def _listing(basis: Basis, label: str, caption: Prose) -> Listing:
    rows = tuple(singles(basis))
    texts = [row.text.strip() for row in rows]
    rests = [figures_width(split_at_point(text)[1], _SIZE) for text in texts]
    whole = max(figures_width(split_at_point(text)[0], _SIZE) for text in texts)
    value_mm = (whole + max(rests)) / POINTS_PER_MM + 0.8
    line_mm = (
        max(figures_width(basis.spot(row.file, row.line), _LINE_SIZE) for row in rows) / POINTS_PER_MM + 3.0
    )
    by_level: dict[str, list[Observation]] = {level.level: [] for level in basis.levels}
    for row in rows:
        by_level[row.level].append(row)
    counts = {level.level: _count(level.n, len(by_level[level.level])) for level in basis.levels}
    names = max(text_width(f"{level} {count}", _SIZE) for level, count in counts.items())
    level_mm = min(max(names / POINTS_PER_MM + 1.0, 14.0), 50.0)
    most = max(1, int((TEXT_WIDTH_MM - level_mm) / (value_mm + line_mm + 1.2)))
    per_row = max(1, min(most, max(map(len, by_level.values()))))
    shifts = {id(row): max(rests) - rest for row, rest in zip(rows, rests, strict=True)}
    listed: list[ListingRow] = []
    for level in basis.levels:
        own = by_level[level.level]
        for start in range(0, len(own), per_row):
            part = own[start : start + per_row]
            listed.append(
                ListingRow(
                    level=kept_together(level.level) if start == 0 else "",
                    count=counts[level.level] if start == 0 else "",
                    values=tuple(
                        (basis.spot(row.file, row.line), _as_typed(row), f"{shifts[id(row)]:.2f}pt")
                        for row in part
                    ),
                    gaps=per_row - len(part),
                )
            )
    return Listing(
        label=label,
        caption=caption,
        rows=tuple(listed),
        level_width=f"{level_mm:.2f}mm",
        value_width=f"{value_mm + line_mm + 1.2:.2f}mm",
        line_width=f"{line_mm:.2f}mm",
        per_row=per_row,
        unbroken=len(listed) <= UNBROKEN_TO,
    )


def _count(n: int, listed: int) -> str:
    """How many values are analysed, and from how many single ones where repeats were averaged."""
    return f"n\u00a0=\u00a0{n}" + (f" from\u00a0{listed}" if listed != n else "")


def _number(basis: Basis) -> int:
    """How many single values there are."""
    return basis.total if basis.totals is not None else sum(1 for _ in singles(basis))


def _as_typed(row: Observation) -> str:
    return legible(row.text.strip())
