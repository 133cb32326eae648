"""Section 7: how everything was computed, with formulas and references."""

import re

from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, Formula, Heading, Items, Paragraph, Quotient, Section
from assayfolio.report.methods import REFERENCES, adjustment_of
from assayfolio.report.notation import NO_BREAK
from assayfolio.report.numbering import ANCHORS, METHOD
from assayfolio.report.prose import Prose, Span, prose
from assayfolio.report.wording import alpha_words

_INITIAL = re.compile(r"(?<=\b[A-ZŠ]\.) ")


def method_section(basis: Basis) -> Section:
    """The method statement: symbols, exact arithmetic, analysis, comparisons, checks, references."""
    blocks: list[Block] = [
        Paragraph(
            prose(
                "Symbols: *y*_*ij*_ is value *j* at level *i*, *n*_*i*_ the number of values at that level, "
                "*k* the number of levels, *N* the number of values; *S*_*i*_ and *Q*_*i*_ are the sum and "
                "the sum of squares of the values at level *i*, *S* the sum of all. *α* = {alpha}.",
                alpha=alpha_words(basis),
            )
        ),
        Paragraph(
            prose(
                "Values are taken as the exact decimals that were typed. Sums are exact; the sums of "
                "squares, mean squares, *F*, means and differences are exact fractions, rounded once, half "
                "to even, when they are printed. Distribution functions are computed in double precision, "
                "with small tail probabilities kept to relative accuracy."
            )
        ),
        *_analysis(),
        *_comparisons(basis),
        *_checks(basis),
        Heading(prose("References")),
        Items(tuple(_reference(REFERENCES[key]) for key in _references(basis))),
    ]
    return Section(ANCHORS[METHOD], METHOD, "Method", tuple(blocks))


def _formula(what: str, *parts: str | tuple[str, str]) -> Formula:
    """A formula from words and (above, below) quotients in turn."""
    laid: list[tuple[Prose, Quotient | None]] = []
    for part in parts:
        if isinstance(part, tuple):
            laid.append(((), Quotient(prose(part[0]), prose(part[1]))))
        else:
            laid.append((prose(part), None))
    return Formula(prose(what), tuple(laid))


def _reference(text: str) -> Prose:
    """A reference in which a name's initials are never broken."""
    return (Span(_INITIAL.sub(NO_BREAK, text)),)


def _analysis() -> list[Block]:
    return [
        Heading(prose("Analysis of variance")),
        _formula(
            "Between levels, *k* − 1 degrees of freedom",
            "*SS*_B_ = ∑_*i*_ *n*_*i*_ (*ȳ*_*i*_ − *ȳ*)² = ∑_*i*_ ",
            ("*S*_*i*_²", "*n*_*i*_"),
            " − ",
            ("*S*²", "*N*"),
        ),
        _formula(
            "Within levels, *N* − *k* degrees of freedom",
            "*SS*_W_ = ∑_*i*_ ∑_*j*_ (*y*_*ij*_ − *ȳ*_*i*_)² = ∑_*i*_ (*Q*_*i*_ − ",
            ("*S*_*i*_²", "*n*_*i*_"),
            ")",
        ),
        _formula(
            "Variance ratio, residual standard deviation",
            "*F* = ",
            ("*SS*_B_ / (*k* − 1)", "*SS*_W_ / (*N* − *k*)"),
            ", *p* = P(*F*_*k*−1, *N*−*k*_ ≥ *F*), *s*² = ",
            ("*SS*_W_", "*N* − *k*"),
        ),
        _formula(
            "Interval for the mean of a level",
            "*ȳ*_*i*_ ± *t*_1−*α*/2; *N*−*k*_ ",
            ("*s*", "√*n*_*i*_"),
        ),
    ]


def _comparisons(basis: Basis) -> list[Block]:
    families = basis.response.comparisons
    if not families:
        return []
    blocks: list[Block] = [
        Heading(prose("Comparisons")),
        _formula(
            "A comparison with weights *w*_*i*_ that sum to zero (1 and −1 for two levels)",
            "*d* = ∑_*i*_ *w*_*i*_ *ȳ*_*i*_, SE = *s* √(∑_*i*_ *w*_*i*_² / *n*_*i*_), *t* = *d* / SE, "
            "interval *d* ± *c* × SE",
        ),
    ]
    seen = list(dict.fromkeys(family.adjust for family in families))
    rules = [adjustment_of(next(item for item in families if item.adjust == key)).rule for key in seen]
    blocks.append(Items(tuple(prose(rule) for rule in rules)))
    if any(family.alternative != "two-sided" for family in families):
        blocks.append(
            Paragraph(
                prose(
                    "In a one-sided family *p* is the tail on the side asked for, *c* uses *α* in place of "
                    "*α*/2, and the interval is open on the other side."
                )
            )
        )
    return blocks


def _checks(basis: Basis) -> list[Block]:
    checks = basis.content.study.checks
    sentences = []
    if checks.equal_variances == "brown-forsythe":
        sentences.append(
            prose(
                "Brown–Forsythe: the *F* ratio of an analysis of variance of *z*_*ij*_ = |*y*_*ij*_ − "
                "median_*i*_|, with *k* − 1 and *N* − *k* degrees of freedom."
            )
        )
    if checks.normality == "shapiro-wilk":
        sentences.append(prose("Shapiro–Wilk: *W* of the *N* residuals with Royston’s approximation of *p*."))
    sentences.append(
        prose(
            "Normal plot: residuals in rising order against normal quantiles at (*i* − 3/8) / (*N* + 1/4) "
            "(Blom); the envelope is the line ± *z*_1−*α*/2_ standard errors of an order statistic "
            "(Chambers and others). Ticks of axes by Heckbert’s rule."
        )
    )
    return [Heading(prose("Checks and figures")), Items(tuple(sentences))]


def _references(basis: Basis) -> list[str]:
    keys = ["scheffe", "iso3534"]
    for family in basis.response.comparisons:
        keys += adjustment_of(family).references
    checks = basis.content.study.checks
    if checks.equal_variances == "brown-forsythe":
        keys.append("brown-forsythe")
    if checks.normality == "shapiro-wilk":
        keys += ["shapiro-wilk", "royston"]
    return list(dict.fromkeys([*keys, "blom", "chambers", "heckbert"]))
