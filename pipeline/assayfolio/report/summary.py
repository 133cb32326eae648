"""The lines under the answers: data, criteria, checks, outlier proposals, deviations, what is not reported.

Here the first page says what must not be missed, wherever the card of the question itself stands.
"""

from assayfolio.findings import CRITERION_MET, NOT_ASSESSABLE, CheckFindings
from assayfolio.report.agreement import policy_verdicts, short_agreement, verdicts_of
from assayfolio.report.basis import Basis
from assayfolio.report.content import SummaryLine
from assayfolio.report.counts import counts_words
from assayfolio.report.criteria import criteria_count, criterion_phrase
from assayfolio.report.deviations import deviations_line
from assayfolio.report.exclusions import exclusions_of
from assayfolio.report.limits import beyond_words
from assayfolio.report.numbering import Part
from assayfolio.report.outliers import proposals_words
from assayfolio.report.prose import Prose, joined, prose
from assayfolio.report.wording import (
    check_words,
    counted,
    departs,
    first_of,
    is_unassumed,
    p_words,
    short_check_name,
    spread_of,
)

_FEW_CHECKS = 2
_MOST_NAMED = 3


def summary(bases: tuple[Basis, ...]) -> tuple[SummaryLine, ...]:
    """One line each for data, checks, deviations; for proposals and gaps where the report has them."""
    first = bases[0]
    lines = [_line(first, "Data", _data_words(bases), Part.DATA)]
    lines += _intake_lines(bases)
    with_criteria = [basis for basis in bases if basis.response.criteria]
    if with_criteria:
        place = _first_of_interest(with_criteria)
        lines.append(_line(place, "Criteria", _criteria_words(with_criteria), Part.CRITERIA))
    lines.append(_line(first, "Checks", _checks_words(bases), Part.CHECKS))
    if first.outline.has(Part.OUTLIERS):
        lines.append(_line(first, "Outliers", _proposals_words(bases), Part.OUTLIERS))
    where = Part.DEVIATIONS if first.content.findings.deviations else Part.PLAN
    lines.append(_line(first, "Deviations", deviations_line(first), where))
    if first.content.findings.not_reported:
        lines.append(_line(first, "Not reported", _unreported_words(first), Part.NOT_REPORTED))
    return tuple(lines)


def _first_of_interest(bases: list[Basis]) -> Basis:
    """The first response with a criterion that is not met or not assessable, else the first of all."""
    for basis in bases:
        if any(one.verdict != CRITERION_MET for one in basis.response.criteria):
            return basis
    return bases[0]


def _criteria_words(bases: list[Basis]) -> Prose:
    """How many limits are not met or not assessable, and which."""
    found = [(basis, one) for basis in bases for one in basis.response.criteria]
    count = criteria_count([one for _, one in found])
    amiss = [pair for pair in found if pair[1].verdict != CRITERION_MET]
    if not amiss:
        return prose("{count}", count=count)
    amiss.sort(key=lambda pair: pair[1].verdict == NOT_ASSESSABLE)
    named = [criterion_phrase(basis, one) for basis, one in amiss[:_MOST_NAMED]]
    rest = len(amiss) - len(named)
    return prose(
        "#{count}#: {named}{more}",
        count=count,
        named=joined(named, "; "),
        more=f"; and {rest} more" if rest else "",
    )


def _unreported_words(basis: Basis) -> Prose:
    missing = basis.content.findings.not_reported
    names = [
        f"{item.response}, {item.what}" if basis.several and item.response is not None else item.what
        for item in missing
    ]
    return prose(
        "{count} asked for and not reported, with the reason: {names}",
        count=counted(len(missing), "result"),
        names=first_of(names, _MOST_NAMED, "; "),
    )


def _line(basis: Basis, what: str, words: Prose, part: Part) -> SummaryLine:
    place = basis.place(part)
    return SummaryLine(what, words, place.number, place.anchor)


def _data_words(bases: tuple[Basis, ...]) -> Prose:
    basis = bases[0]
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
    pooled: list[Prose] = []
    for one in bases:
        residual = one.response.anova.residual_sd
        if residual is not None and residual.sign and not one.is_separate:
            of = f" of {one.response.response}" if one.several else ""
            pooled.append(prose("residual SD{of} {sd}", of=of, sd=spread_of(one.difference_scale, residual)))
    return prose(
        "{counts}; {each}{pooled}",
        counts=_counts(bases),
        each=each,
        pooled=tuple(span for words in pooled[:_MOST_NAMED] for span in (*prose("; "), *words)),
    )


def _counts(bases: tuple[Basis, ...]) -> str:
    """The counts from received to analysed: once where all responses have the same, else for each."""
    if len(bases) == 1:
        return counts_words(bases[0])
    if len({counts_words(one) for one in bases}) == 1:
        return f"{counts_words(bases[0])} of each of {len(bases)} responses"
    each = [f"{one.response.response}: {counts_words(one)}" for one in bases]
    return first_of(each, _MOST_NAMED, "; ")


def _intake_lines(bases: tuple[Basis, ...]) -> list[SummaryLine]:
    """What was excluded and what lies beyond a limit, with whether that bears on any verdict."""
    lines = []
    changed = [one for one in bases if one.response.without_exclusions is not None]
    if changed:
        lines.append(_line(changed[0], "Exclusions", _exclusions_words(changed), Part.EXCLUSIONS))
    beyond = [one for one in bases if one.response.censoring is not None]
    if beyond:
        lines.append(_line(beyond[0], "Limits", _limits_words(beyond), Part.LIMITS))
    return lines


def _exclusions_words(bases: list[Basis]) -> Prose:
    count = sum(len(exclusions_of(one)) for one in bases)
    parts = []
    for one in bases:
        without = one.response.without_exclusions
        if without is not None:
            verdicts = [verdicts_of(one, one.response), verdicts_of(one, without)]
            of = f"{one.response.response}: " if one.several else ""
            parts.append(prose("{of}{words}", of=of, words=short_agreement(verdicts, _MOST_NAMED)))
    return prose(
        "{count}, {each} reason; with and without {them} {parts}",
        count=counted(count, "value excluded", "values excluded"),
        each="with its" if count == 1 else "each with its",
        them="it" if count == 1 else "them",
        parts=joined(parts[:_MOST_NAMED], "; "),
    )


def _limits_words(bases: list[Basis]) -> Prose:
    parts = []
    for one in bases:
        found = one.response.censoring
        if found is None:
            continue
        of = f"{one.response.response}: " if one.several else ""
        words = prose("{of}{beyond}", of=of, beyond=beyond_words(found))
        if len(found.sensitivity) > 1:
            verdicts = [policy_verdicts(one, policy) for policy in found.sensitivity]
            words += prose(
                "; under each way of taking them {words}", words=short_agreement(verdicts, _MOST_NAMED)
            )
        parts.append(words)
    return joined(parts[:_MOST_NAMED], "; ")


def _checks_words(bases: tuple[Basis, ...]) -> Prose:
    all_checks = [(basis, check) for basis in bases for check in basis.response.checks]
    if not all_checks:
        return prose("none planned; residual plots are shown")
    words = _what_checks_found(bases, all_checks)
    if any(is_unassumed(basis, check) for basis, check in all_checks):
        words += prose("; equal variances are not assumed")
    return words


def _what_checks_found(bases: tuple[Basis, ...], all_checks: list[tuple[Basis, CheckFindings]]) -> Prose:
    if len(all_checks) <= _FEW_CHECKS and len(bases) == 1:
        return joined([check_words(basis, check) for basis, check in all_checks], "; ")
    departures = [
        prose(
            "{of}{name} ({p})",
            of=f"{basis.response.response}, " if basis.several else "",
            name=short_check_name(check),
            p=p_words(basis, check.p),
        )
        for basis, check in all_checks
        if check.p is not None and departs(basis, check)
    ]
    tested = sum(check.p is not None for _, check in all_checks)
    if not tested:
        return prose("none of the {count} can be assessed", count=counted(len(all_checks), "check"))
    if not departures:
        return prose("{count}; none shows a departure", count=counted(tested, "check"))
    rest = len(departures) - _MOST_NAMED
    more = prose(f" and {rest} more") if rest > 0 else ()
    return prose(
        "{count}; a departure is shown by {names}{more}",
        count=counted(tested, "check"),
        names=joined(departures[:_MOST_NAMED], "; "),
        more=more,
    )


def _proposals_words(bases: tuple[Basis, ...]) -> Prose:
    parts = []
    for basis in bases:
        of = f"{basis.response.response}: " if basis.several else ""
        words = proposals_words(basis.response.outliers)
        parts.append(of + words[:1].lower() + words[1:])
    return prose("{words}; nothing was removed", words=first_of(parts, _MOST_NAMED, "; "))
