"""The raw data themselves, as typed."""

from assayfolio.observations.values import Observation
from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, Listing, ListingRow, Paragraph, Section
from assayfolio.report.notation import kept_together, split_at_point
from assayfolio.report.numbering import Numbering, Part
from assayfolio.report.prose import Prose, prose, verbatim
from assayfolio.report.tables import TEXT_WIDTH_MM, UNBROKEN_TO
from assayfolio.report.typeface import POINTS_PER_MM, figures_width, text_width
from assayfolio.report.wording import counted

MOST_LISTED = 600
_SIZE = 8.0
_LINE_SIZE = 6.4


def listing_section(bases: tuple[Basis, ...], numbering: Numbering) -> Section:
    """The raw data as typed, with line numbers, response by response; long files are left to the file."""
    place = bases[0].place(Part.LISTING)
    if bases[0].total > MOST_LISTED:
        return Section(place.anchor, place.number, "Data listing", (Paragraph(_not_listed(bases[0])),))
    blocks: list[Block] = []
    for basis in bases:
        of = "Values of {response} as typed" if basis.several else "Values as typed"
        words = of + ", each beside the number of its line in {file}." + _extra(basis)
        caption = prose(
            words,
            response=basis.response.response,
            file=verbatim(basis.observations.file),
            columns=", ".join(basis.observations.extra_columns),
        )
        blocks.append(_listing(basis, numbering.table(), caption))
    return Section(place.anchor, place.number, "Data listing", tuple(blocks))


def _extra(basis: Basis) -> str:
    if basis.index or not basis.observations.extra_columns:
        return ""
    return " Further columns of the file are carried along and not analysed: {columns}."


def _not_listed(basis: Basis) -> Prose:
    each = " of each response" if basis.several else ""
    return prose(
        f"The file has {{total}}{each}; a listing stops at {{most}} and is left to the file itself, "
        f"{{file}}, " + _where(basis) + "whose SHA-256 stands in section {number}." + _extra(basis),
        total=counted(basis.total, "value"),
        most=str(MOST_LISTED),
        file=verbatim(basis.observations.file),
        number=str(basis.place(Part.PROVENANCE).number),
        columns=", ".join(basis.observations.extra_columns),
    )


def _where(basis: Basis) -> str:
    """Where the file is to be found, if it does not travel inside the report."""
    return "" if basis.totals is None else "of which the folio holds a copy (data/inputs), "


def _listing(basis: Basis, label: str, caption: Prose) -> Listing:
    rows = basis.observations.rows
    texts = [row.text.strip() for row in rows]
    rests = [figures_width(split_at_point(text)[1], _SIZE) for text in texts]
    whole = max(figures_width(split_at_point(text)[0], _SIZE) for text in texts)
    value_mm = (whole + max(rests)) / POINTS_PER_MM + 0.8
    line_mm = figures_width(str(max(row.line for row in rows)), _LINE_SIZE) / POINTS_PER_MM + 3.0
    names = max(text_width(f"{level.level} {_count(level.n)}", _SIZE) for level in basis.levels)
    level_mm = min(max(names / POINTS_PER_MM + 1.0, 14.0), 50.0)
    most = max(1, int((TEXT_WIDTH_MM - level_mm) / (value_mm + line_mm + 1.2)))
    per_row = max(1, min(most, max(level.n for level in basis.levels)))
    shifts = {id(row): max(rests) - rest for row, rest in zip(rows, rests, strict=True)}
    by_level: dict[str, list[Observation]] = {level.level: [] for level in basis.levels}
    for row in rows:
        by_level[row.level].append(row)
    listed: list[ListingRow] = []
    for level in basis.levels:
        own = by_level[level.level]
        for start in range(0, len(own), per_row):
            part = own[start : start + per_row]
            listed.append(
                ListingRow(
                    level=kept_together(level.level) if start == 0 else "",
                    count=_count(level.n) if start == 0 else "",
                    values=tuple((str(row.line), _as_typed(row), f"{shifts[id(row)]:.2f}pt") for row in part),
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


def _count(n: int) -> str:
    return f"n\u00a0=\u00a0{n}"


def _as_typed(row: Observation) -> str:
    return row.text.strip()
