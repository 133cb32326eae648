"""Entries that are not analysed as the number they spell: put in, converted, averaged, or set aside."""

from collections.abc import Iterator

from assayfolio.observations.values import Cause, Observation
from assayfolio.report.basis import Basis
from assayfolio.report.limits import BELOW_WORDS
from assayfolio.report.notation import decimal
from assayfolio.report.numbering import Numbering, Part
from assayfolio.report.prose import Prose, Words, legible, prose, verbatim
from assayfolio.report.received import extra_of
from assayfolio.report.tables import Column, Table, lay_out
from assayfolio.report.wording import capitalised, counted

_CAUSES: dict[Cause, str] = {
    "missing": "missing",
    "below limit": "below a limit, omitted",
    "above limit": "above a limit, omitted",
    "excluded": "excluded",
}


def otherwise_table(basis: Basis, numbering: Numbering) -> Table | None:
    """The entries that are analysed as another number than was typed, with that number; None for none."""
    found = [(row, why) for row in basis.observations.rows if (why := _why(basis, row))]
    if not found:
        return None
    scale = basis.scale
    columns = [
        Column(f"{capitalised(basis.line_word)}s", kind="text"),
        Column("Level", kind="text"),
        Column("As typed", kind="text"),
        Column("Analysed as", scale.heading),
        Column("How it came about", kind="text"),
    ]
    rows: list[list[Words]] = []
    for row, why in found:
        exact = scale.power == 0 and not row.repeats
        value = row.value.fraction
        rows.append(
            [
                ", ".join(basis.spot(one.file, one.line) for one in row.repeats or (row,)),
                row.level,
                verbatim(legible(row.text)),
                decimal(value) if exact else scale.mean(value),
                why,
            ]
        )
    caption = prose(
        "Values of {response} that are analysed as another number than the one typed.",
        response=basis.response.response,
    )
    notes = []
    if any(row.repeats for row, _ in found):
        notes.append("A mean of repeats is rounded here for print; it enters every computation exactly.")
    return lay_out(numbering.table(), caption, columns, rows, notes)


def _why(basis: Basis, row: Observation) -> str:
    """How the number of a row came about; empty where it is the one typed."""
    if not row.repeats:
        return "; ".join(_reasons(basis, row))
    reasons = dict.fromkeys(reason for one in row.repeats for reason in _reasons(basis, one))
    return "; ".join([f"mean of {counted(len(row.repeats), 'repeat')}", *reasons])


def _reasons(basis: Basis, row: Observation) -> Iterator[str]:
    data = basis.study.data
    codes = dict(data.limit_codes)
    text = row.text.strip()
    if data.unit_column is not None and text not in codes:
        unit = extra_of(basis, row, data.unit_column).strip()
        factor = dict(data.convert).get(unit)
        if factor is not None and unit != data.unit_of(basis.response.response):
            yield f"{unit}, times {decimal(factor)}"
    if row.kind == "below limit":
        code = f"{text} stands for below {decimal(codes[text])}: " if text in codes else ""
        yield code + BELOW_WORDS[data.below_limit]
    elif row.kind == "above limit":
        yield "the limit"


def aside_table(basis: Basis, numbering: Numbering) -> Table | None:
    """The entries that were received and are not analysed, each with its cause; None for none."""
    aside = basis.observations.set_aside
    if not aside:
        return None
    columns = [
        Column(capitalised(basis.line_word), kind="words"),
        Column("Level", kind="text"),
        Column("As typed", kind="text"),
        Column("Set aside because", kind="text"),
    ]
    rows: list[list[Words]] = [
        [
            basis.spot(one.file, one.line),
            one.level,
            verbatim(legible(one.text)) if one.text.strip() else prose("~(blank)~"),
            _cause(basis, one.cause),
        ]
        for one in aside
    ]
    words = "Entries of {response} that were received and are not analysed."
    caption: Prose = prose(words, response=basis.response.response)
    return lay_out(numbering.table(), caption, columns, rows)


def _cause(basis: Basis, cause: Cause) -> str:
    words = _CAUSES[cause]
    if cause != "excluded":
        return words
    return f"{words}; reason in section {basis.place(Part.EXCLUSIONS).number}"
