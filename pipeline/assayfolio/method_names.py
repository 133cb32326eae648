"""The standard names of the procedures, as findings and reports give them."""

from assayfolio.study.plan import EquivalencePlan

_OWN_NAME = {
    "scheffe": "Scheffe",
    "tukey-kramer": "Tukey-Kramer",
    "games-howell": "Games-Howell",
    "dunnett": "Dunnett, single-step",
    "dunnett-step-down": "Dunnett-Tamhane, step-down",
}
_T_TESTS = {
    "pooled": "t tests with the pooled variance",
    "separate": "Welch t tests with Welch-Satterthwaite degrees of freedom",
}
_ADJUSTED = {
    "none": "unadjusted",
    "bonferroni": "Bonferroni",
    "sidak": "Sidak",
    "holm": "Holm",
    "hochberg": "Hochberg",
}


def comparison_method(adjust: str, variances: str) -> str:
    """The procedure of a family of comparisons."""
    if adjust in _OWN_NAME:
        return _OWN_NAME[adjust]
    return f"{_T_TESTS[variances]}, {_ADJUSTED[adjust]}"


def equivalence_method(plan: EquivalencePlan, variances: str) -> str:
    """The procedure of a family of equivalence or non-inferiority tests."""
    tests = "one-sided t test" if plan.non_inferiority else "two one-sided t tests"
    error = "pooled variance" if variances == "pooled" else "Welch-Satterthwaite degrees of freedom"
    interval = ", Fieller's interval" if plan.percent else ""
    return f"{tests}, {error}{interval}, {_ADJUSTED[plan.adjust]}"


def spread_method(adjust: str) -> str:
    """The procedure of the comparison of variances with that of a reference."""
    return f"F test of two variances, {_ADJUSTED[adjust]}"
