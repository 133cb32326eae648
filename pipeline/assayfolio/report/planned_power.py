"""The power of the plan, from the plan alone."""

from assayfolio.findings import PowerFindings, PowerRow
from assayfolio.report.content import Block, Paragraph, TableBlock
from assayfolio.report.notation import decimal, percent, probability, three_digits
from assayfolio.report.numbering import Numbering
from assayfolio.report.prose import Prose, Words, prose
from assayfolio.report.tables import Column, Table, lay_out
from assayfolio.report.wording import BLANK, typographic, with_unit
from assayfolio.study.plan import StudyDefinition


def power_blocks(study: StudyDefinition, power: PowerFindings, numbering: Numbering) -> list[Block]:
    """What the planned numbers can show, in words and as a table."""
    return [
        Paragraph(_assumed(study, power)),
        TableBlock(_table(power, numbering)),
    ]


def _assumed(study: StudyDefinition, power: PowerFindings) -> Prose:
    sizes = _by_level(power, power.replicates)
    words = prose(
        "From the plan alone, and never from the data: what a study of this size can show where the standard "
        "deviation is {sigma} and the difference to be seen {difference}, at *α* = {alpha}{divided} and with "
        "these numbers of values: {sizes}. The target is a power of {target}.",
        sigma=with_unit(decimal(power.sigma), power.unit),
        difference=with_unit(decimal(power.difference), power.unit),
        alpha=decimal(power.alpha),
        divided=_divided(study),
        sizes=sizes,
        target=percent(power.target),
    )
    more = []
    if len(study.data.response) > 1:
        more.append(f" It is about {power.response}.")
    if any(map(is_on_equivalence, power.rows)):
        true = with_unit(decimal(power.true_difference), power.unit)
        more.append(f" For equivalence the true difference is taken as {true}.")
    if power.allocation == "control":
        more.append(" Numbers sought give the reference √(k − 1) times as many values as each other level.")
    return (*words, *(span for text in more for span in prose("{text}", text=text)))


def is_on_equivalence(row: PowerRow) -> bool:
    """Whether a row is about equivalence or non-inferiority, by the standard name of its procedure."""
    return "one-sided t test" in row.method


def _divided(study: StudyDefinition) -> str:
    """Why alpha is not that of the plan; empty where it is."""
    if study.design.across_responses == "none":
        return ""
    count = len(study.data.response)
    return f" (that of the plan, {decimal(study.alpha)}, divided by the number of responses, {count})"


def _table(power: PowerFindings, numbering: Numbering) -> Table:
    columns = [
        Column("Question", kind="text"),
        Column("Power is the chance of", kind="text"),
        Column("Power"),
        Column("Values a level for the target"),
        Column("Detectable difference", power.unit or ""),
        Column("Half-width of interval", power.unit or ""),
    ]
    caption = prose("Power of the planned tests of {response}, from the plan alone.", response=power.response)
    rows = [_row(power, row) for row in power.rows]
    return lay_out(numbering.table(), caption, columns, rows, _notes(power))


def _row(power: PowerFindings, row: PowerRow) -> list[Words]:
    return [
        prose("{question}~ ({method})~", question=row.question, method=typographic(row.method)),
        row.meaning,
        probability(row.power, power.target),
        BLANK if row.n_for_target is None else _numbers(row.n_for_target),
        BLANK if row.detectable_difference is None else three_digits(row.detectable_difference),
        BLANK if row.half_width is None else three_digits(row.half_width),
    ]


def _numbers(sizes: tuple[int, ...]) -> str:
    """Numbers of values: one for all levels, the odd one first and then the others, or level by level."""
    odd = _odd_one(sizes)
    if len(set(sizes)) == 1:
        return str(sizes[0])
    if odd is None:
        return ", ".join(map(str, sizes))
    others = next(size for place, size in enumerate(sizes) if place != odd)
    return f"{sizes[odd]}; {others}"


def _odd_one(sizes: tuple[int, ...]) -> int | None:
    """The place of the one number that differs from all others, which are equal; None where there is none."""
    for at in range(len(sizes)):
        others = {other for place, other in enumerate(sizes) if place != at}
        if len(others) == 1 and len(sizes) > 2 and sizes[at] not in others:
            return at
    return None


def _notes(power: PowerFindings) -> list[Prose]:
    notes = [
        prose(
            "Detectable: the smallest difference with the target power at the planned numbers. Half-width: "
            "of the interval where the standard deviation found equals the one assumed; of a one-sided "
            "question the distance to its bound. A dash: not defined (a stepwise method has no interval), or "
            "out of the range that was searched."
        )
    ]
    odd = {_odd_one(row.n_for_target) for row in power.rows if row.n_for_target} - {None}
    for at in sorted(place for place in odd if place is not None):
        words = "Two numbers of values: at {level}, and at each other level."
        notes.append(prose(words, level=power.levels[at]))
    return notes


def _by_level(power: PowerFindings, sizes: tuple[int, ...]) -> str:
    """Numbers of values by level: "6 at each level", "12 at R, 6 at each other", or one by one."""
    if len(set(sizes)) == 1:
        return f"{sizes[0]} at each level"
    odd = _odd_one(sizes)
    if odd is not None:
        others = next(size for place, size in enumerate(sizes) if place != odd)
        return f"{sizes[odd]} at {power.levels[odd]}, {others} at each other"
    return "; ".join(f"{level} {size}" for level, size in zip(power.levels, sizes, strict=True))
