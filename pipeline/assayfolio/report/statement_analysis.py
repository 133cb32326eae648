"""The method statement on the analysis of variance, tests of equal means, and effect sizes."""

from assayfolio.report.basis import Basis
from assayfolio.report.content import Block
from assayfolio.report.statement_parts import Method, formula, sentences

_DEVIATION = formula(
    "Interval for the standard deviation of a level",
    "*s*_*i*_ √((*n*_*i*_ − 1) / *χ*²), the points of *χ*² on *n*_*i*_ − 1 degrees of freedom",
)


def analysis_method(bases: tuple[Basis, ...]) -> Method:
    """Sums of squares, F, intervals of means; Welch's F and F* where variances are separate."""
    basis = bases[0]
    blocks: list[Block] = [
        formula(
            "Between levels, *k* − 1 degrees of freedom",
            "*SS*_B_ = ∑_*i*_ *n*_*i*_ (*ȳ*_*i*_ − *ȳ*)² = ∑_*i*_ ",
            ("*S*_*i*_²", "*n*_*i*_"),
            " − ",
            ("*S*²", "*N*"),
        ),
        formula(
            "Within levels, *N* − *k* degrees of freedom",
            "*SS*_W_ = ∑_*i*_ ∑_*j*_ (*y*_*ij*_ − *ȳ*_*i*_)² = ∑_*i*_ (*Q*_*i*_ − ",
            ("*S*_*i*_²", "*n*_*i*_"),
            ")",
        ),
        formula(
            "Variance ratio, residual standard deviation",
            "*F* = ",
            ("*SS*_B_ / (*k* − 1)", "*SS*_W_ / (*N* − *k*)"),
            ", *p* = P(*F*_*k*−1, *N*−*k*_ ≥ *F*), *s*² = ",
            ("*SS*_W_", "*N* − *k*"),
        ),
    ]
    if not basis.is_separate:
        mean = formula(
            "Interval for the mean of a level", "*ȳ*_*i*_ ± *t*_1−*α*/2; *N*−*k*_ ", ("*s*", "√*n*_*i*_")
        )
        return Method("Analysis of variance", (*blocks, mean, _DEVIATION), ())
    blocks.append(
        formula(
            "Interval for the mean of a level",
            "*ȳ*_*i*_ ± *t*_1−*α*/2_(*n*_*i*_ − 1) ",
            ("*s*_*i*_", "√*n*_*i*_"),
            ", *s*_*i*_² the variance of the values at level *i*",
        )
    )
    blocks.append(_DEVIATION)
    blocks += _separate_variances()
    references = ("welch1951", "brown-forsythe-means", "mehrotra", "satterthwaite")
    return Method("Analysis of variance", tuple(blocks), references)


def _separate_variances() -> list[Block]:
    return [
        formula(
            "Welch’s *F*",
            "*F*_W_ = ",
            ("∑_*i*_ *w*_*i*_ (*ȳ*_*i*_ − *ỹ*)² / (*k* − 1)", "1 + 2 (*k* − 2) *Λ* / (*k*² − 1)"),
            ", *w*_*i*_ = *n*_*i*_ / *s*_*i*_², *ỹ* = ∑_*i*_ *w*_*i*_ *ȳ*_*i*_ / *W*, *W* = ∑_*i*_ *w*_*i*_",
        ),
        formula(
            "its degrees of freedom, *k* − 1 and",
            "*ν*_2_ = ",
            ("*k*² − 1", "3 *Λ*"),
            ", *Λ* = ∑_*i*_ (1 − *w*_*i*_ / *W*)² / (*n*_*i*_ − 1)",
        ),
        formula(
            "Brown–Forsythe test of equal means (F*)",
            "*F*{star} = ",
            ("*SS*_B_", "∑_*i*_ *u*_*i*_"),
            ", *ν*_2_ = ",
            ("(∑_*i*_ *u*_*i*_)²", "∑_*i*_ *u*_*i*_² / (*n*_*i*_ − 1)"),
            ", *u*_*i*_ = (1 − *n*_*i*_ / *N*) *s*_*i*_²",
            star="*",
        ),
        sentences(
            "Brown and Forsythe take *k* − 1 for the first degrees of freedom; Mehrotra takes (∑ *u*_*i*_)² "
            "/ ((∑ *n*_*i*_ *s*_*i*_² / *N*)² + ∑ (1 − 2 *n*_*i*_ / *N*) *s*_*i*_⁴). The verdict follows the "
            "test that the plan names; that of Brown and Forsythe on *k* − 1. Both tests assume normal "
            "errors within each level and let the variances differ.",
        ),
    ]


def effects_method(bases: tuple[Basis, ...]) -> Method | None:
    """The effect sizes and the interval of Cohen's f; None where none is reported."""
    if all(basis.response.effect is None for basis in bases):
        return None
    blocks: tuple[Block, ...] = (
        formula(
            "Shares of variation, *SS*_T_ = *SS*_B_ + *SS*_W_",
            "*η*² = ",
            ("*SS*_B_", "*SS*_T_"),
            ", *ω*² = ",
            ("*SS*_B_ − (*k* − 1) *s*²", "*SS*_T_ + *s*²"),
            ", *ε*² = ",
            ("*SS*_B_ − (*k* − 1) *s*²", "*SS*_T_"),
        ),
        formula("Cohen’s *f*", "*f* = √(*η*² / (1 − *η*²)) = √(*SS*_B_ / *SS*_W_)"),
        sentences(
            "The interval of *f*: the noncentralities *λ* at which the noncentral *F* distribution with *k* "
            "− 1 and *N* − *k* degrees of freedom puts the observed *F* at its upper and lower points, "
            "turned into *f* = √(*λ* / *N*); an end that no *λ* reaches is 0 (Steiger).",
        ),
    )
    return Method("Effect sizes", blocks, ("hays", "kelley", "cohen", "steiger"))
