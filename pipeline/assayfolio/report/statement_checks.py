"""The method statement on outlier proposals, checks of assumptions and figures."""

from assayfolio.report.basis import Basis
from assayfolio.report.statement_parts import Method, sentences

_COCHRAN = (
    "Cochran: *C* is the share of a level in *SS*_W_, with equal *n* the largest variance over the sum of "
    "all; with unequal *n* each share is held against its own degrees of freedom (’t Lam)"
)
_OUTLIERS = {
    "grubbs": (
        (
            "Grubbs, one value: *G* = max |*y* − *ȳ*_*i*_| / *s*_*i*_ within a level; the limits are the "
            "points that a sample of normal values exceeds with 5 % and with 1 %."
        ),
        ("grubbs1950", "grubbs1969", "grubbs1972"),
    ),
    "grubbs-double": (
        (
            "Grubbs, two values: *G* = *Q*_2_ / *Q*, the sum of squares without the two largest (or the two "
            "smallest) values over that with them; small values are extreme."
        ),
        ("grubbs1950", "grubbs1972"),
    ),
    "cochran": (
        _COCHRAN + "; the limits are by the *F* distribution and Bonferroni’s inequality, at 5 % and 1 %.",
        ("cochran", "tlam"),
    ),
}
_CHECKS = {
    "brown-forsythe": (
        (
            "Brown–Forsythe test of equal variances: the *F* ratio of an analysis of variance of *z*_*ij*_ = "
            "|*y*_*ij*_ − median_*i*_|, with *k* − 1 and *N* − *k* degrees of freedom."
        ),
        ("brown-forsythe",),
    ),
    "levene": (
        (
            "Levene: the *F* ratio of an analysis of variance of *z*_*ij*_ = |*y*_*ij*_ − *ȳ*_*i*_|, with "
            "*k* − 1 and *N* − *k* degrees of freedom."
        ),
        ("levene",),
    ),
    "bartlett": (
        (
            "Bartlett: *χ*² = ((*N* − *k*) ln *s*² − ∑_*i*_ (*n*_*i*_ − 1) ln *s*_*i*_²) / *C* on *k* − 1 "
            "degrees of freedom, *C* = 1 + (∑_*i*_ 1/(*n*_*i*_ − 1) − 1/(*N* − *k*)) / (3 (*k* − 1)); it "
            "leans on normal errors."
        ),
        ("bartlett",),
    ),
    "cochran": (
        _COCHRAN + "; *p* is the number of levels times the tail by the *F* distribution, a bound.",
        ("cochran", "tlam"),
    ),
    "shapiro-wilk": (
        ("Shapiro–Wilk: *W* of the *N* residuals with Royston’s approximation of *p*."),
        ("shapiro-wilk", "royston"),
    ),
    "anderson-darling": (
        (
            "Anderson–Darling: *A*² of the *N* residuals with mean and standard deviation estimated; *p* is "
            "the approximation of D’Agostino and Stephens for *A*² (1 + 0.75/*N* + 2.25/*N*²)."
        ),
        ("anderson-darling", "stephens"),
    ),
}
_ORDER = (
    "Measuring order: the *t* test of one common slope of the values on their place in the order, within the "
    "levels (analysis of covariance), on *N* − *k* − 1 degrees of freedom."
)
_PLOT = (
    "Normal plot: residuals in rising order against normal quantiles at (*i* − 3/8) / (*N* + 1/4) "
    "(Blom); the envelope is the line ± *z*_1−*α*/2_ standard errors of an order statistic "
    "(Chambers and others). Ticks of axes by Heckbert’s rule."
)


def outliers_method(bases: tuple[Basis, ...]) -> Method | None:
    """The tests that propose values or levels to look into; None where none is planned."""
    plan = bases[0].study.outliers
    if plan is None:
        return None
    rules = [_OUTLIERS[test][0] for test in plan.tests]
    rules.append(
        "Straggler and outlier are the words of ISO 5725-2 for what lies beyond the 5 % and the 1 % limit. "
        "Each test keeps its own error rate, so that among many levels a straggler now and then is expected."
    )
    keys = [key for test in plan.tests for key in _OUTLIERS[test][1]]
    return Method("Outlier proposals", (sentences(*rules),), (*keys, "iso5725"))


def checks_method(bases: tuple[Basis, ...]) -> Method:
    """The checks in use, and the rules of the figures."""
    study = bases[0].study
    tests = (*study.checks.equal_variances, *study.checks.normality)
    rules = [_CHECKS[test][0] for test in tests]
    if study.data.order is not None:
        rules.append(_ORDER)
    keys = tuple(key for test in tests for key in _CHECKS[test][1])
    return Method("Checks and figures", (sentences(*rules, _PLOT),), keys)
