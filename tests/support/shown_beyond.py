"""Where equivalence, spread, checks and outliers show in a run: written by hand."""

from support.shown import ADJUSTED_BY_HOLM, BOTH, Shown

COARSE_STEPS = "coarse steps"
SEPARATE = "separate variances"
ONE_SIDED = "one-sided t test"
FIELLER = "Fieller's interval"
UNITS = "equivalence > units"
EQUIVALENCE = {
    "margin in units": Shown(
        "pooled",
        f"{UNITS} > rows > 20 - 10 > p_adjusted",
        f"{UNITS} > method = two one-sided t tests, pooled variance, Holm",
        "Margin −0.1 to 0.1 g/100 g, from invented specification 7. 3 comparisons, two one-sided t tests",
        "Equivalence (two one-sided tests): p is the larger of the two",
        ("Schuirmann 1987",),
    ),
    "pairs, uneven margins, alpha of their own": Shown(
        "pooled",
        "equivalence > uneven > rows > 10 - 50 > p_adjusted",
        "equivalence > uneven > method = two one-sided t tests, pooled variance, Bonferroni",
        "Equivalence is shown where the adjusted p is at most 0.025",
        "Bonferroni over the m comparisons of a family: p is multiplied by m, at most 1",
        ("Dunn 1961",),
    ),
    "margin in percent": Shown(
        "pooled",
        "equivalence > percent > rows > 20 - 10 > p_adjusted",
        f"equivalence > percent > method = two {ONE_SIDED}s, pooled variance, {FIELLER}, unadjusted",
        "Margin −5 to 5 % of the reference mean",
        "The interval in percent is Fieller’s for the ratio",
        ("Fieller 1954",),
    ),
    "separate variances": Shown(
        SEPARATE,
        f"{UNITS} > rows > 20 - 10 > p_adjusted",
        f"{UNITS} > method = two one-sided t tests, Welch-Satterthwaite degrees of freedom, Holm",
        "two one-sided Welch t tests each, adjusted together by Holm",
        "SE, ν as in a comparison",
        ("Schuirmann 1987", "Welch 1947"),
    ),
    "interval of the difference": Shown(
        "pooled",
        f"{UNITS} > rows > 20 - 10 > ci > 0",
        "",
        "Equivalence, units, with 90 % intervals",
        "The interval has confidence 1 − 2α",
    ),
    "not-lower": Shown(
        "pooled",
        "equivalence > not lower > rows > 20 - 10 > p_adjusted",
        "equivalence > not lower > method = one-sided t test, pooled variance, Holm",
        "Which levels of lot are not lower than 10 by the margin",
        "Non-inferiority: the one test on the side of the margin, with the one-sided bound",
        ("Holm 1979",),
    ),
    "not-higher": Shown(
        "pooled",
        "equivalence > not higher > rows > 20 - 10 > p_adjusted",
        f"equivalence > not higher > method = {ONE_SIDED}, pooled variance, {FIELLER}, unadjusted",
        "Which levels of lot are not higher than 10 by the margin",
        "Non-inferiority: the one test on the side",
        ("Fieller 1954",),
    ),
}
EQUIVALENCE_ADJUSTMENTS = {
    "none": Shown(
        "pooled",
        "equivalence > percent > rows > 35 - 10 > p",
        "equivalence > percent > adjust = none",
        "two one-sided t tests each, no adjustment",
        "no adjustment is needed for their number",
    ),
    "bonferroni": EQUIVALENCE["pairs, uneven margins, alpha of their own"],
    "holm": Shown(
        "pooled",
        f"{UNITS} > rows > 35 - 10 > p_adjusted",
        f"{UNITS} > adjust = holm",
        "two one-sided t tests each, adjusted together by Holm",
        f"Holm over the m comparisons of a family: {ADJUSTED_BY_HOLM}",
        ("Holm 1979",),
    ),
}
RATIO = "spread > rows > 50 / 10"
SPREAD_ADJUSTMENTS = {
    "none": Shown(
        SEPARATE,
        f"{RATIO} > p",
        "spread > method = F test of two variances, unadjusted",
        "two-sided F tests, no adjustment",
        "No adjustment for the number of ratios",
    ),
    "bonferroni": Shown(
        BOTH,
        f"{RATIO} > p_adjusted",
        "spread > method = F test of two variances, Bonferroni",
        "two-sided F tests, adjusted together by Bonferroni",
        "Bonferroni over the m ratios",
        ("Dunn 1961",),
    ),
    "holm": Shown(
        "pooled",
        f"{RATIO} > p_adjusted",
        "spread > method = F test of two variances, Holm",
        "two-sided F tests, adjusted together by Holm",
        f"Holm over the m ratios: {ADJUSTED_BY_HOLM}",
        ("Holm 1979",),
    ),
}
SPREAD = {
    "ratio of variances": Shown(
        "pooled",
        f"{RATIO} > ratio",
        "",
        "Ratios of variances with 95 % intervals, ash",
        "p is twice the smaller tail of the F distribution with nX − 1 and nR − 1 degrees of freedom",
    ),
    "interval of the ratio": Shown(
        "pooled", f"{RATIO} > ci > 0", "", "50 / 10 4.36 0.454 41.9", "F × F1−α/2(nR − 1, nX − 1)"
    ),
    "interval of a standard deviation": Shown(
        "pooled",
        "levels > 50 > sd_ci > 0",
        "",
        "95 % chi-square interval",
        "si √((ni − 1) / χ²)",
    ),
}


def check(name: str) -> tuple[str, str]:
    return f"checks > {name} > statistic", f"checks > {name} > name = {name}"


CHECKS = {
    "brown-forsythe": Shown(
        "pooled",
        *check("Brown-Forsythe test of equal variances"),
        "Brown–Forsythe test of equal variances",
        "zij = |yij − mediani|, with k − 1 and N − k",
        ("Brown Forsythe American Statistical 1974",),
    ),
    "levene": Shown(
        "pooled",
        *check("Levene test of equal variances"),
        "Levene test of equal variances",
        "Levene: the F ratio of an analysis of variance of zij = |yij − ȳi|",
        ("Levene 1960",),
    ),
    "bartlett": Shown(
        "pooled",
        *check("Bartlett test of equal variances"),
        "Bartlett test of equal variances",
        "Bartlett: χ² = ((N − k) ln s² − ∑i (ni − 1) ln si²) / C",
        ("Bartlett 1937",),
    ),
    "cochran": Shown(
        "pooled",
        *check("Cochran test of the largest variance"),
        "Cochran test of the largest variance",
        "p is the number of levels times the tail by the F distribution, a bound",
        ("Cochran 1941", "Lam 2010"),
    ),
    "shapiro-wilk": Shown(
        "pooled",
        *check("Shapiro-Wilk test on residuals"),
        "Shapiro–Wilk test on residuals",
        "W of the N residuals with Royston’s approximation of p",
        ("Shapiro Wilk 1965", "Royston 1995"),
    ),
    "anderson-darling": Shown(
        "pooled",
        *check("Anderson-Darling test on residuals"),
        "Anderson–Darling test on residuals",
        "A² (1 + 0.75/N + 2.25/N²)",
        ("Anderson Darling 1952", "D’Agostino Stephens 1986"),
    ),
    "measuring order": Shown(
        "pooled",
        *check("Trend in run order within levels"),
        "Trend in run order within levels",
        "the t test of one common slope of the values on their place in the order, within the levels",
    ),
    "coarse resolution": Shown(
        COARSE_STEPS,
        *check("Resolution of the values"),
        "rounding alone adds about",
        "Resolution: the step in which values are recorded, over s",
    ),
}
OUTLIERS = {
    "grubbs": Shown(
        "pooled",
        "outliers > grubbs > statistic",
        "outliers > grubbs > test = grubbs",
        "Grubbs, one value 50 20 1.702 1.723 1.715 1.764 straggler",
        "G = max |y − ȳi| / si within a level",
        ("Grubbs 1950", "Grubbs 1969", "Grubbs Beck 1972", "ISO 5725-2:2019"),
    ),
    "grubbs-double": Shown(
        "pooled",
        "outliers > grubbs-double > statistic",
        "outliers > grubbs-double > test = grubbs-double",
        "Grubbs, two values",
        "G = Q2 / Q, the sum of squares without the two largest (or the two smallest)",
        ("Grubbs 1950", "Grubbs Beck 1972"),
    ),
    "cochran": Shown(
        "pooled",
        "outliers > cochran > statistic",
        "outliers > cochran > verdict = straggler",
        "Cochran, level variance 50",
        "the limits are by the F distribution and Bonferroni’s inequality",
        ("Cochran 1941", "Lam 2010"),
    ),
}
