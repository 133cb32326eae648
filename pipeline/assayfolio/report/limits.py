"""Values that were reported as beyond a limit: how many, and what each way of taking them would give."""

from fractions import Fraction

from assayfolio.errors import RenderingError
from assayfolio.findings_intake import CensoredLevel, CensoringFindings, PolicyFindings
from assayfolio.report.agreement import agreement_words, policy_verdicts
from assayfolio.report.alternatives import Side, by_analysis, side_by_side
from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, Heading, Paragraph, Section, TableBlock
from assayfolio.report.notation import decimal, probability, three_digits
from assayfolio.report.numbering import Numbering, Part
from assayfolio.report.prose import Prose, Words, prose
from assayfolio.report.tables import Column, Table, lay_out
from assayfolio.report.wording import BLANK, counted, first_of, is_adjusted, row_verdict

BELOW_WORDS = {"omit": "omitted", "half-limit": "half the limit", "limit": "the limit"}
TAKEN = {"omit": "omitted", "half-limit": "analysed as half the limit", "limit": "analysed as the limit"}
_MOST_LIMITS = 6


def limits_section(basis: Basis, numbering: Numbering) -> Section:
    """The counts by level with their limits, then the results under each policy.

    Raises RenderingError where the response has no value beyond a limit.
    """
    place = basis.place(Part.LIMITS)
    found = basis.response.censoring
    if found is None:
        raise RenderingError(f"no value of {basis.response.response} lies beyond a limit")
    blocks: list[Block] = [
        Paragraph(_what(basis, found)),
        TableBlock(_counts_table(basis, found, numbering)),
    ]
    if found.sensitivity:
        blocks.append(Heading(prose("Results under each way of taking values below a limit")))
        blocks.append(Paragraph(policy_agreement(basis, found)))
        blocks += [TableBlock(table) for table in _sensitivity(basis, found, numbering)]
        if len(found.sensitivity) < len(BELOW_WORDS):
            number = str(basis.place(Part.NOT_REPORTED).number)
            words = "A way that is not shown cannot be given; section {number} has the reason."
            blocks.append(Paragraph(prose(words, number=number), "note"))
    return Section(place.anchor, place.number, basis.title("Values beyond a limit"), tuple(blocks))


def beyond_words(found: CensoringFindings) -> str:
    """How many values lie below and above a limit, and what the plan makes of them."""
    sides = ((found.below, "below", found.below_limit), (found.above, "above", found.above_limit))
    parts = [
        f"{counted(count, 'value')} {side} a limit, {TAKEN[policy]}" for count, side, policy in sides if count
    ]
    return "; ".join(parts)


def policy_agreement(basis: Basis, found: CensoringFindings) -> Prose:
    """Whether the verdicts are the same under each policy."""
    return agreement_words(
        {policy_name(one): policy_verdicts(basis, one) for one in found.sensitivity},
        "Under each of these ways the following are the same",
        "The ways of taking values below a limit come to different verdicts",
    )


def _what(basis: Basis, found: CensoringFindings) -> Prose:
    return prose(
        "Received for {response}: #{beyond}#, as planned. Where such a value truly lies is not known: "
        "omitting it shifts the mean of its level, and putting one number in for several makes their spread "
        "too small.",
        response=basis.response.response,
        beyond=beyond_words(found),
    )


def _counts_table(basis: Basis, found: CensoringFindings, numbering: Numbering) -> Table:
    unit = basis.response.unit or ""
    columns = [
        Column("Level", kind="text"),
        Column("Received"),
        *([Column("Below a limit"), Column("Limits", unit, "text")] if found.below else []),
        *([Column("Above a limit"), Column("Limits", unit, "text")] if found.above else []),
    ]

    def cells(level: CensoredLevel) -> list[Words]:
        below: list[Words] = [str(level.below), _limits(level.below_limits)] if found.below else []
        above: list[Words] = [str(level.above), _limits(level.above_limits)] if found.above else []
        return [level.level, str(level.received), *below, *above]

    rows = [cells(level) for level in found.levels]
    without = len(basis.levels) - len(found.levels)
    notes: list[Words] = []
    if without:
        notes.append(f"The other {counted(without, 'level has', 'levels have')} no value beyond a limit.")
    notes.append("Excluded values do not count here; repeats count one by one.")
    caption = prose("Values of {response} beyond a limit.", response=basis.response.response)
    return lay_out(numbering.table(), caption, columns, rows, notes)


def _limits(limits: tuple[Fraction, ...]) -> str:
    return first_of([decimal(limit) for limit in limits], _MOST_LIMITS, "; ") or BLANK


def policy_name(found: PolicyFindings) -> str:
    """What a policy makes of a value below a limit; the planned one is marked."""
    return BELOW_WORDS[found.policy] + (" (planned)" if found.planned else "")


def _sensitivity(basis: Basis, found: CensoringFindings, numbering: Numbering) -> list[Table]:
    policies = found.sensitivity
    means = [
        Side(policy_name(one), {level: [str(n), basis.scale.mean(mean)] for level, n, mean in one.levels})
        for one in policies
    ]
    columns = [Column(prose("*n*")), Column("Mean", basis.scale.heading)]
    tables = [
        side_by_side(numbering, prose("Level means under each way."), "Level", columns, means),
        _overall_table(basis, policies, numbering),
    ]
    names = dict.fromkeys(family.name for one in policies for family in one.comparisons)
    tables += [_family_table(basis, policies, name, numbering) for name in names]
    claims = dict.fromkeys(family.name for one in policies for family in one.equivalence)
    tables += [_claim_table(basis, policies, name, numbering) for name in claims]
    if any(one.spread is not None for one in policies):
        tables.append(_spread_table(policies, numbering))
    return tables


def _overall_table(basis: Basis, policies: tuple[PolicyFindings, ...], numbering: Numbering) -> Table:
    alpha = basis.response.alpha
    adjusted = any(one.p != one.p_adjusted for one in policies)

    def cells(one: PolicyFindings) -> list[Words]:
        values: list[Words] = [BLANK if one.p is None else probability(one.p, alpha)]
        if adjusted:
            values.append(BLANK if one.p_adjusted is None else probability(one.p_adjusted, alpha))
        return [*values, one.verdict]

    columns = [
        Column(prose("*p*")),
        *([Column(prose("Adjusted *p*"))] if adjusted else []),
        Column("Verdict", kind="words"),
    ]
    caption = prose("Overall test under each way, {response}.", response=basis.response.response)
    return by_analysis(numbering, caption, columns, [(policy_name(one), cells(one)) for one in policies])


def _family_table(
    basis: Basis, policies: tuple[PolicyFindings, ...], name: str, numbering: Numbering
) -> Table:
    scale = basis.difference_scale
    alpha = basis.response.alpha
    planned = [family for family in basis.response.comparisons if family.name == name]
    trend = any(family.kind == "trend" for family in planned)
    adjusted = not planned or any(map(is_adjusted, planned))

    def cells(one: PolicyFindings) -> dict[str, list[Words]]:
        return {
            basis.label(row): [
                three_digits(row.estimate) if trend else scale.mean(row.estimate),
                probability(row.p_adjusted, alpha),
                row_verdict(row.verdict),
            ]
            for family in one.comparisons
            if family.name == name
            for row in family.rows
        }

    columns = [
        Column("Estimate", "" if trend else scale.heading),
        Column(prose("Adjusted *p*" if adjusted else "*p*")),
        Column("Difference", kind="words"),
    ]
    sides = [Side(policy_name(one), cells(one)) for one in policies]
    caption = prose("Comparisons under each way, {name}.", name=name)
    return side_by_side(numbering, caption, "Comparison", columns, sides)


def _claim_table(
    basis: Basis, policies: tuple[PolicyFindings, ...], name: str, numbering: Numbering
) -> Table:
    scale = basis.difference_scale
    percent = any(claim.name == name and claim.scale == "percent" for claim in basis.response.equivalence)

    def cells(one: PolicyFindings) -> dict[str, list[Words]]:
        return {
            basis.label(row): [
                three_digits(row.estimate) if percent else scale.mean(row.estimate),
                probability(row.p_adjusted, basis.response.alpha),
                row_verdict(row.verdict),
            ]
            for family in one.equivalence
            if family.name == name
            for row in family.rows
        }

    columns = [
        Column("Estimate", "%" if percent else scale.heading),
        Column(prose("Adjusted *p*")),
        Column("Equivalence", kind="words"),
    ]
    sides = [Side(policy_name(one), cells(one)) for one in policies]
    caption = prose("Equivalence under each way, {name}.", name=name)
    return side_by_side(numbering, caption, "Comparison", columns, sides)


def _spread_table(policies: tuple[PolicyFindings, ...], numbering: Numbering) -> Table:
    def cells(one: PolicyFindings) -> dict[str, list[Words]]:
        rows = () if one.spread is None else one.spread.rows
        return {row.label: [three_digits(row.estimate), row_verdict(row.verdict)] for row in rows}

    columns = [Column("Ratio"), Column("Difference", kind="words")]
    sides = [Side(policy_name(one), cells(one)) for one in policies]
    return side_by_side(numbering, prose("Variances under each way."), "Comparison", columns, sides)
