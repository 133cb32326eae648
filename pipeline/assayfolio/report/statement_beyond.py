"""The method statement on equivalence, spread, precision, several responses and power."""

from collections.abc import Iterable

from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, Formula
from assayfolio.report.methods import ADJUSTMENTS
from assayfolio.report.planned_power import is_on_equivalence
from assayfolio.report.statement_parts import Method, formula, sentences
from assayfolio.study.plan import EquivalencePlan

_HOLM = (
    "Holm over the *m* {rows}: the adjusted *p* in place *i* of the rising order is the largest of min(1, "
    "(*m* − *j* + 1) × *p*_(*j*)_) over *j* ≤ *i*; the intervals are each for its own {row}."
)
_BONFERRONI = (
    "Bonferroni over the *m* {rows}: *p* is multiplied by *m*, at most 1, and the interval uses *α*/*m*."
)
_RATIOS_ADJUSTED = {
    "none": "No adjustment for the number of ratios: each test has the level *α* by itself.",
    "bonferroni": _BONFERRONI.format(rows="ratios"),
    "holm": _HOLM.format(rows="ratios", row="ratio"),
}


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
        *(_fieller_separate() if separate else [_fieller_pooled()]),
        sentences(
            "The interval in percent is Fieller’s for the ratio of the two means; it does not exist where "
            "the reference mean cannot be told from zero, and such a family is not reported. The estimate is "
            "100 (*ȳ*_X_ / *ȳ*_R_ − 1). Each of the two tests has its own *t* and standard error, as the "
            "denominator depends on *θ*; with a negative reference mean both are turned round.",
        ),
    ]


def _fieller_pooled() -> Formula:
    return formula(
        "Fieller’s limits of the ratio, *r* = *ȳ*_X_ / *ȳ*_R_, *t* = *t*_1−*α*;\u00a0*N*−*k*_",
        "100 × (",
        ("*r* ± (*t* / |*ȳ*_R_|) √((1 − *g*) *v*_X_ + *r*² *v*_R_)", "1 − *g*"),
        " − 1), *g* = *t*² *v*_R_ / *ȳ*_R_² < 1",
    )


def _fieller_separate() -> list[Block]:
    return [
        formula(
            "its degrees of freedom, *q* = 1 + *θ*/100",
            "*ν*(*q*) = ",
            (
                "(*v*_X_ + *q*² *v*_R_)²",
                "*v*_X_² / (*n*_X_ − 1) + *q*⁴ *v*_R_² / (*n*_R_ − 1)",
            ),
        ),
        formula(
            "Fieller’s limits of the ratio: 100 (*q* − 1) for the two *q* with",
            "|*ȳ*_X_ − *q* *ȳ*_R_| = *t*_1−*α*;\u00a0*ν*(*q*)_ √(*v*_X_ + *q*² *v*_R_)",
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
        rules.append(_BONFERRONI.format(rows="comparisons of a family"))
    if "holm" in used:
        rules.append(_HOLM.format(rows="comparisons of a family", row="comparison"))
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
            "freedom, at most 1. Both the test and its interval assume normal errors.",
            _RATIOS_ADJUSTED[plan.adjust],
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
    of_families = len({row.question for row in power.rows}) < len(power.rows)
    parts = [
        (_POWER_F, "cohen"),
        (_POWER_T, None),
        *([(_POWER_FAMILY, "ramsey")] if of_families else []),
        *([(_POWER_EQUIVALENCE, "phillips")] if any(map(is_on_equivalence, power.rows)) else []),
        (_POWER_WIDTH, None),
        *([(_POWER_CONTROL, "dunnett1955")] if power.allocation == "control" else []),
        (_POWER_NOT_AFTER, None),
    ]
    rules = [rule for rule, _ in parts]
    return Method("Power of the plan", (sentences(*rules),), tuple(key for _, key in parts if key))


_POWER_F = (
    "*F* test: noncentral *F* with *λ* = ∑_*i*_ *n*_*i*_ (*μ*_*i*_ − *μ̄*)² / *σ*², where two extreme levels "
    "differ by the difference to be seen, and the others lie midway. With unequal *n* the extremes are the "
    "two levels that make the power smallest."
)
_POWER_T = (
    "Comparison or contrast: noncentral *t* with noncentrality *d* / (*σ* √(∑_*i*_ *w*_*i*_² / *n*_*i*_)). "
    "Over a family the chance is that of the row stated, under the family’s own critical value."
)
_POWER_FAMILY = (
    "The chance of at least one, or of every, pair or level that differs (any-pair and all-pairs power): by "
    "integration over the level means and *s*, under the family’s own critical value."
)
_POWER_EQUIVALENCE = (
    "Equivalence: the chance that both one-sided tests show it at the true difference stated, by integration "
    "over the distribution of *s*; it is not the sum of two tails."
)
_POWER_WIDTH = (
    "Half-width of an interval: *c* *σ* √(∑_*i*_ *w*_*i*_² / *n*_*i*_), *c* the critical value of the "
    "comparison; of a one-sided question it is the distance from the estimate to the bound."
)
_POWER_CONTROL = (
    "Numbers sought give the reference √(*k* − 1) times the values of each other level, rounded up: for a "
    "given total this makes the variances of the differences from it smallest (Dunnett)."
)
_POWER_NOT_AFTER = "Nothing here was computed from the data: a power from the data would only restate *p*."
