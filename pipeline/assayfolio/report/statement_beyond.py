"""The method statement on equivalence, spread, precision, several responses and power."""

from collections.abc import Iterable

from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, Formula
from assayfolio.report.methods import ADJUSTMENTS
from assayfolio.report.statement_parts import Method, formula, sentences
from assayfolio.study.plan import EquivalencePlan


def equivalence_method(bases: tuple[Basis, ...]) -> Method | None:
    """Two one-sided tests, percent margins, non-inferiority, as far as planned."""
    plans = bases[0].study.equivalence
    if not plans:
        return None
    separate = bases[0].is_separate
    blocks: list[Block] = []
    references = ["schuirmann"]
    if any(not plan.percent for plan in plans):
        blocks.append(_margins_in_units(separate=separate))
    if any(plan.percent for plan in plans):
        blocks += _margins_in_percent(separate=separate)
        references.append("fieller")
    blocks.append(sentences(*_rules(plans)))
    if separate:
        references += ["welch1947", "satterthwaite"]
    keys = [key for plan in plans for key in ADJUSTMENTS[plan.adjust].references]
    return Method("Equivalence", tuple(blocks), (*references, *keys))


def _margins_in_units(*, separate: bool) -> Formula:
    df = "*ν*" if separate else "*N*−*k*"
    error = "SE, *ν* as in a comparison" if separate else "SE = *s* √(1/*n*_X_ + 1/*n*_R_)"
    return formula(
        "Margins *δ*_L_ < *δ*_U_ in units, *d* = *ȳ*_X_ − *ȳ*_R_",
        f"*p*_L_ = P(*t*_{df}_ ≥ ",
        ("*d* − *δ*_L_", "SE"),
        f"), *p*_U_ = P(*t*_{df}_ ≤ ",
        ("*d* − *δ*_U_", "SE"),
        f"), {error}",
    )


def _margins_in_percent(*, separate: bool) -> list[Block]:
    error = "*v*_X_ = *s*_X_² / *n*_X_" if separate else "*v*_X_ = *s*² / *n*_X_"
    return [
        formula(
            "Margins *θ* in percent of the reference mean",
            "*t* = ",
            ("*ȳ*_X_ − (1 + *θ*/100) *ȳ*_R_", "√(*v*_X_ + (1 + *θ*/100)² *v*_R_)"),
            f", {error}, likewise *v*_R_",
        ),
        sentences(
            "The interval in percent is Fieller’s for the ratio of the two means; it does not exist where "
            "the reference mean cannot be told from zero, and such a family is not reported. The estimate is "
            "100 (*ȳ*_X_ / *ȳ*_R_ − 1).",
        ),
    ]


def _rules(plans: Iterable[EquivalencePlan]) -> list[str]:
    rules = []
    if any(not plan.non_inferiority for plan in plans):
        rules.append(
            "Equivalence (two one-sided tests): *p* is the larger of the two, each test at level *α*; no "
            "adjustment is needed for their number. The interval has confidence 1 − 2*α*: it lies inside the "
            "margins where both *p* are at most *α*."
        )
    if any(plan.non_inferiority for plan in plans):
        rules.append(
            "Non-inferiority: the one test on the side of the margin, with the one-sided bound at confidence "
            "1 − *α*."
        )
    used = {plan.adjust for plan in plans}
    if "bonferroni" in used:
        rules.append(
            "Bonferroni over the *m* comparisons of a family: *p* is multiplied by *m*, at most 1, and the "
            "interval uses *α*/*m*."
        )
    if "holm" in used:
        rules.append(
            "Holm over the *m* comparisons of a family: the adjusted *p* in place *i* of the rising order is "
            "the largest of min(1, (*m* − *j* + 1) × *p*_(*j*)_) over *j* ≤ *i*; the intervals are each for "
            "its own comparison."
        )
    rules.append("Each family keeps its own error rate, and none is kept together with tests of differences.")
    return rules


def spread_method(bases: tuple[Basis, ...]) -> Method | None:
    """The ratio of two variances; None where it is not planned."""
    plan = bases[0].study.spread
    if plan is None:
        return None
    blocks: tuple[Block, ...] = (
        formula(
            "Ratio of variances to the reference R",
            "*F* = ",
            ("*s*_X_²", "*s*_R_²"),
            ", interval from ",
            ("*F*", "*F*_1−*α*/2_(*n*_X_ − 1, *n*_R_ − 1)"),
            " to *F* × *F*_1−*α*/2_(*n*_R_ − 1, *n*_X_ − 1)",
        ),
        sentences(
            "*p* is twice the smaller tail of the *F* distribution with *n*_X_ − 1 and *n*_R_ − 1 degrees of "
            "freedom, at most 1; adjusted over the levels by "
            f"{ADJUSTMENTS[plan.adjust].name}. Both the test and its interval assume normal errors.",
        ),
    )
    return Method("Spread", blocks, ADJUSTMENTS[plan.adjust].references)


def across_method(bases: tuple[Basis, ...]) -> Method | None:
    """The adjustment over several responses; None with one."""
    if not bases[0].several:
        return None
    rule = {
        "none": "No adjustment for the number of responses: each response keeps its own error rates.",
        "bonferroni": (
            "Bonferroni over the *r* responses: every *p*, adjusted within its family, is multiplied by *r*, "
            "at most 1, and intervals use *α*/*r*, so that each question keeps its error rate over all "
            "responses."
        ),
        "holm": (
            "Holm over the *r* responses: the tests of one question on all responses are adjusted together "
            "as one family; such tests have no simultaneous intervals. A question that is asked of one "
            "response alone is tested at *α*/*r*."
        ),
    }[bases[0].study.design.across_responses]
    keys = {"none": (), "bonferroni": ("dunn",), "holm": ("holm", "dunn")}[
        bases[0].study.design.across_responses
    ]
    return Method("Several responses", (sentences(rule),), keys)


def power_method(bases: tuple[Basis, ...]) -> Method | None:
    """How the power of the plan was computed; None where it is not reported."""
    power = bases[0].content.findings.power
    if power is None:
        return None
    rules = [
        (
            "*F* test: noncentral *F* with *λ* = ∑_*i*_ *n*_*i*_ (*μ*_*i*_ − *μ̄*)² / *σ*², where two "
            "extreme levels differ by the difference to be seen, and the others lie midway."
        ),
        (
            "Comparison or contrast: noncentral *t* with noncentrality *d* / (*σ* √(∑_*i*_ *w*_*i*_² / "
            "*n*_*i*_)). Over a family the chance is that of the row stated, under the family’s own critical "
            "value."
        ),
    ]
    keys = ["cohen"]
    if bases[0].study.equivalence:
        rules.append(
            "Equivalence: the chance that both one-sided tests show it at the true difference stated, by "
            "integration over the distribution of *s*; it is not the sum of two tails."
        )
        keys.append("phillips")
    rules.append("Nothing here was computed from the data: a power from the data would only restate *p*.")
    return Method("Power of the plan", (sentences(*rules),), tuple(keys))
