"""Where comparisons, overall tests, effect sizes and several responses show in a run: written by hand."""

from support.shown import BOTH, HOLM_RULE, Shown

POOLED_T = "t tests with the pooled variance"
WELCH_T = "Welch t tests with Welch-Satterthwaite degrees of freedom"
SEPARATE = "separate variances"
COMPARISON = "d = ∑i wi ȳi, SE = s √(∑i wi² / ni), t = d / SE, interval d ± c × SE"


def family(name: str, row: str) -> str:
    return f"comparisons > {name} > rows > {row} > p_adjusted"


def named(name: str, method: str) -> str:
    return f"comparisons > {name} > method = {method}"


ADJUSTMENTS = {
    "none": Shown(
        "pooled",
        family("pairs none", "10 - 20"),
        named("pairs none", f"{POOLED_T}, unadjusted"),
        "A family of 6 comparisons, two-sided, not adjusted for their number, 16 degrees of freedom",
        "No adjustment: each comparison has the level α by itself, and the interval uses c = t1−α/2; N−k",
    ),
    "bonferroni": Shown(
        "pooled",
        family("pairs bonferroni", "10 - 20"),
        named("pairs bonferroni", f"{POOLED_T}, Bonferroni"),
        "adjusted together by Bonferroni",
        "Bonferroni: adjusted p is the smaller of 1 and m × p",
        ("Dunn 1961",),
    ),
    "sidak": Shown(
        "pooled",
        family("pairs sidak", "10 - 20"),
        named("pairs sidak", f"{POOLED_T}, Sidak"),
        "adjusted together by Šidák",
        "Šidák: adjusted p is 1 − (1 − p)m for a family of m comparisons",
        ("Šidák 1967",),
    ),
    "holm": Shown(
        "pooled",
        family("pairs holm", "10 - 20"),
        named("pairs holm", f"{POOLED_T}, Holm"),
        "adjusted together by Holm",
        f"rising order, the adjusted p in place i is the {HOLM_RULE}",
        ("Holm 1979",),
    ),
    "hochberg": Shown(
        "pooled",
        family("pairs hochberg", "10 - 20"),
        named("pairs hochberg", f"{POOLED_T}, Hochberg"),
        "adjusted together by Hochberg",
        "the smallest of min(1, (m − j + 1) × p(j)) over j ≥ i. It assumes that the tests are independent or "
        "positively dependent",
        ("Hochberg 1988", "Sarkar 1998"),
    ),
    "scheffe": Shown(
        "pooled",
        family("pairs scheffe", "10 - 20"),
        named("pairs scheffe", "Scheffe"),
        "adjusted together by Scheffé",
        "Scheffé: adjusted p = P(Fk−1, N−k ≥ t²/(k − 1)); the interval uses c = √((k − 1) F1−α; k−1, N−k)",
        ("Scheffé 1953",),
    ),
    "tukey-kramer": Shown(
        "pooled",
        family("tukey", "10 - 20"),
        named("tukey", "Tukey-Kramer"),
        "adjusted together by Tukey–Kramer",
        "Tukey–Kramer: adjusted p = P(Q ≥ √2 |t|) for the studentised range Q of k means with N − k",
        ("Tukey 1953", "Kramer 1956", "Hayter 1984"),
    ),
    "games-howell": Shown(
        SEPARATE,
        family("games-howell", "10 - 20"),
        named("games-howell", "Games-Howell"),
        "adjusted together by Games–Howell, each with its own degrees of freedom",
        "Games–Howell: adjusted p = P(Q ≥ √2 |t|) for the studentised range Q of k means with the degrees of "
        "freedom ν of the pair",
        ("Games Howell 1976", "Welch 1947", "Satterthwaite 1946"),
    ),
    "dunnett": Shown(
        "pooled",
        family("dunnett", "20 - 10"),
        named("dunnett", "Dunnett, single-step"),
        "adjusted together by Dunnett, 16 degrees of freedom",
        "correlations bi bj, bi = √(ni / (n0 + ni)), n0 at the reference",
        ("Dunnett 1955", "Dunnett 1964"),
    ),
    "dunnett-step-down": Shown(
        "pooled",
        family("step-down", "20 - 10"),
        named("step-down", "Dunnett-Tamhane, step-down"),
        "adjusted together by Dunnett–Tamhane step-down",
        "the comparisons are taken from the largest statistic to the smallest",
        ("Dunnett Tamhane 1991",),
    ),
}
FAMILY_KINDS = {
    "pairs": Shown(
        "pooled",
        family("pairs none", "10 - 50"),
        named("pairs none", f"{POOLED_T}, unadjusted"),
        "Which levels of lot differ from one another?",
        COMPARISON,
    ),
    "against": Shown(
        "pooled",
        family("against none", "50 - 10"),
        named("against none", f"{POOLED_T}, unadjusted"),
        "Which levels of lot differ from 10?",
        COMPARISON,
    ),
    "weights": Shown(
        BOTH,
        family("scheffe contrast", "scheffe contrast"),
        named("scheffe contrast", "Scheffe"),
        "One comparison, two-sided, adjusted for every other contrast that could be asked by Scheffé",
        COMPARISON,
        ("Scheffé 1953",),
    ),
    "contrasts": Shown(
        BOTH,
        family("contrasts sidak", "low"),
        named("contrasts sidak", f"{POOLED_T}, Sidak"),
        "Weights of the contrasts of “contrasts sidak”",
        COMPARISON,
        ("Šidák 1967",),
    ),
    "linear trend": Shown(
        BOTH,
        family("slope", "linear"),
        named("slope", f"{POOLED_T}, unadjusted"),
        "Do the means rise or fall with lot, along a straight line?",
        "The first is the slope of the straight line fitted to the means",
        ("Forsythe 1957",),
    ),
    "polynomial trend": Shown(
        BOTH,
        family("cubic holm", "cubic"),
        named("cubic holm", f"{POOLED_T}, Holm"),
        "Which coefficients of a polynomial in lot, up to degree 3, differ from zero?",
        "row d is the contrast with weights ni Pd(xi) / ∑j nj Pd(xj)²",
        ("Forsythe 1957",),
    ),
    "separate variances": Shown(
        SEPARATE,
        family("pairs holm", "10 - 20"),
        named("pairs holm", f"{WELCH_T}, Holm"),
        "adjusted together by Holm, by Welch’s t tests, each with its own degrees of freedom",
        "SE² = ∑i wi² si² / ni, t = d / SE",
        ("Welch 1947", "Satterthwaite 1946"),
    ),
}
ALTERNATIVES = {
    "two-sided": Shown(
        "pooled",
        family("dunnett", "50 - 10"),
        "comparisons > dunnett > alternative = two-sided",
        "A family of 3 comparisons, two-sided, adjusted together by Dunnett",
        "P(max |Ti| ≥ |t|)",
    ),
    "greater": Shown(
        "pooled",
        family("dunnett greater", "50 - 20"),
        "comparisons > dunnett greater > alternative = greater",
        "one-sided (greater: the first level above the second), adjusted together by Dunnett",
        "In a one-sided family p is the tail on the side asked for",
    ),
    "less": Shown(
        "pooled",
        family("dunnett less", "10 - 50"),
        "comparisons > dunnett less > alternative = less",
        "one-sided (less: the first level below the second), adjusted together by Dunnett",
        "c uses α in place of α/2, and the interval is open on the other side",
    ),
}
OMNIBUS = {
    "f": Shown(
        "pooled",
        "anova > p",
        "omnibus = f",
        "F with 3 and 16 degrees of freedom = 10.132",
        "p = P(Fk−1, N−k ≥ F)",
        ("Scheffé 1959",),
    ),
    "welch": Shown(
        "beet-syrup",
        "welch > p",
        "omnibus = welch",
        "Difference shown between the means of the 4 levels by Welch’s F",
        "wi = ni / si², ỹ = ∑i wi ȳi / W",
        ("Welch 1951",),
    ),
    "brown-forsythe": Shown(
        SEPARATE,
        "brown_forsythe_means > p",
        "omnibus = brown-forsythe",
        "Difference shown between the means of the 4 levels by the Brown–Forsythe test of equal means (F*)",
        "Brown and Forsythe take k − 1 for the first degrees of freedom",
        ("Brown Forsythe Technometrics 1974",),
    ),
    "brown-forsythe, degrees of freedom of Mehrotra": Shown(
        SEPARATE,
        "brown_forsythe_means > p_mehrotra",
        "omnibus = brown-forsythe",
        "Brown–Forsythe test of equal means (F*), with Mehrotra’s degrees of freedom",
        "Mehrotra takes (∑ ui)² / ((∑ ni si² / N)² + ∑ (1 − 2 ni / N) si⁴)",
        ("Mehrotra 1997",),
    ),
}
EFFECTS = {
    "eta squared": Shown(
        "pooled",
        "effect > eta_squared",
        "",
        "Share of the variation between levels η²",
        "η² =",
        ("Cohen 1988",),
    ),
    "omega squared": Shown(
        "pooled", "effect > omega_squared", "", "less what chance adds ω²", "ω² =", ("Hays 1963",)
    ),
    "epsilon squared": Shown(
        "pooled", "effect > epsilon_squared", "", "by Kelley’s formula ε²", "ε² =", ("Kelley 1935",)
    ),
    "Cohen's f": Shown(
        "pooled", "effect > cohen_f", "", "Cohen’s f", "f = √(η² / (1 − η²)) = √(SSB / SSW)", ("Cohen 1988",)
    ),
    "interval of Cohen's f": Shown(
        "pooled",
        "effect > cohen_f_ci > 0",
        "",
        "with the 95 % interval of Cohen’s f",
        "f = √(λ / N)",
        ("Steiger 2004",),
    ),
}
ACROSS = {
    "none": Shown(
        "pooled",
        "anova > p_adjusted",
        "comparisons > tukey > across_responses = none",
        "no adjustment for the number of responses: each keeps its own error rates",
        "No adjustment for the number of responses",
    ),
    "bonferroni": Shown(
        BOTH,
        "anova > p_adjusted",
        "comparisons > tukey > across_responses = bonferroni",
        "adjusted together by Tukey–Kramer, adjusted for 2 responses by Bonferroni",
        "every p, adjusted within its family, is multiplied by r",
        ("Dunn 1961",),
    ),
    "holm": Shown(
        "holm over the responses",
        "comparisons > pairs > rows > 10 - 20 > p_adjusted",
        "comparisons > pairs > across_responses = holm",
        "adjusted together with those of all 2 responses by Holm",
        "the tests of one question on all responses are adjusted together as one family",
        ("Holm 1979",),
    ),
}
