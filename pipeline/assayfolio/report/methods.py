"""What the methods for several comparisons are called and how they work, in words and formulas.

In a rule `{df}` stands for the degrees of freedom of a comparison: N - k with one error variance, the number
of Welch and Satterthwaite with separate ones.
"""

from dataclasses import dataclass

from assayfolio.findings import ComparisonFamily
from assayfolio.study.plan import Adjustment


@dataclass(frozen=True, slots=True)
class AdjustmentWords:
    """How a report speaks of a way to adjust for several comparisons.

    `name` as in running text; `interval` is the kind of interval it comes with, empty where it has none;
    `rule` says how the adjusted p and the interval are formed and what is assumed; `references` are keys of
    REFERENCES.
    """

    name: str
    interval: str
    rule: str
    references: tuple[str, ...]


_NO_INTERVALS = " A stepwise method of this kind has no simultaneous intervals of its own, so none are given."

ADJUSTMENTS: dict[Adjustment, AdjustmentWords] = {
    "none": AdjustmentWords(
        "no adjustment",
        "individual",
        "No adjustment: each comparison has the level *α* by itself, and the interval uses "
        "*c* = *t*_1−*α*/2;\u00a0{df}_.",
        (),
    ),
    "bonferroni": AdjustmentWords(
        "Bonferroni",
        "simultaneous",
        "Bonferroni: adjusted *p* is the smaller of 1 and *m* × *p* for a family of *m* comparisons; the "
        "interval uses *c* = *t*_1−*α*/(2*m*);\u00a0{df}_. Nothing is assumed about how the comparisons "
        "depend on one another.",
        ("dunn",),
    ),
    "sidak": AdjustmentWords(
        "Šidák",
        "simultaneous",
        "Šidák: adjusted *p* is 1 − (1 − *p*)^*m*^ for a family of *m* comparisons; the interval uses "
        "*c* = *t*_1−*α*′/2;\u00a0{df}_ with *α*′ = 1 − (1 − *α*)^1/*m*^. It holds for two-sided comparisons "
        "however they depend on one another, as their estimates are jointly normal.",
        ("sidak",),
    ),
    "holm": AdjustmentWords(
        "Holm",
        "",
        "Holm: with the *p* values of a family of *m* in rising order, the adjusted *p* in place *i* is the "
        "largest of min(1, (*m* − *j* + 1) × *p*_(*j*)_) over *j* ≤ *i*. Nothing is assumed about how the "
        "comparisons depend on one another." + _NO_INTERVALS,
        ("holm",),
    ),
    "hochberg": AdjustmentWords(
        "Hochberg",
        "",
        "Hochberg: with the *p* values of a family of *m* in rising order, the adjusted *p* in place *i* is "
        "the smallest of min(1, (*m* − *j* + 1) × *p*_(*j*)_) over *j* ≥ *i*. It assumes that the tests are "
        "independent or positively dependent (so that Simes’ inequality holds); with two-sided or "
        "negatively correlated comparisons that is not certain." + _NO_INTERVALS,
        ("hochberg", "sarkar"),
    ),
    "scheffe": AdjustmentWords(
        "Scheffé",
        "simultaneous",
        "Scheffé: adjusted *p* = P(*F*_*k*−1, *N*−*k*_ ≥ *t*²/(*k* − 1)); the interval uses *c* = "
        "√((*k* − 1) *F*_1−*α*;\u00a0*k*−1, *N*−*k*_). It keeps the level over every contrast of the *k* "
        "means that could be asked, two-sided, and so is wide for few.",
        ("scheffe1953",),
    ),
    "tukey-kramer": AdjustmentWords(
        "Tukey–Kramer",
        "simultaneous",
        "Tukey–Kramer: adjusted *p* = P(*Q* ≥ √2 |*t*|) for the studentised range *Q* of *k* means with *N* "
        "− *k* degrees of freedom; the interval uses *c* = *q*_1−*α*;\u00a0*k*,\u00a0*N*−*k*_ / √2. With "
        "unequal *n* the method keeps its level and is somewhat conservative.",
        ("tukey", "kramer", "hayter"),
    ),
    "games-howell": AdjustmentWords(
        "Games–Howell",
        "simultaneous",
        "Games–Howell: adjusted *p* = P(*Q* ≥ √2 |*t*|) for the studentised range *Q* of *k* means with the "
        "degrees of freedom *ν* of the pair; the interval uses *c* = *q*_1−*α*;\u00a0*k*,\u00a0*ν*_ / √2. "
        "The method is approximate: with few values at a level it can exceed its level a little.",
        ("games-howell",),
    ),
    "dunnett": AdjustmentWords(
        "Dunnett",
        "simultaneous",
        "Dunnett, single-step: adjusted *p* = P(max |*T*_*i*_| ≥ |*t*|), where the *T*_*i*_ are jointly *t* "
        "distributed with *N* − *k* degrees of freedom and correlations *b*_*i*_ *b*_*j*_, *b*_*i*_ = "
        "√(*n*_*i*_ / (*n*_0_ + *n*_*i*_)), *n*_0_ at the reference; the interval uses the *c* with "
        "P(max |*T*_*i*_| > *c*) = *α*. One-sided, with the signs kept: adjusted *p* = P(max *T*_*i*_ ≥ *t*) "
        "and P(max *T*_*i*_ > *c*) = *α* (for “less” with the signs of all *t* turned).",
        ("dunnett1955", "dunnett1964"),
    ),
    "dunnett-step-down": AdjustmentWords(
        "Dunnett–Tamhane step-down",
        "",
        "Dunnett–Tamhane step-down: the comparisons are taken from the largest statistic to the smallest; "
        "each is given the probability that the largest of the statistics not yet taken reaches it "
        "(distribution as for Dunnett’s method), and the adjusted *p* is the largest of these probabilities "
        "so far." + _NO_INTERVALS,
        ("dunnett-tamhane", "dunnett1955"),
    ),
}


def adjustment_words(adjust: str) -> AdjustmentWords:
    """How a report speaks of the adjustment that the plan calls `adjust`.

    Raises KeyError for a name that the plan does not know.
    """
    return {str(name): words for name, words in ADJUSTMENTS.items()}[adjust]


def adjustment_of(family: ComparisonFamily) -> AdjustmentWords:
    """How a report speaks of the method of `family`."""
    return adjustment_words(family.adjust)
