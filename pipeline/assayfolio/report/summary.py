"""The lines under the answers: data, checks, outlier proposals, deviations, and what is not reported."""

from assayfolio.report.basis import Basis
from assayfolio.report.content import SummaryLine
from assayfolio.report.numbering import Part
from assayfolio.report.outliers import proposals_words
from assayfolio.report.prose import Prose, joined, prose
from assayfolio.report.wording import (
    check_words,
    counted,
    departs,
    first_of,
    p_words,
    short_check_name,
    spread_of,
)

_NO_DEVIATIONS = "this version records none; the laboratory’s own records apply"
_NO_EXCLUSIONS = "this version has no exclusions"
_FEW_CHECKS = 2
_MOST_NAMED = 3


def summary(bases: tuple[Basis, ...]) -> tuple[SummaryLine, ...]:
    """One line each for data, checks, deviations; for proposals and gaps where the report has them."""
    first = bases[0]
    unreported = len(first.content.findings.not_reported)
    lines = [
        _line(first, "Data", _data_words(bases), Part.DATA),
        _line(first, "Checks", _checks_words(bases), Part.CHECKS),
    ]
    if first.outline.has(Part.OUTLIERS):
        lines.append(_line(first, "Outliers", _proposals_words(bases), Part.OUTLIERS))
    lines.append(_line(first, "Deviations", prose(_NO_DEVIATIONS), Part.PLAN))
    if unreported:
        words = prose(
            "{count} asked for and not reported, with the reason", count=counted(unreported, "result")
        )
        lines.append(_line(first, "Not reported", words, Part.NOT_REPORTED))
    return tuple(lines)


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
        if residual is not None and residual.sign:
            of = f" of {one.response.response}" if one.several else ""
            pooled.append(prose("residual SD{of} {sd}", of=of, sd=spread_of(one.difference_scale, residual)))
    return prose(
        "{total} received{of_each}, 0 excluded, {total} analysed ({exclusions}); {each}{pooled}",
        total=str(basis.total),
        of_each=f" of each of {len(bases)} responses" if basis.several else "",
        exclusions=_NO_EXCLUSIONS,
        each=each,
        pooled=tuple(span for words in pooled[:_MOST_NAMED] for span in (*prose("; "), *words)),
    )


def _checks_words(bases: tuple[Basis, ...]) -> Prose:
    all_checks = [(basis, check) for basis in bases for check in basis.response.checks]
    if not all_checks:
        return prose("none planned; residual plots are shown")
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
