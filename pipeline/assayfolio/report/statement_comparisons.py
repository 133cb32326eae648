"""The method statement on comparisons of level means."""

from assayfolio.findings import ComparisonFamily
from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, Items, Paragraph
from assayfolio.report.methods import AdjustmentWords, adjustment_of
from assayfolio.report.prose import Words, prose
from assayfolio.report.statement_parts import Method, formula, sentences


def comparisons_method(bases: tuple[Basis, ...]) -> Method | None:
    """How a comparison is formed, and each adjustment in use; None where none is reported."""
    families = [family for basis in bases for family in basis.response.comparisons]
    if not families:
        return None
    separate = bases[0].is_separate
    methods = _methods(families)
    df: Words = prose("*ν*") if separate else prose("*N*−*k*")
    blocks: list[Block] = [*(_separate() if separate else _pooled())]
    blocks.append(Items(tuple(prose(method.rule, df=df) for method in methods)))
    references = [key for method in methods for key in method.references]
    if separate:
        references += ["welch1947", "satterthwaite"]
    if any(family.kind == "trend" for family in families):
        blocks.append(_trend())
        references.append("forsythe")
    blocks.append(
        Paragraph(
            prose(
                "Each family keeps its own error rate *α*; no rate is kept over several families together. "
                "All methods assume independent values and normal errors."
            )
        )
    )
    one_sided = {family.adjust for family in families if family.alternative != "two-sided"}
    if one_sided:
        blocks.append(Paragraph(prose(_one_sided(one_sided))))
    return Method("Comparisons", tuple(blocks), tuple(references))


def _methods(families: list[ComparisonFamily]) -> list[AdjustmentWords]:
    seen = {family.adjust: adjustment_of(family) for family in families}
    return list(seen.values())


def _one_sided(adjusts: set[str]) -> str:
    words = "In a one-sided family *p* is the tail on the side asked for"
    points = {"none", "bonferroni", "sidak"} & adjusts
    if points:
        words += ", *c* uses *α* in place of *α*/2"
    words += ", and the interval is open on the other side."
    if "dunnett" in adjusts:
        words += " With Dunnett’s method *c* is the point of max *T*_*i*_ at *α*, as stated there."
    return words


def _pooled() -> list[Block]:
    return [
        formula(
            "A comparison with weights *w*_*i*_ that sum to zero (1 and −1 for two levels)",
            "*d* = ∑_*i*_ *w*_*i*_ *ȳ*_*i*_, SE = *s* √(∑_*i*_ *w*_*i*_² / *n*_*i*_), *t* = *d* / SE, "
            "interval *d* ± *c* × SE",
        )
    ]


def _separate() -> list[Block]:
    return [
        formula(
            "A comparison with weights *w*_*i*_ that sum to zero (1 and −1 for two levels)",
            "*d* = ∑_*i*_ *w*_*i*_ *ȳ*_*i*_, SE² = ∑_*i*_ *w*_*i*_² *s*_*i*_² / *n*_*i*_, *t* = *d* / SE, "
            "interval *d* ± *c* × SE",
        ),
        formula(
            "Degrees of freedom of Welch and Satterthwaite",
            "*ν* = ",
            ("SE⁴", "∑_*i*_ (*w*_*i*_² *s*_*i*_² / *n*_*i*_)² / (*n*_*i*_ − 1)"),
        ),
    ]


def _trend() -> Block:
    return sentences(
        "Trend: with scores *x*_*i*_, equally spaced or not, and *n*_*i*_ values at level *i*, polynomials "
        "*P*_1_, *P*_2_, … with leading coefficient 1 are made orthogonal, ∑_*i*_ *n*_*i*_ "
        "*P*_*a*_(*x*_*i*_) *P*_*b*_(*x*_*i*_) = 0, in exact arithmetic; row *d* is the contrast with "
        "weights *n*_*i*_ *P*_*d*_(*x*_*i*_) / ∑_*j*_ *n*_*j*_ *P*_*d*_(*x*_*j*_)². The first is the slope "
        "of the straight line fitted to the means.",
    )
