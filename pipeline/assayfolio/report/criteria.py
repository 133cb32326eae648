"""The limits that were set in advance, and whether the results keep them."""

from collections.abc import Sequence
from fractions import Fraction

from assayfolio.exact import Exact, Root, magnitude, rounded_units
from assayfolio.findings import CRITERION_NOT_MET, NOT_ASSESSABLE, CriterionFindings
from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, Paragraph, Section, TableBlock
from assayfolio.report.notation import decimal, fixed, scientific, significant_places
from assayfolio.report.numbering import Numbering, Part
from assayfolio.report.prose import Prose, Words, prose
from assayfolio.report.tables import Column, lay_out
from assayfolio.report.wording import BLANK, capitalised, with_unit
from assayfolio.study.plan import StudyDefinition

_NAMES = {
    "repeatability-sd": "repeatability standard deviation",
    "repeatability-rsd": "relative repeatability standard deviation",
    "repeatability-limit": "repeatability limit",
    "between-sd": "between-level standard deviation",
    "between-rsd": "relative between-level standard deviation",
    "total-sd": "total standard deviation",
    "total-rsd": "relative total standard deviation",
    "largest-difference": "largest difference of two level means",
    "largest-difference-percent": "largest difference of two level means, of the mean of all values",
    "level-mean": "mean",
    "level-sd": "standard deviation",
    "level-rsd": "relative standard deviation",
}
_MOST_DIGITS = 12


def criteria_section(basis: Basis, numbering: Numbering) -> Section:
    """Each criterion with the value it was held against."""
    place = basis.place(Part.CRITERIA)
    found = basis.response.criteria
    columns = [
        Column("Quantity", kind="text"),
        Column("Value", kind="words"),
        Column("Limit", kind="words"),
        Column("Verdict", kind="words"),
    ]
    rows: list[list[Words]] = [
        [
            quantity_name(basis, one.quantity, one.level),
            value_words(basis, one),
            limit_words(one),
            one.verdict,
        ]
        for one in found
    ]
    blocks: list[Block] = [
        Paragraph(
            prose(
                "Each limit was set in the plan and is held against the value itself, before any rounding; "
                "the uncertainty of the value does not enter. A criterion met is not a release decision, "
                "nor is one not met a reason by itself."
            )
        ),
        TableBlock(
            lay_out(
                numbering.table(),
                prose("Acceptance criteria, {response}.", response=basis.response.response),
                columns,
                rows,
            )
        ),
    ]
    if any(one.verdict == NOT_ASSESSABLE for one in found):
        number = str(basis.place(Part.NOT_REPORTED).number)
        why = "Why a criterion is not assessable, section {number} says."
        blocks.append(Paragraph(prose(why, number=number), "note"))
    return Section(place.anchor, place.number, basis.title("Acceptance criteria"), tuple(blocks))


def quantity_name(basis: Basis, quantity: str, level: str | None) -> str:
    """What a criterion is about, in words; the total by the name that the plan gives it."""
    return quantity_words(basis.study, quantity, level)


def quantity_words(study: StudyDefinition, quantity: str, level: str | None) -> str:
    """The same, from the plan alone."""
    name = _NAMES[quantity]
    plan = study.precision
    if plan is not None and plan.conditions is not None:
        name = name.replace("total", plan.conditions.replace("-", " "))
    return f"{name} of {level}" if level is not None else name


def limit_words(found: CriterionFindings) -> str:
    """The limit of a criterion: "at most 2.0 %"."""
    return f"{found.relation} {with_unit(decimal(found.limit), found.unit)}"


def value_words(basis: Basis, found: CriterionFindings) -> str:
    """The value of a criterion with its unit, in as many digits as tell it from the limit."""
    if found.value is None:
        return BLANK
    if not (found.value.sign if isinstance(found.value, Root) else found.value):
        return with_unit("0", found.unit)
    digits = 3
    if found.quantity in ("level-mean", "largest-difference"):
        digits = max(3, magnitude(found.value) + 1 + basis.scale.mean_places - basis.scale.power)
    while digits < _MOST_DIGITS and _reads_as(found.value, found.limit, digits):
        digits += 1
    places = significant_places(found.value, digits)
    if -3 <= places <= 9:
        return with_unit(fixed(found.value, max(0, places)), found.unit)
    return with_unit(scientific(found.value, digits), found.unit)


def _reads_as(value: Exact, limit: Fraction, digits: int) -> bool:
    equal = value.square == limit**2 if isinstance(value, Root) else value == limit
    places = significant_places(value, digits)
    return not equal and rounded_units(value, places) == Fraction(10) ** places * limit


def criterion_line(basis: Basis, found: CriterionFindings) -> Prose:
    """One criterion as a line of an answer."""
    verdict = found.verdict.removeprefix("criterion ")
    return prose(
        "{name} {value}, {limit}: {verdict}",
        name=quantity_name(basis, found.quantity, found.level),
        value=value_words(basis, found),
        limit=limit_words(found),
        verdict=verdict,
    )


def criteria_headline(found: Sequence[CriterionFindings]) -> str:
    """What an answer on criteria says first."""
    return capitalised(criteria_count(found))


def criteria_count(found: Sequence[CriterionFindings]) -> str:
    """How many limits are not met, how many cannot be assessed, or that all are met."""
    if len(found) == 1:
        return found[0].verdict
    missed = sum(one.verdict == CRITERION_NOT_MET for one in found)
    unknown = sum(one.verdict == NOT_ASSESSABLE for one in found)
    of_all = f"of {len(found)} limits"
    if missed:
        return f"{missed} {of_all} not met" + (f", {unknown} not assessable" if unknown else "")
    return f"{unknown} {of_all} not assessable" if unknown else f"all {len(found)} limits met"


def criterion_phrase(basis: Basis, found: CriterionFindings) -> Prose:
    """One criterion in running text: its name, its value and its limit."""
    return prose(
        "{of}{name} {value} ({limit})",
        of=f"{basis.response.response}, " if basis.several else "",
        name=quantity_name(basis, found.quantity, found.level),
        value="not assessable" if found.value is None else value_words(basis, found),
        limit=limit_words(found),
    )
