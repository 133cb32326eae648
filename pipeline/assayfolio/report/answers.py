"""The first page: every planned question, its verdict in words, the estimate, and what it does not mean."""

from collections.abc import Mapping

from assayfolio.findings import (
    DIFFERENCE_NOT_SHOWN,
    DIFFERENCE_SHOWN,
    ComparisonFamily,
    ComparisonRow,
)
from assayfolio.report.answers_beyond import (
    criteria_card,
    equivalence_cards,
    precision_card,
    spread_card,
)
from assayfolio.report.answers_overall import overall_card
from assayfolio.report.answers_shared import card_head, exploratory_mark, how_many_named, not_assessable_card
from assayfolio.report.basis import Basis, is_single_step
from assayfolio.report.content import Card
from assayfolio.report.methods import adjustment_of
from assayfolio.report.miniatures import Sketch, comparison_scale, family_picture
from assayfolio.report.notation import equals, three_digits
from assayfolio.report.numbering import Part
from assayfolio.report.prose import Prose, prose
from assayfolio.report.wording import (
    CAUTION_MIXED,
    CAUTION_NO_INTERVAL,
    CAUTION_NOT_SHOWN,
    CAUTION_SHOWN,
    about_equivalence,
    adjusted_p,
    capitalised,
    first_of,
    interval_kind,
    interval_words,
    is_adjusted,
    of_rows,
    significant_interval,
)
from assayfolio.study.plan import AgainstReference, AllPairs, Comparison, ContrastFamily, Trend

_SIDES = {"two-sided": "differ from", "greater": "lie above", "less": "lie below"}
_SLOPES = {"two-sided": "rise or fall", "greater": "rise", "less": "fall"}


def cards(bases: tuple[Basis, ...], accent: str, tables: Mapping[str, str]) -> tuple[Card, ...]:
    """One card a planned question, response by response.

    For each response the overall question comes first, then criteria, comparisons, equivalence, spread and
    precision, each in the order of the plan. `tables` gives the label of the table with the figures behind
    each anchor.
    """
    found: list[Card] = []
    for basis in bases:
        found.append(overall_card(basis, accent, tables))
        found += criteria_card(basis)
        found += _comparison_cards(basis, accent, tables)
        found += _unreported(basis)
        found += equivalence_cards(basis, accent, tables)
        found += [*spread_card(basis), *precision_card(basis)]
    return tuple(found)


def _comparison_cards(basis: Basis, accent: str, tables: Mapping[str, str]) -> list[Card]:
    axis = comparison_scale(basis)
    found = []
    for number, family in enumerate(basis.response.comparisons, start=1):
        anchor = basis.anchor(f"family-{number}")
        sketch = Sketch(accent, basis.file(f"answer-comparison-{number}.svg"), tables[anchor])
        picture = None
        if axis is not None and family.kind != "trend":
            picture = family_picture(basis, family, axis, sketch)
        found.append(
            Card(
                family=card_head(
                    basis,
                    family.name,
                    adjustment_of(family).name,
                    *exploratory_mark(basis, registered=family.registered),
                ),
                question=_question(basis, family),
                verdict=_family_verdict(family),
                lines=tuple(_family_lines(basis, family)),
                caution=prose(f"{_family_caution(family)} {about_equivalence(basis)}"),
                picture=picture,
                section=basis.place(Part.COMPARISONS).number,
                anchor=anchor,
            )
        )
    return found


def _unreported(basis: Basis) -> list[Card]:
    """A card for each planned family that could not be given: the question stays, the answer says so."""
    reported = {family.name for family in basis.response.comparisons}
    return [
        not_assessable_card(basis, plan.name, _question_of(basis, plan), f"comparison: {plan.name}")
        for plan in basis.study.comparisons
        if plan.name not in reported
    ]


def _question(basis: Basis, family: ComparisonFamily) -> Prose:
    plan = next((item for item in basis.study.comparisons if item.name == family.name), None)
    pair = basis.pair(family.rows[0])
    if isinstance(plan, AgainstReference) and len(family.rows) == 1 and pair is not None:
        side = _SIDES[plan.alternative]
        return prose(
            "Does the mean of {level} {side} that of {reference}?",
            level=pair[0],
            side=side,
            reference=plan.against,
        )
    if plan is None:
        return prose("{name}: which comparisons show a difference?", name=family.name)
    return _question_of(basis, plan)


def _question_of(basis: Basis, plan: Comparison) -> Prose:
    if isinstance(plan, AllPairs):
        return prose("Which levels of {factor} differ from one another?", factor=basis.factor)
    side = _SIDES[plan.alternative]
    if isinstance(plan, AgainstReference):
        return prose(
            "Which levels of {factor} {side} {reference}?",
            factor=basis.factor,
            side=side,
            reference=plan.against,
        )
    if isinstance(plan, Trend):
        return _question_of_trend(basis, plan)
    if isinstance(plan, ContrastFamily):
        return prose("Which contrasts of “{name}” {side} zero?", name=plan.name, side=side)
    return prose("Does the contrast “{name}” {side} zero?", name=plan.name, side=side)


def _question_of_trend(basis: Basis, plan: Trend) -> Prose:
    if plan.degree == 1:
        slope = _SLOPES[plan.alternative]
        return prose(f"Do the means {slope} with {{factor}}, along a straight line?", factor=basis.factor)
    side = _SIDES[plan.alternative]
    words = f"Which coefficients of a polynomial in {{factor}}, up to degree {plan.degree}, {side} zero?"
    return prose(words, factor=basis.factor)


def _family_verdict(family: ComparisonFamily) -> str:
    what = "trends" if family.kind == "trend" else "comparisons"
    shown = sum(row.verdict == DIFFERENCE_SHOWN for row in family.rows)
    if family.family_size == 1:
        return capitalised(family.rows[0].verdict)
    verdict = DIFFERENCE_SHOWN if shown else DIFFERENCE_NOT_SHOWN
    return capitalised(f"{verdict} {of_rows(family, shown, what)}")


def _family_lines(basis: Basis, family: ComparisonFamily) -> list[Prose]:
    lines = [_estimate(basis, family)]
    shown = [item for item in family.rows if item.verdict == DIFFERENCE_SHOWN]
    if 0 < len(shown) < len(family.rows):
        names = [basis.label(item) for item in shown]
        lines.append(prose("shown: {names}", names=first_of(names, how_many_named(names), "; ")))
    return lines


def _foremost(family: ComparisonFamily) -> tuple[str, ComparisonRow]:
    """The comparison that a card names: the largest on the side that was asked about."""
    if family.kind == "trend":
        return "clearest", min(family.rows, key=lambda row: row.log10_p_adjusted)
    if family.alternative == "greater":
        return "highest", max(family.rows, key=lambda row: row.estimate)
    if family.alternative == "less":
        return "lowest", min(family.rows, key=lambda row: row.estimate)
    return "largest", max(family.rows, key=lambda row: abs(row.estimate))


def _estimate(basis: Basis, family: ComparisonFamily) -> Prose:
    which, row = _foremost(family)
    scale = basis.difference_scale
    is_trend = family.kind == "trend"
    estimate = three_digits(row.estimate) if is_trend else scale.with_unit(scale.mean(row.estimate))
    if len(family.rows) == 1:
        lead = prose(f"{'slope' if is_trend else 'difference'} {{estimate}}", estimate=estimate)
    else:
        lead = prose("{which}: {label} = {estimate}", which=which, label=basis.label(row), estimate=estimate)
    p = prose(("adjusted " if is_adjusted(family) else "") + "*p*\u202f{p}", p=equals(adjusted_p(basis, row)))
    if row.ci is None:
        return prose("{lead}; {p}; no interval by this method", lead=lead, p=p)
    return prose(
        "{lead}, {kind} {interval}; {p}",
        lead=lead,
        kind=interval_kind(basis, family),
        interval=significant_interval(row.ci) if is_trend else interval_words(scale, row.ci),
        p=p,
    )


def _family_caution(family: ComparisonFamily) -> str:
    shown = sum(row.verdict == DIFFERENCE_SHOWN for row in family.rows)
    if shown == len(family.rows):
        return CAUTION_SHOWN
    if shown:
        return CAUTION_MIXED
    return CAUTION_NOT_SHOWN if is_single_step(family) else CAUTION_NO_INTERVAL
