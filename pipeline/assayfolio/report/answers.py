"""The first page: every planned question, its verdict in words, the estimate, and what it does not mean."""

from collections.abc import Mapping

from assayfolio.findings import (
    DIFFERENCE_NOT_SHOWN,
    DIFFERENCE_SHOWN,
    NOT_ASSESSABLE,
    ComparisonFamily,
    ComparisonRow,
)
from assayfolio.report.basis import Basis, is_single_step
from assayfolio.report.content import Card, SummaryLine
from assayfolio.report.methods import adjustment_of
from assayfolio.report.miniatures import comparison_axis, family_picture, means_picture
from assayfolio.report.notation import equals, statistic
from assayfolio.report.numbering import ANCHORS, ANOVA, CHECKS, COMPARISONS, DATA, NOT_REPORTED, PLAN
from assayfolio.report.prose import Prose, joined, prose
from assayfolio.report.wording import (
    CAUTION_MIXED,
    CAUTION_NO_INTERVAL,
    CAUTION_NOT_SHOWN,
    CAUTION_SHOWN,
    adjusted_p,
    capitalised,
    check_words,
    counted,
    first_of,
    interval_kind,
    interval_words,
    p_words,
)
from assayfolio.study.plan import AgainstReference, AllPairs, Comparison

_MOST_NAMED = 4
_MOST_NAMED_CHARACTERS = 96


def cards(basis: Basis, accent: str, tables: Mapping[str, str]) -> tuple[Card, ...]:
    """One card a planned question, the overall question first, then the families in the order of the plan.

    `tables` gives the label of the table with the figures behind each anchor.
    """
    axis = comparison_axis(basis)
    found = [_overall(basis, accent, tables[ANCHORS[DATA]])]
    for number, family in enumerate(basis.response.comparisons, start=1):
        anchor = f"family-{number}"
        name = f"answer-comparison-{number}.svg"
        picture = None
        if axis is not None:
            picture = family_picture(basis, family, axis, accent, name, tables[anchor])
        found.append(
            Card(
                family=prose("{name} · {method}", name=family.name, method=adjustment_of(family).name),
                question=_question(basis, family),
                verdict=_family_verdict(family),
                lines=tuple(_family_lines(basis, family)),
                caution=prose(_family_caution(family)),
                picture=picture,
                section=COMPARISONS,
                anchor=anchor,
            )
        )
    return (*found, *_unreported(basis))


def _unreported(basis: Basis) -> list[Card]:
    """A card for each planned family that could not be given: the question stays, the answer says so."""
    reasons = {item.what: item.reason for item in basis.content.findings.not_reported}
    reported = {family.name for family in basis.response.comparisons}
    return [
        Card(
            family=prose("{name}", name=plan.name),
            question=_question_of(basis, plan),
            verdict=capitalised(NOT_ASSESSABLE),
            lines=(
                prose(
                    "{reason}",
                    reason=reasons.get(f"comparison: {plan.name}", "the reason stands in section 6"),
                ),
            ),
            caution=prose(_SAYS_NOTHING),
            picture=None,
            section=NOT_REPORTED,
            anchor=ANCHORS[NOT_REPORTED],
        )
        for plan in basis.content.study.comparisons
        if plan.name not in reported
    ]


def _overall(basis: Basis, accent: str, table: str) -> Card:
    anova = basis.response.anova
    count = len(basis.levels)
    question = prose(
        "Does the mean {response} differ between the {count} levels of {factor}?",
        response=basis.response.response,
        count=str(count),
        factor=basis.factor,
    )
    lines: list[Prose] = []
    if anova.f is not None and anova.p is not None:
        lines.append(
            prose(
                "*F* with {between} and {within} degrees of freedom {f}, {p}",
                between=str(anova.between.df),
                within=str(anova.within.df),
                f=equals(statistic(anova.f)),
                p=p_words(basis, anova.p, anova.log10_p),
            )
        )
        caution = {DIFFERENCE_SHOWN: _OVERALL_SHOWN}.get(anova.verdict, _OVERALL_NOT_SHOWN)
    else:
        caution = _OVERALL_NOT_ASSESSABLE
    lines.append(_range_of_means(basis))
    return Card(
        family=prose("analysis of variance"),
        question=question,
        verdict=capitalised(anova.verdict),
        lines=tuple(lines),
        caution=prose(caution),
        picture=means_picture(basis, accent, "answer-means.svg", table),
        section=ANOVA,
        anchor=ANCHORS[ANOVA],
    )


_OVERALL_SHOWN = (
    "This says that some mean differs from another, not which, nor that it matters. "
    "Equivalence was not tested."
)
_OVERALL_NOT_SHOWN = (
    "Not shown is not absent: means may differ by less than these data can show. Equivalence was not tested."
)
_SAYS_NOTHING = "Nothing is said about a difference either way."
_OVERALL_NOT_ASSESSABLE = "The reason stands in section 6. " + _SAYS_NOTHING


def _range_of_means(basis: Basis) -> Prose:
    lowest = min(basis.levels, key=lambda level: level.mean)
    highest = max(basis.levels, key=lambda level: level.mean)
    scale = basis.scale
    if lowest.mean == highest.mean:
        return prose("all level means {mean}", mean=scale.with_unit(scale.mean(lowest.mean)))
    return prose(
        "level means from {low} ({lowest}) to {high} ({highest})",
        low=scale.mean(lowest.mean) if not scale.power else scale.with_unit(scale.mean(lowest.mean)),
        lowest=lowest.level,
        high=scale.with_unit(scale.mean(highest.mean)),
        highest=highest.level,
    )


_SIDES = {"two-sided": "differ from", "greater": "lie above", "less": "lie below"}


def _question(basis: Basis, family: ComparisonFamily) -> Prose:
    plan = next((item for item in basis.content.study.comparisons if item.name == family.name), None)
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
    return prose("Does the contrast “{name}” {side} zero?", name=plan.name, side=side)


def _family_verdict(family: ComparisonFamily) -> str:
    total = len(family.rows)
    shown = sum(row.verdict == DIFFERENCE_SHOWN for row in family.rows)
    if total == 1:
        return capitalised(family.rows[0].verdict)
    if not shown:
        return capitalised(f"{DIFFERENCE_NOT_SHOWN} in any of {total} comparisons")
    if shown == total:
        return capitalised(f"{DIFFERENCE_SHOWN} in all {total} comparisons")
    return capitalised(f"{DIFFERENCE_SHOWN} in {shown} of {total} comparisons")


def _family_lines(basis: Basis, family: ComparisonFamily) -> list[Prose]:
    lines = [_estimate(basis, family)]
    shown = [item for item in family.rows if item.verdict == DIFFERENCE_SHOWN]
    if 0 < len(shown) < len(family.rows):
        names = [basis.label(item) for item in shown]
        lines.append(prose("shown: {names}", names=first_of(names, _how_many_named(names), "; ")))
    return lines


def _how_many_named(names: list[str]) -> int:
    """How many of `names` a card holds: at most four, as far as two lines go, and one in any case."""
    count = min(_MOST_NAMED, len(names))
    while count > 1 and len("; ".join(names[:count])) > _MOST_NAMED_CHARACTERS:
        count -= 1
    return count


def _foremost(family: ComparisonFamily) -> tuple[str, ComparisonRow]:
    """The comparison that a card names: the largest on the side that was asked about."""
    if family.alternative == "greater":
        return "highest", max(family.rows, key=lambda row: row.estimate)
    if family.alternative == "less":
        return "lowest", min(family.rows, key=lambda row: row.estimate)
    return "largest", max(family.rows, key=lambda row: abs(row.estimate))


def _estimate(basis: Basis, family: ComparisonFamily) -> Prose:
    which, row = _foremost(family)
    scale = basis.difference_scale
    estimate = scale.with_unit(scale.mean(row.estimate))
    if len(family.rows) == 1:
        lead = prose("difference {estimate}", estimate=estimate)
    else:
        lead = prose("{which}: {label} = {estimate}", which=which, label=basis.label(row), estimate=estimate)
    kind = "" if family.adjust == "none" else "adjusted "
    p = prose(kind + "*p*\u202f{p}", p=equals(adjusted_p(basis, row)))
    if row.ci is None:
        return prose("{lead}; {p}; no interval by this method", lead=lead, p=p)
    return prose(
        "{lead}, {kind} {interval}; {p}",
        lead=lead,
        kind=interval_kind(basis, family),
        interval=interval_words(scale, row.ci),
        p=p,
    )


def _family_caution(family: ComparisonFamily) -> str:
    shown = sum(row.verdict == DIFFERENCE_SHOWN for row in family.rows)
    if shown == len(family.rows):
        return CAUTION_SHOWN
    if shown:
        return CAUTION_MIXED
    return CAUTION_NOT_SHOWN if is_single_step(family) else CAUTION_NO_INTERVAL


_NO_DEVIATIONS = "this version records none; the laboratory’s own records apply"
_NO_EXCLUSIONS = "this version has no exclusions"


def summary(basis: Basis) -> tuple[SummaryLine, ...]:
    """The lines under the answers: data, checks, deviations, and what was asked for and is not reported."""
    unreported = len(basis.content.findings.not_reported)
    lines = [
        SummaryLine("Data", _data_line(basis), DATA, ANCHORS[DATA]),
        SummaryLine("Checks", _checks_line(basis), CHECKS, ANCHORS[CHECKS]),
        SummaryLine("Deviations", prose(_NO_DEVIATIONS), PLAN, ANCHORS[PLAN]),
    ]
    if unreported:
        words = prose(
            "{count} asked for and not reported, with the reason", count=counted(unreported, "result")
        )
        lines.append(SummaryLine("Not reported", words, NOT_REPORTED, ANCHORS[NOT_REPORTED]))
    return tuple(lines)


def _data_line(basis: Basis) -> Prose:
    sizes = {level.n for level in basis.levels}
    if len(sizes) == 1:
        each = prose("*n* = {n} at each of {k} levels", n=str(min(sizes)), k=str(len(basis.levels)))
    else:
        each = prose(
            "*n* from {low} to {high} at {k} levels",
            low=str(min(sizes)),
            high=str(max(sizes)),
            k=str(len(basis.levels)),
        )
    residual = basis.response.anova.residual_sd
    pooled: Prose = ()
    if residual is not None and residual.sign:
        scale = basis.difference_scale
        pooled = prose("; residual SD {sd}", sd=scale.with_unit(scale.spread(residual, residual)))
    return prose(
        "{total} received, 0 excluded, {total} analysed ({exclusions}); {each}{pooled}",
        total=str(basis.total),
        exclusions=_NO_EXCLUSIONS,
        each=each,
        pooled=pooled,
    )


def _checks_line(basis: Basis) -> Prose:
    checks = basis.response.checks
    if not checks:
        return prose("none planned; residual plots are shown")
    return joined([check_words(basis, check) for check in checks], "; ")
