"""What the methods are called, how they work in formulas, and where they are published."""

from dataclasses import dataclass

from assayfolio.findings import ComparisonFamily


@dataclass(frozen=True, slots=True)
class Adjustment:
    """How a report speaks of a way to adjust for several comparisons.

    `name` as in running text; `interval` is the kind of interval it comes with; `rule` says how the adjusted
    p and the interval are formed; `references` are keys of REFERENCES.
    """

    name: str
    interval: str
    rule: str
    references: tuple[str, ...]


ADJUSTMENTS: dict[str, Adjustment] = {
    "none": Adjustment(
        "no adjustment",
        "individual",
        "No adjustment: each comparison has the level *α* by itself, and the interval uses "
        "*c* = *t*_1−*α*/2;\u00a0*N*−*k*_.",
        (),
    ),
    "bonferroni": Adjustment(
        "Bonferroni",
        "simultaneous",
        "Bonferroni: adjusted *p* is the smaller of 1 and *m* × *p* for a family of *m* comparisons; the "
        "interval uses *c* = *t*_1−*α*/(2*m*);\u00a0*N*−*k*_.",
        ("dunn",),
    ),
    "sidak": Adjustment(
        "Šidák",
        "simultaneous",
        "Šidák: adjusted *p* is 1 − (1 − *p*)^*m*^ for a family of *m* comparisons; the interval uses "
        "*c* = *t*_1−*α*′/2;\u00a0*N*−*k*_ with *α*′ = 1 − (1 − *α*)^1/*m*^.",
        ("sidak",),
    ),
    "holm": Adjustment(
        "Holm",
        "",
        "Holm: with the *p* values of a family of *m* in rising order, the adjusted *p* in place *i* is the "
        "largest of min(1, (*m* − *j* + 1) × *p*_(*j*)_) over *j* ≤ *i*. A stepwise method of this kind has "
        "no simultaneous intervals of its own, so none are given.",
        ("holm",),
    ),
    "tukey-kramer": Adjustment(
        "Tukey–Kramer",
        "simultaneous",
        "Tukey–Kramer: adjusted *p* = P(*Q* ≥ √2 |*t*|) for the studentised range *Q* of *k* means with *N* "
        "− *k* degrees of freedom; the interval uses *c* = *q*_1−*α*;\u00a0*k*,\u00a0*N*−*k*_ / √2. With "
        "unequal *n* the method keeps its level and is somewhat conservative.",
        ("tukey", "kramer", "hayter"),
    ),
}

REFERENCES: dict[str, str] = {
    "scheffe": "H. Scheffé, The Analysis of Variance, Wiley, New York, 1959 (one-way layout, chapter 3).",
    "iso3534": "ISO 3534-3:2013, Statistics – Vocabulary and symbols – Part 3: Design of experiments.",
    "tukey": (
        "J. W. Tukey, The problem of multiple comparisons, 1953; in The Collected Works of John W. Tukey, "
        "vol. VIII, Chapman & Hall, New York, 1994."
    ),
    "kramer": (
        "C. Y. Kramer, Extension of multiple range tests to group means with unequal numbers of "
        "replications, Biometrics 12 (1956) 307–310."
    ),
    "hayter": (
        "A. J. Hayter, A proof of the conjecture that the Tukey–Kramer multiple comparisons procedure is "
        "conservative, Annals of Statistics 12 (1984) 61–75."
    ),
    "dunn": (
        "O. J. Dunn, Multiple comparisons among means, Journal of the American Statistical Association 56 "
        "(1961) 52–64."
    ),
    "sidak": (
        "Z. Šidák, Rectangular confidence regions for the means of multivariate normal distributions, "
        "Journal of the American Statistical Association 62 (1967) 626–633."
    ),
    "holm": (
        "S. Holm, A simple sequentially rejective multiple test procedure, Scandinavian Journal of "
        "Statistics 6 (1979) 65–70."
    ),
    "brown-forsythe": (
        "M. B. Brown and A. B. Forsythe, Robust tests for the equality of variances, Journal of the "
        "American Statistical Association 69 (1974) 364–367."
    ),
    "shapiro-wilk": (
        "S. S. Shapiro and M. B. Wilk, An analysis of variance test for normality (complete samples), "
        "Biometrika 52 (1965) 591–611."
    ),
    "royston": (
        "P. Royston, Remark AS R94: a remark on algorithm AS 181, Applied Statistics 44 (1995) 547–551."
    ),
    "blom": "G. Blom, Statistical Estimates and Transformed Beta-Variables, Wiley, New York, 1958.",
    "chambers": (
        "J. M. Chambers, W. S. Cleveland, B. Kleiner and P. A. Tukey, Graphical Methods for Data Analysis, "
        "Wadsworth, Belmont, 1983."
    ),
    "heckbert": (
        "P. S. Heckbert, Nice numbers for graph labels, in Graphics Gems, Academic Press, Boston, 1990."
    ),
}


def adjustment_of(family: ComparisonFamily) -> Adjustment:
    """How a report speaks of the method of `family`."""
    return ADJUSTMENTS[family.adjust]
