"""What the planned tests propose to look into. Nothing is removed."""

from collections.abc import Sequence

from assayfolio.findings import NEITHER, OUTLIER, STRAGGLER, OutlierFindings
from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, Paragraph, Section, TableBlock
from assayfolio.report.counts import is_whole
from assayfolio.report.notation import statistic
from assayfolio.report.numbering import Numbering, Part
from assayfolio.report.prose import Words, prose
from assayfolio.report.tables import Column, Table, lay_out
from assayfolio.report.wording import BLANK, capitalised, counted, first_of, listed

TEST_NAMES = {
    "grubbs": "Grubbs, one value",
    "grubbs-double": "Grubbs, two values",
    "cochran": "Cochran, level variance",
}
_OF_MEANS = {"grubbs": "Grubbs, one level mean", "grubbs-double": "Grubbs, two level means"}
_SHORT = {OUTLIER: "outlier", STRAGGLER: "straggler", NEITHER: "neither"}
_STANDARD_NOTE = "nothing was removed; "
_MOST_QUIET = 12
_MOST_REASONS = 4


def outliers_section(basis: Basis, numbering: Numbering) -> Section:
    """The tests that propose something in full, the others counted where they are many."""
    place = basis.place(Part.OUTLIERS)
    found = basis.response.outliers
    blocks: list[Block] = [
        Paragraph(
            prose(
                "A test proposes values or levels to look into: a straggler lies beyond the limit that "
                "chance alone exceeds in 5 % of cases, an outlier beyond that of 1 %, for each test by "
                "itself. #Nothing was removed# by these tests: {uses}. A proposal "
                "calls for a cause, found in the laboratory’s records; without one the value stays.",
                uses=_uses(basis),
            )
        ),
        Paragraph(prose("#{verdict}.#", verdict=proposals_words(found)), "lead"),
    ]
    shown = _shown(found)
    if shown:
        blocks.append(TableBlock(_table(basis, shown, numbering)))
    left_out = len([one for one in found if one.statistic is not None]) - len(shown)
    if left_out > 0:
        words = "The table has the proposals; the other {tests} propose nothing."
        blocks.append(Paragraph(prose(words, tests=counted(left_out, "test")), "note"))
    blocks += _not_assessable(found)
    return Section(place.anchor, place.number, basis.title("Outlier proposals"), tuple(blocks))


def _uses(basis: Basis) -> str:
    if is_whole(basis):
        return "every analysis in this report uses all values"
    number = basis.place(Part.DATA).number
    return f"every analysis uses all values that section {number} counts as analysed, and so do the tests"


def proposed(found: Sequence[OutlierFindings], verdict: str) -> int:
    """How many tests have that verdict."""
    return sum(one.verdict == verdict for one in found)


def proposals_words(found: Sequence[OutlierFindings]) -> str:
    """What all tests together propose, in a few words."""
    beyond = [
        (proposed(found, OUTLIER), "beyond the 1 % limit"),
        (proposed(found, STRAGGLER), "beyond the 5 % limit"),
    ]
    parts = [f"{counted(count, 'proposal')} {words}" for count, words in beyond if count]
    assessed = sum(one.statistic is not None for one in found)
    if not assessed:
        return "No test can be assessed"
    return f"{listed(parts) if parts else 'No proposal'} in {counted(assessed, 'test')}"


def _shown(found: Sequence[OutlierFindings]) -> list[OutlierFindings]:
    """Every test with a statistic, or only the proposals where they are too many to read."""
    assessed = [one for one in found if one.statistic is not None]
    if len(assessed) <= _MOST_QUIET:
        return assessed
    return [one for one in assessed if one.verdict in (OUTLIER, STRAGGLER)]


def _table(basis: Basis, found: Sequence[OutlierFindings], numbering: Numbering) -> Table:
    columns = [
        Column("Test", kind="words"),
        Column("Level", kind="text"),
        Column(f"{capitalised(basis.line_word)}s", kind="words"),
        Column("Values", basis.scale.heading, kind="words"),
        Column("Statistic"),
        Column("Straggler limit, 5 %"),
        Column("Outlier limit, 1 %"),
        Column("Proposal", kind="words"),
    ]
    rows: list[list[Words]] = [
        [
            _name(one),
            ", ".join(one.levels) or one.level or BLANK,
            _places(basis, one),
            _values(basis, one),
            _statistic(one),
            BLANK if one.straggler_limit is None else statistic(one.straggler_limit),
            BLANK if one.outlier_limit is None else statistic(one.outlier_limit),
            _SHORT.get(one.verdict, one.verdict),
        ]
        for one in found
    ]
    caption = prose(
        "Outlier proposals for {response}; nothing was removed.", response=basis.response.response
    )
    notes = []
    if any(one.test == "grubbs-double" for one in found):
        notes.append(
            prose("For two values or means a statistic below its limit is the proposal; else one above.")
        )
    notes += [prose("{remark}", remark=remark) for remark in _remarks(found)]
    return lay_out(numbering.table(), caption, columns, rows, notes)


def _name(found: OutlierFindings) -> str:
    name = TEST_NAMES.get(found.test, found.test)
    return _OF_MEANS.get(found.test, name) if found.about == "level means" else name


def _places(basis: Basis, found: OutlierFindings) -> str:
    """The lines of the values in question, each behind the number of its file where there are several."""
    names = [raw.file for raw in basis.observations.files]
    files = [names.index(file) for file in found.files] or [0] * len(found.lines)
    return ", ".join(map(basis.spot, files, found.lines)) or BLANK


def _values(basis: Basis, found: OutlierFindings) -> str:
    """The values in question, or the level means where the test is about these."""
    if found.about == "level means":
        means = [level.mean for level in basis.levels if level.level in found.levels]
        return ", ".join(map(basis.scale.mean, means)) or BLANK
    return ", ".join(map(basis.scale.value, found.values)) or BLANK


def _statistic(found: OutlierFindings) -> str:
    if found.statistic is None:
        return BLANK
    return statistic(found.statistic) if found.statistic else "0"


def _remarks(found: Sequence[OutlierFindings]) -> list[str]:
    """What the tests remark beyond their own verdict, each remark once, with the levels it is about."""
    levels: dict[str, list[str]] = {}
    for one in found:
        remark = one.note.partition(_STANDARD_NOTE)[2]
        if remark:
            levels.setdefault(remark, []).append(", ".join(one.levels) or one.level)
    return [f"{first_of(names, _MOST_REASONS, ', ')}: {remark}." for remark, names in levels.items()]


def _not_assessable(found: Sequence[OutlierFindings]) -> list[Block]:
    reasons: dict[str, list[str]] = {}
    for one in found:
        if one.statistic is None:
            names = ", ".join(one.levels) or one.level
            where = f"{_name(one)}: {names}" if names else _name(one)
            reasons.setdefault(one.note, []).append(where)
    return [
        Paragraph(
            prose(
                "Not assessable: {where}. {note}.",
                where=first_of(levels, _MOST_REASONS, "; "),
                note=capitalised(note.removeprefix("not assessable: ").rstrip(".")),
            ),
            "note",
        )
        for note, levels in reasons.items()
    ]
