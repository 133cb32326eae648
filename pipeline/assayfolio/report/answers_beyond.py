"""The answers beyond differences of means: equivalence, spread, precision, acceptance criteria."""

from collections.abc import Mapping

from assayfolio.findings import (
    CRITERION_MET,
    CRITERION_NOT_MET,
    DIFFERENCE_NOT_SHOWN,
    DIFFERENCE_SHOWN,
    EQUIVALENCE_SHOWN,
    NON_INFERIORITY_SHOWN,
    NOT_ASSESSABLE,
    EquivalenceFamily,
    EquivalenceRow,
    SpreadFindings,
)
from assayfolio.report.answers_shared import card_head, exploratory_mark, how_many_named, not_assessable_card
from assayfolio.report.basis import Basis
from assayfolio.report.content import Card
from assayfolio.report.criteria import criteria_headline, criterion_line
from assayfolio.report.equivalence import (
    confidence_of,
    interval_word,
    is_adjusted_family,
    is_non_inferiority,
    is_percent,
    margin_words,
    scale_of,
)
from assayfolio.report.equivalence_words import planned_margin
from assayfolio.report.methods import adjustment_words
from assayfolio.report.miniatures import Sketch, equivalence_picture, equivalence_scale
from assayfolio.report.notation import equals, probability, three_digits
from assayfolio.report.numbering import Part
from assayfolio.report.precision import precision_headline, precision_lines
from assayfolio.report.prose import Prose, prose
from assayfolio.report.spread import is_adjusted_spread, spread_confidence
from assayfolio.report.wording import (
    capitalised,
    first_of,
    interval_words,
    of_rows,
    significant_interval,
)
from assayfolio.study.plan import EquivalencePlan

_SHOWN = (EQUIVALENCE_SHOWN, NON_INFERIORITY_SHOWN)
_MOST_CRITERIA = 3
_URGENCY = {CRITERION_NOT_MET: 0, NOT_ASSESSABLE: 1, CRITERION_MET: 2}

_EQUIVALENCE_SHOWN = (
    "Equivalent within this margin: a smaller difference may exist, and other quantities, such as the "
    "scatter, are not covered."
)
_NON_INFERIORITY_SHOWN = (
    "Within this margin on the side asked about: a smaller difference may exist, and other quantities, such "
    "as the scatter, are not covered."
)
_EQUIVALENCE_NOT_SHOWN = (
    "Not shown is not different: these data do not rule out a difference beyond the margin."
)
_EQUIVALENCE_MIXED = (
    "Where not shown, these data do not rule out a difference beyond the margin. Other quantities, such as "
    "the scatter, are not covered."
)
_NOTHING_ON_EQUIVALENCE = "Nothing is said about equivalence either way."
_SPREAD = "About variances alone; the test leans on normal errors. Not shown is not the same spread."
_PRECISION = "An estimate under the conditions of this study; it says nothing about trueness."
_CRITERIA = "Held against the value itself, not its interval. Meeting a criterion is not a release decision."


def equivalence_cards(basis: Basis, accent: str, tables: Mapping[str, str]) -> list[Card]:
    """A card for each planned family of equivalence tests on this response, also where it has no answer."""
    axes = {percent: equivalence_scale(basis, percent=percent) for percent in (False, True)}
    found: list[Card] = []
    for number, family in enumerate(basis.response.equivalence, start=1):
        anchor = basis.anchor(f"equivalence-{number}")
        sketch = Sketch(accent, basis.file(f"answer-equivalence-{number}.svg"), tables[anchor])
        axis = axes[is_percent(family)]
        plan = next((item for item in basis.equivalence_plans if item.name == family.name), None)
        found.append(
            Card(
                family=card_head(
                    basis,
                    family.name,
                    _method(family),
                    *exploratory_mark(basis, registered=family.registered),
                ),
                question=_question(basis, family, plan),
                verdict=_verdict(family),
                lines=tuple(_lines(basis, family)),
                caution=prose(_caution(family)),
                picture=None if axis is None else equivalence_picture(basis, family, axis, sketch),
                section=basis.place(Part.EQUIVALENCE).number,
                anchor=anchor,
            )
        )
    reported = {family.name for family in basis.response.equivalence}
    for plan in basis.equivalence_plans:
        if plan.name not in reported:
            question = _question_of(basis, plan, planned_margin(plan, basis.response.unit))
            what = f"equivalence: {plan.name}"
            found.append(not_assessable_card(basis, plan.name, question, what, _NOTHING_ON_EQUIVALENCE))
    return found


def _method(family: EquivalenceFamily) -> str:
    tests = "one one-sided test" if is_non_inferiority(family) else "two one-sided tests"
    if len(family.rows) == 1:
        return tests
    return f"{tests}, {adjustment_words(family.adjust).name}"


def _question(basis: Basis, family: EquivalenceFamily, plan: EquivalencePlan | None) -> Prose:
    margin = margin_words(basis, family)
    if plan is None:
        return prose("{name}: within {margin}?", name=family.name, margin=margin)
    return _question_of(basis, plan, margin + (" of the reference mean" if is_percent(family) else ""))


def _question_of(basis: Basis, plan: EquivalencePlan, margin: str) -> Prose:
    if plan.against is None:
        return prose(
            "Which levels of {factor} are equivalent to one another, within {margin}?",
            factor=basis.factor,
            margin=margin,
        )
    if plan.non_inferiority:
        lower_side = plan.lower is not None or plan.lower_percent is not None
        return prose(
            "Which levels of {factor} are not {side} than {reference} by the margin ({margin})?",
            factor=basis.factor,
            side="lower" if lower_side else "higher",
            reference=plan.against,
            margin=margin,
        )
    return prose(
        "Which levels of {factor} are equivalent to {reference}, within {margin}?",
        factor=basis.factor,
        reference=plan.against,
        margin=margin,
    )


def _verdict(family: EquivalenceFamily) -> str:
    claim = "non-inferiority" if is_non_inferiority(family) else "equivalence"
    shown = sum(row.verdict in _SHOWN for row in family.rows)
    if family.family_size == 1:
        return capitalised(family.rows[0].verdict)
    return capitalised(f"{claim} {'shown' if shown else 'not shown'} {of_rows(family, shown, 'pairs')}")


def _lines(basis: Basis, family: EquivalenceFamily) -> list[Prose]:
    row = _nearest_to_margin(family)
    scale = scale_of(basis, family)
    p = probability(row.p_adjusted, family.alpha, row.log10_p_adjusted)
    lines = [
        prose(
            ("least clear: {label} = " if len(family.rows) > 1 else "{label} = ")
            + "{estimate}, {confidence} {kind} {interval}; "
            + ("adjusted " if is_adjusted_family(family) else "")
            + "*p*\u202f{p}",
            label=basis.label(row),
            estimate=scale.with_unit(scale.mean(row.estimate)),
            confidence=confidence_of(family),
            kind=interval_word(family),
            interval=interval_words(scale, row.ci),
            p=equals(p),
        )
    ]
    names = [basis.label(item) for item in family.rows if item.verdict in _SHOWN]
    if 0 < len(names) < len(family.rows):
        lines.append(prose("shown: {names}", names=first_of(names, how_many_named(names), "; ")))
    return lines


def _nearest_to_margin(family: EquivalenceFamily) -> EquivalenceRow:
    """The comparison that a card names: the one with the largest p."""
    return max(family.rows, key=lambda row: (row.log10_p_adjusted, row.p))


def _caution(family: EquivalenceFamily) -> str:
    shown = sum(row.verdict in _SHOWN for row in family.rows)
    if shown == len(family.rows):
        return _NON_INFERIORITY_SHOWN if is_non_inferiority(family) else _EQUIVALENCE_SHOWN
    return _EQUIVALENCE_MIXED if shown else _EQUIVALENCE_NOT_SHOWN


def spread_card(basis: Basis) -> list[Card]:
    """The card on variances, where that is planned."""
    plan, found = basis.study.spread, basis.response.spread
    if plan is None:
        return []
    question = prose(
        "Which levels of {factor} scatter more or less than {against}?",
        factor=basis.factor,
        against=plan.against,
    )
    name = f"variances against {plan.against}"
    if found is None or not found.rows:
        return [not_assessable_card(basis, name, question, "spread")]
    place = basis.place(Part.SPREAD)
    return [
        Card(
            family=card_head(basis, name, adjustment_words(found.adjust).name),
            question=question,
            verdict=_spread_verdict(found),
            lines=tuple(_spread_lines(basis, found)),
            caution=prose(_SPREAD),
            picture=None,
            section=place.number,
            anchor=place.anchor,
        )
    ]


def _spread_verdict(found: SpreadFindings) -> str:
    total = len(found.rows)
    shown = sum(row.verdict == DIFFERENCE_SHOWN for row in found.rows)
    if total == 1:
        return capitalised(found.rows[0].verdict)
    if not shown:
        return capitalised(f"{DIFFERENCE_NOT_SHOWN} in any of {total} variances")
    return capitalised(
        f"{DIFFERENCE_SHOWN} in {f'all {total}' if shown == total else f'{shown} of {total}'} variances"
    )


def _spread_lines(basis: Basis, found: SpreadFindings) -> list[Prose]:
    row = min(found.rows, key=lambda item: item.p)
    p = equals(probability(row.p_adjusted, basis.response.alpha))
    line = prose(
        ("clearest: " if len(found.rows) > 1 else "") + "{label} = {ratio}",
        label=row.label,
        ratio=three_digits(row.ratio),
    )
    if row.ci is not None:
        confidence, interval = spread_confidence(basis, found), significant_interval(row.ci)
        line += prose(", {confidence} interval {interval}", confidence=confidence, interval=interval)
    line += prose(f"; {'adjusted ' if is_adjusted_spread(found) else ''}*p*\u202f{{p}}", p=p)
    names = [item.label for item in found.rows if item.verdict == DIFFERENCE_SHOWN]
    if 0 < len(names) < len(found.rows):
        return [line, prose("shown: {names}", names=first_of(names, how_many_named(names), "; "))]
    return [line]


def precision_card(basis: Basis) -> list[Card]:
    """The card on precision, where that is planned."""
    plan, found = basis.study.precision, basis.response.precision
    if plan is None or not plan.estimate:
        return []
    question = prose("How precise is the measurement of {response}?", response=basis.response.response)
    if found is None:
        return [not_assessable_card(basis, "precision", question, "precision")]
    place = basis.place(Part.PRECISION)
    return [
        Card(
            family=card_head(basis, "precision"),
            question=question,
            verdict=precision_headline(found),
            lines=tuple(precision_lines(basis, found)),
            caution=prose(_PRECISION),
            picture=None,
            section=place.number,
            anchor=place.anchor,
        )
    ]


def criteria_card(basis: Basis) -> list[Card]:
    """The card on acceptance criteria, those not met first; none where none is planned."""
    found = basis.response.criteria
    if not found:
        return []
    place = basis.place(Part.CRITERIA)
    ordered = sorted(found, key=lambda one: _URGENCY[one.verdict])
    lines = [criterion_line(basis, one) for one in ordered[:_MOST_CRITERIA]]
    rest = len(ordered) - _MOST_CRITERIA
    if rest > 0:
        lines.append(prose("and {rest} more in section {number}", rest=str(rest), number=str(place.number)))
    count = "Is the acceptance criterion met?" if len(found) == 1 else "Are the acceptance criteria met?"
    return [
        Card(
            family=card_head(basis, "acceptance criteria"),
            question=prose(count),
            verdict=criteria_headline(found),
            lines=tuple(lines),
            caution=prose(_CRITERIA),
            picture=None,
            section=place.number,
            anchor=place.anchor,
        )
    ]
