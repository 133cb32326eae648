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
            "Grubbs, one value: *G* = max |*y* − *ȳ*_*i*_| / *s*_*i*_ within a level; the limits at *q* = 5 "
            "% and 1 % are ((*n* − 1)/√*n*) × √(*t*² / (*n* − 2 + *t*²)), *t* = "
            "*t*_1−*q*/(2*n*);\u00a0*n*−2_, a bound by Bonferroni’s inequality."
        ),
        ("grubbs1950", "grubbs1969", "grubbs1972"),
    ),
    "grubbs-double": (
        (
            "Grubbs, two values: *G* = *Q*_2_ / *Q*, the sum of squares without the two largest (or the two "
            "smallest) values over that with them; small values are extreme. The limits are the ratios "
            "that a normal sample falls below with *q*/2 at either end, by integration over the angles "
            "between the values."
        ),
        ("grubbs1950", "grubbs1972"),
    ),
    "cochran": (
        _COCHRAN + "; the limits are by the *F* distribution and Bonferroni’s inequality, at *q* = 5 % and "
        "1 %: 1 / (1 + (*ν*_W_ − *ν*) / (*ν* *F*_1−*q*/*m*_(*ν*, *ν*_W_ − *ν*))), *m* the number of levels, "
        "*ν* = *n*_*i*_ − 1, *ν*_W_ = *N* − *k*.",
        ("cochran", "tlam"),
    ),
}
_OF_MEANS = (
    "As the levels are a sample, Grubbs’ tests are made on the *k* level means too, with *k* in the place of "
    "*n*; they take the means as equally precise."
)
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
_JOINED = (
    "Normality with separate variances: each level is tested by itself, and the *p*_*i*_ of the *k*′ levels "
    "that can be tested are joined as *z* = ∑_*i*_ Φ⁻¹(*p*_*i*_) / √*k*′, *p* = Φ(*z*) (Wilk and Shapiro)."
)
_ORDER = (
    "Measuring order: the *t* test of one common slope of the values on their place in the order, within the "
    "levels (analysis of covariance), on *N* − *k* − 1 degrees of freedom."
)
_RESOLUTION = (
    "Resolution: the step in which values are recorded, over *s*; called coarse beyond 1/2. Rounding to that "
    "step adds its square over 12 to the variance."
)
_PLOT = (
    "Normal plot: residuals in rising order against normal quantiles at (*i* − 3/8) / (*N* + 1/4) "
    "(Blom); the envelope is the line ± *z*_1−*α*/2_ standard errors of an order statistic "
    "(Chambers and others){scaled}. Ticks of axes by Heckbert’s rule."
)


def outliers_method(bases: tuple[Basis, ...]) -> Method | None:
    """The tests that propose values or levels to look into; None where none is planned."""
    plan = bases[0].study.outliers
    if plan is None:
        return None
    rules = [_OUTLIERS[test][0] for test in plan.tests]
    if any(one.about == "level means" for basis in bases for one in basis.response.outliers):
        rules.append(_OF_MEANS)
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
    if bases[0].is_separate and study.checks.normality:
        rules = [rule.replace("of the *N* residuals", "of the values of a level") for rule in rules]
        rules.append(_JOINED)
    if study.data.order is not None:
        rules.append(_ORDER)
    if any("Resolution" in check.name for basis in bases for check in basis.response.checks):
        rules.append(_RESOLUTION)
    keys = tuple(key for test in tests for key in _CHECKS[test][1])
    if bases[0].is_separate and study.checks.normality:
        keys = (*keys, "wilk-shapiro-joined")
    scaled = "; with separate variances each residual is divided by the *s*_*i*_ of its level"
    plot = _PLOT.replace("{scaled}", scaled if bases[0].is_separate else "")
    return Method("Checks and figures", (sentences(*rules, plot),), keys)
