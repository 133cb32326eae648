"""How everything was computed, with formulas and references: only what this report uses."""

import re

from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, Heading, Items, Paragraph, Section
from assayfolio.report.notation import NO_BREAK
from assayfolio.report.numbering import Part
from assayfolio.report.prose import Prose, Span, prose
from assayfolio.report.references import REFERENCES
from assayfolio.report.statement_analysis import analysis_method, effects_method
from assayfolio.report.statement_beyond import (
    across_method,
    equivalence_method,
    power_method,
    spread_method,
)
from assayfolio.report.statement_checks import checks_method, outliers_method
from assayfolio.report.statement_comparisons import comparisons_method
from assayfolio.report.statement_intake import intake_method
from assayfolio.report.statement_parts import Method
from assayfolio.report.statement_precision import precision_method
from assayfolio.report.wording import alpha_words

_INITIAL = re.compile(r"(?<=\b[A-ZŠ]\.) ")
_ALWAYS = ("scheffe", "iso3534")
_LAST = ("blom", "chambers", "heckbert")


def method_section(bases: tuple[Basis, ...]) -> Section:
    """The method statement: symbols, exact arithmetic, each procedure in use, references."""
    place = bases[0].place(Part.METHOD)
    methods = methods_of(bases)
    keys = [*_ALWAYS, *(key for method in methods for key in method.references), *_LAST]
    blocks: list[Block] = [
        Paragraph(
            prose(
                "Symbols: *y*_*ij*_ is value *j* at level *i*, *n*_*i*_ the number of values at that level, "
                "*k* the number of levels, *N* the number of values; *S*_*i*_ and *Q*_*i*_ are the sum and "
                "the sum of squares of the values at level *i*, *S* the sum of all. *α* = {alpha}.",
                alpha=alpha_words(bases[0]),
            )
        ),
        Paragraph(
            prose(
                "Numbers are taken as the exact decimals that were typed. Sums are exact; the sums of "
                "squares, mean squares, *F*, means and differences are exact fractions, rounded once, half "
                "to even, when they are printed. Distribution functions are computed in double precision, "
                "with small tail probabilities kept to relative accuracy."
            )
        ),
    ]
    for method in methods:
        blocks += [Heading(prose(method.title)), *method.blocks]
    blocks += [
        Heading(prose("References")),
        Items(tuple(_reference(REFERENCES[key]) for key in dict.fromkeys(keys))),
    ]
    return Section(place.anchor, place.number, "Method", tuple(blocks))


def methods_of(bases: tuple[Basis, ...]) -> list[Method]:
    """The procedures in use, in the order of the report."""
    made = (
        intake_method(bases),
        analysis_method(bases),
        effects_method(bases),
        comparisons_method(bases),
        equivalence_method(bases),
        spread_method(bases),
        precision_method(bases),
        across_method(bases),
        outliers_method(bases),
        checks_method(bases),
        power_method(bases),
    )
    return [method for method in made if method is not None]


def _reference(text: str) -> Prose:
    """A reference in which a name's initials are never broken."""
    return (Span(_INITIAL.sub(NO_BREAK, text)),)
