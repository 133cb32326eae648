"""Descriptive statistics of the levels: n, mean, standard deviation with their intervals, and the range."""

from collections.abc import Callable
from dataclasses import dataclass

from assayfolio.findings import LevelFindings
from assayfolio.report.basis import Basis
from assayfolio.report.notation import Scale
from assayfolio.report.numbering import Numbering, Part
from assayfolio.report.prose import Prose, Words, prose
from assayfolio.report.tables import Column, Table, fits, lay_out
from assayfolio.report.wording import BLANK, counted


@dataclass(frozen=True, slots=True)
class _Group:
    """Columns that belong together, the cells of a level in them, and what the caption says of them."""

    columns: tuple[Column, ...]
    cells: Callable[[LevelFindings], list[Words]]
    says: Prose = ()


def descriptives_tables(basis: Basis, numbering: Numbering) -> list[Table]:
    """One table; two or three where the figures are so long that it would have to be set too small."""
    mean, ends, sd, extremes = _mean(basis), _ends_of_mean(basis), _sd(basis), _extremes(basis)
    intervals = [ends] if any(level.ci is not None for level in basis.levels) else []
    ways = (
        [[mean, *intervals, sd, extremes]],
        [[mean, *intervals, extremes], [sd]],
        [[mean, extremes], *([[mean, ends]] if intervals else []), [sd]],
    )
    way = next((way for way in ways if all(_fits(basis, groups) for groups in way)), ways[-1])
    return [_table(basis, groups, numbering, first=groups is way[0]) for groups in way]


def _laid(basis: Basis, groups: list[_Group]) -> tuple[list[Column], list[list[Words]]]:
    columns = [Column("Level", kind="text"), Column(prose("*n*"))]
    columns += [column for group in groups for column in group.columns]
    rows: list[list[Words]] = [
        [level.level, str(level.n), *(cell for group in groups for cell in group.cells(level))]
        for level in basis.levels
    ]
    return columns, rows


def _fits(basis: Basis, groups: list[_Group]) -> bool:
    return fits(*_laid(basis, groups))


def _table(basis: Basis, groups: list[_Group], numbering: Numbering, *, first: bool) -> Table:
    columns, rows = _laid(basis, groups)
    caption = prose(
        "{what} of {response} by {factor}.",
        what="Descriptive statistics" if first else "Further descriptive statistics",
        response=basis.response.response,
        factor=basis.factor,
    )
    said = tuple(span for group in groups for span in group.says)
    return lay_out(numbering.table(), (*caption, *said), columns, rows, _notes(basis) if first else [])


def _mean(basis: Basis) -> _Group:
    scale = basis.scale
    return _Group((Column("Mean", scale.heading),), lambda level: [scale.mean(level.mean)])


def _ends_of_mean(basis: Basis) -> _Group:
    scale = basis.scale
    if basis.is_separate:
        words = prose(
            " For the mean: its {confidence} interval, from the standard deviation of its own level.",
            confidence=basis.confidence,
        )
    else:
        words = prose(
            " For the mean: its {confidence} interval, from the residual standard deviation with {df}.",
            confidence=basis.confidence,
            df=counted(basis.response.anova.within.df, "degree of freedom", "degrees of freedom"),
        )

    def cells(level: LevelFindings) -> list[Words]:
        return [BLANK if end is None else scale.mean(end) for end in level.ci or (None, None)]

    return _Group((Column("Interval, from", scale.heading), Column("to", scale.heading)), cells, words)


def _sd(basis: Basis) -> _Group:
    scale = basis.difference_scale
    largest = max((level.sd for level in basis.levels if level.sd), key=lambda sd: sd.square, default=None)

    def cells(level: LevelFindings) -> list[Words]:
        return [BLANK if level.sd is None or largest is None else scale.spread(level.sd, largest)]

    column = Column("Standard deviation", scale.heading)
    if largest is None or all(level.sd_ci is None for level in basis.levels):
        return _Group((column,), cells)

    def with_ends(level: LevelFindings) -> list[Words]:
        ends = level.sd_ci or (None, None)
        return cells(level) + [BLANK if end is None else scale.spread(end, largest) for end in ends]

    words = prose(
        " For the standard deviation: its {confidence} chi-square interval, on *n* − 1 degrees of freedom, "
        "which leans on normal errors. Each interval is for its level alone.",
        confidence=basis.confidence,
    )
    return _Group(
        (column, Column("Interval, from", scale.heading), Column("to", scale.heading)), with_ends, words
    )


def _extremes(basis: Basis) -> _Group:
    scale: Scale = basis.scale
    columns = (Column("Smallest", scale.heading), Column("Largest", scale.heading))
    return _Group(columns, lambda level: [scale.value(level.minimum), scale.value(level.maximum)])


def _notes(basis: Basis) -> list[Prose]:
    notes = [prose("A mean that lies exactly between two printed figures is rounded to the even digit.")]
    if any(level.n == 1 for level in basis.levels):
        notes.append(prose("A level with one value has no standard deviation of its own (–)."))
    if all(level.ci is None for level in basis.levels):
        number = str(basis.place(Part.NOT_REPORTED).number)
        words = "Intervals for the means are not reported; section {number} gives the reason."
        notes.append(prose(words, number=number))
    return notes
