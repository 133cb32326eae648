"""The method statement on precision from a one-way layout."""

from assayfolio.report.basis import Basis
from assayfolio.report.content import Block
from assayfolio.report.statement_parts import Method, formula, sentences


def precision_method(bases: tuple[Basis, ...]) -> Method | None:
    """Components of variance, their intervals, limits and the grand mean; None where not reported."""
    found = [basis.response.precision for basis in bases if basis.response.precision is not None]
    if not found:
        return None
    blocks: list[Block] = [
        formula(
            "Repeatability",
            "*s*_r_² = *MS*_W_ = ",
            ("*SS*_W_", "*N* − *k*"),
            ", limit 2.8 *s*_r_",
        ),
        sentences(
            "Interval of the repeatability: √(*SS*_W_ / *χ*²) with the points of *χ*² on *N* − *k* degrees "
            "of freedom at 1 − *γ*/2 and *γ*/2; here and below *γ* is 1 minus the confidence of the "
            "intervals of the precision.",
            "Limit: 1.96 √2 = 2.77 standard deviations, rounded to 2.8 as is common (ISO 5725-6); two single "
            "values differ by no more in about 95 % of cases.",
        ),
    ]
    if all(one.total_sd is None for one in found):
        return Method("Precision", tuple(blocks), ("iso5725",))
    blocks += _components(wald=any(one.icc_method == "Wald" for one in found))
    references = ["iso5725", "williams", "tukey1951", "graybill-wang", "burdick-graybill", "satterthwaite"]
    if any(one.icc_method == "Wald" for one in found):
        references += ["wald", "thomas-hultquist"]
    return Method("Precision", tuple(blocks), (*references, "gum"))


def _components(*, wald: bool) -> list[Block]:
    return [
        formula(
            "Between levels",
            "*s*_L_² = ",
            ("*MS*_B_ − *MS*_W_", "*n*_0_"),
            ", *n*_0_ = ",
            ("*N* − ∑_*i*_ *n*_*i*_² / *N*", "*k* − 1"),
        ),
        formula("Total", "*s*² = *s*_r_² + max(0, *s*_L_²) = *MS*_B_ / *n*_0_ + (1 − 1/*n*_0_) *MS*_W_"),
        sentences(
            "Where *MS*_B_ is below *MS*_W_ the estimated *s*_L_² is negative: it is shown as it is and "
            "reported as 0, and the total is then *s*_r_².",
            "Reported interval of the total: the modified large sample method of Graybill and Wang on the "
            "two mean squares; with unequal *n* it takes *n*_0_ in the place of *n*, which is one "
            "approximation more. Second interval: chi-square with Satterthwaite’s degrees of freedom.",
        ),
        *_interval_between(),
        *_intervals_of_total(),
        *_intraclass(wald=wald),
        sentences(
            "Grand mean between levels: the mean of the level means, *u*² = their variance / *k* on *k* − 1 "
            "degrees of freedom, which is *MS*_B_ / *N* with equal *n*; pooled: *u*² = *SS*_T_ / (*N* (*N* − "
            "1)) on *N* − 1 (GUM H.5).",
            "Assumed: levels and values are independent and normally distributed, with the same "
            "repeatability at every level.",
        ),
    ]


def _interval_between() -> list[Block]:
    return [
        formula(
            "Interval of *s*_L_², *v* the variance of the level means, *ñ* the harmonic mean of the *n*_*i*_",
            ("(*k* − 1) (*v* − *F*_1−*γ*/2_ *MS*_W_ / *ñ*)", "*χ*²_1−*γ*/2;\u00a0*k*−1_"),
            " to ",
            ("(*k* − 1) (*v* − *F*_*γ*/2_ *MS*_W_ / *ñ*)", "*χ*²_*γ*/2;\u00a0*k*−1_"),
            ", *F* on *k* − 1 and *N* − *k*",
        ),
        sentences(
            "With equal *n* it is the interval of Williams and Tukey, *v* = *MS*_B_ / *n*; with unequal *n* "
            "it is that of Thomas and Hultquist on the level means without weights, and may leave out "
            "*s*_L_. Ends below zero are given as 0.",
        ),
    ]


def _intervals_of_total() -> list[Block]:
    return [
        formula(
            "Graybill and Wang, *V* = *B* + *W*, *B* = *MS*_B_ / *n*_0_, *W* = (1 − 1/*n*_0_) *MS*_W_",
            "√(*V* − √(*G*_B_² *B*² + *G*_W_² *W*²)) to √(*V* + √(*H*_B_² *B*² + *H*_W_² *W*²)), "
            "*G* = 1 − *ν* / *χ*²_1−*γ*/2;\u00a0*ν*_, *H* = *ν* / *χ*²_*γ*/2;\u00a0*ν*_ − 1, "
            "*ν*_B_ = *k* − 1, *ν*_W_ = *N* − *k*",
        ),
        formula(
            "Satterthwaite",
            "*s* √(*ν* / *χ*²_1−*γ*/2;\u00a0*ν*_) to *s* √(*ν* / *χ*²_*γ*/2;\u00a0*ν*_), *ν* = ",
            ("*V*²", "*B*² / (*k* − 1) + *W*² / (*N* − *k*)"),
            ", or *N* − *k* where *s*_L_² is reported as 0",
        ),
    ]


def _intraclass(*, wald: bool) -> list[Block]:
    what = sentences(
        "Intraclass correlation: max(0, *s*_L_²) / *s*²; its interval is from *F* = *MS*_B_ / *MS*_W_ "
        "with equal *n*, and Wald’s, by weights of the level means, with unequal *n*; an end below zero is "
        "given as 0."
    )
    if not wald:
        limits = formula(
            "Limits from *F*, *a* = *F* / *F*_1−*γ*/2_(*k* − 1, *N* − *k*), *b* = *F* × *F*_1−*γ*/2_(*N* − "
            "*k*, *k* − 1)",
            ("*a* − 1", "*a* − 1 + *n*"),
            " to ",
            ("*b* − 1", "*b* − 1 + *n*"),
        )
        return [what, limits]
    limits = formula(
        "Wald’s limits *ρ* / (1 + *ρ*), for the two *ρ* with",
        ("∑_*i*_ *w*_*i*_ (*ȳ*_*i*_ − *ỹ*)²", "(*k* − 1) *MS*_W_"),
        " = *F*_1−*γ*/2_ and *F*_*γ*/2_(*k* − 1, *N* − *k*), *w*_*i*_ = *n*_*i*_ / (1 + *ρ* *n*_*i*_), "
        "*ỹ* = ∑_*i*_ *w*_*i*_ *ȳ*_*i*_ / ∑_*i*_ *w*_*i*_",
    )
    return [what, limits]
