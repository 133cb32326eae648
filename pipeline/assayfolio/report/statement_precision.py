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
            "of freedom.",
        ),
    ]
    if all(one.total_sd is None for one in found):
        return Method("Precision", tuple(blocks), ("iso5725",))
    blocks += _components()
    references = ["iso5725", "graybill-wang", "burdick-graybill", "satterthwaite"]
    if any(one.icc_method == "Wald" for one in found):
        references.append("wald")
    return Method("Precision", tuple(blocks), (*references, "gum"))


def _components() -> list[Block]:
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
            "Interval of the total: the modified large sample method of Graybill and Wang on the two mean "
            "squares; with unequal *n* it takes *n*_0_ in the place of *n*, which is one approximation more. "
            "Second interval: chi-square with Satterthwaite’s degrees of freedom.",
            "Intraclass correlation: max(0, *s*_L_²) / *s*²; its interval is from *F* = *MS*_B_ / *MS*_W_ "
            "with equal *n*, and Wald’s, by weights of the level means, with unequal *n*.",
            "Grand mean between levels: the mean of the level means, *u*² = their variance / *k* on *k* − 1 "
            "degrees of freedom, which is *MS*_B_ / *N* with equal *n*; pooled: *u*² = *SS*_T_ / (*N* (*N* − "
            "1)) on *N* − 1 (GUM H.5).",
            "Assumed: levels and values are independent and normally distributed, with the same "
            "repeatability at every level.",
        ),
    ]
