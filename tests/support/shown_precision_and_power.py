"""Where precision, planned power and the limits of criteria show in a run: written by hand."""

from support.shown import Shown

RANDOM = "random levels"
CONDITIONS = {
    "intermediate-precision": Shown(
        "cider-vinegar",
        "precision > total_sd",
        "precision > total_name = intermediate precision",
        "within one laboratory the total is the intermediate precision",
        "s² = sr² + max(0, sL²) = MSB / n0 + (1 − 1/n0) MSW",
        ("ISO 5725-2:2019",),
    ),
    "reproducibility": Shown(
        RANDOM,
        "precision > total_sd",
        "precision > total_name = reproducibility",
        "between laboratories the total is the reproducibility",
        "s² = sr² + max(0, sL²) = MSB / n0 + (1 − 1/n0) MSW",
        ("ISO 5725-2:2019",),
    ),
}
PRECISION = {
    "repeatability": Shown(
        "pooled",
        "precision > repeatability_sd",
        "",
        "Repeatability, within a level",
        "sr² = MSW =",
        ("ISO 5725-2:2019",),
    ),
    "interval of the repeatability": Shown(
        RANDOM,
        "precision > repeatability_sd_ci > 0",
        "",
        "Precision of ash, with 90 % intervals",
        "√(SSW / χ²) with the points of χ² on N − k degrees of freedom",
    ),
    "repeatability limit": Shown(
        RANDOM,
        "precision > repeatability_limit",
        "",
        "Limit: 2.8 times the standard deviation",
        "limit 2.8 sr",
    ),
    "limit of the total": Shown(RANDOM, "precision > total_limit", "", "from two levels", "limit 2.8 sr"),
    "spread between levels": Shown(
        RANDOM, "precision > between_sd", "", "Between levels", "sL² =", ("ISO 5725-2:2019",)
    ),
    "component as estimated": Shown(
        RANDOM,
        "precision > between_variance_raw",
        "",
        "(g/100 g)², as estimated",
        "Where MSB is below MSW the estimated sL² is negative: it is shown as it is and reported as 0",
    ),
    "n0": Shown(RANDOM, "precision > n0", "", "values a level, as the components count", "n0 ="),
    "interval of the total": Shown(
        RANDOM,
        "precision > total_sd_ci > 1",
        "precision > interval_method = modified large sample (Graybill-Wang), n0 in the place of n",
        "modified large sample (Graybill and Wang), n0 in the place of n",
        "the modified large sample method of Graybill and Wang on the two mean squares",
        ("Graybill Wang 1980", "Burdick Graybill 1992"),
    ),
    "second interval of the total": Shown(
        RANDOM,
        "precision > total_sd_ci_satterthwaite > 1",
        "",
        "by Satterthwaite with",
        "Second interval: chi-square with Satterthwaite’s degrees of freedom",
        ("Satterthwaite 1946",),
    ),
    "intraclass correlation, unequal n": Shown(
        RANDOM,
        "precision > icc_ci > 0",
        "precision > icc_method = Wald",
        "(Wald’s for unequal n)",
        "Wald’s, by weights of the level means, with unequal n",
        ("Wald 1940",),
    ),
    "intraclass correlation, equal n": Shown(
        "cider-vinegar",
        "precision > icc_ci > 0",
        "precision > icc_method = F",
        "(from F)",
        "Intraclass correlation: max(0, sL²) / s²; its interval is from F = MSB / MSW with equal n",
    ),
    "grand mean between levels": Shown(
        RANDOM,
        "precision > mean_ways > between levels > u",
        "precision > mean_method = between levels",
        "Grand mean of ash in the two ways of GUM H.5",
        "the mean of the level means, u² = their variance / k",
        ("JCGM 100:2008",),
    ),
    "grand mean, pooled": Shown(
        RANDOM,
        "precision > mean_ways > pooled > u",
        "",
        "sound only where the levels add nothing",
        "pooled: u² = SST / (N (N − 1)) on N − 1 (GUM H.5)",
        ("JCGM 100:2008",),
    ),
}
OVERALL = "planned_power > rows > overall: do the means differ?"
ONE_PAIR = "planned_power > rows > showing a given pair"
EVERY_PAIR = "planned_power > rows > showing every pair"
DUNNETT = "planned_power > rows > Dunnett, single-step"
POWER = {
    "of F": Shown(
        "oat-drying",
        f"{OVERALL} > power",
        f"{OVERALL} > method = F test",
        "showing a difference, where two extreme levels differ by the difference",
        "F test: noncentral F with λ = ∑i ni (μi − μ̄)² / σ²",
        ("Cohen 1988",),
    ),
    "of a contrast": Shown(
        "oat-drying",
        "planned_power > rows > trend with temperature: linear > power",
        "",
        "showing the linear trend",
        "noncentral t with noncentrality d / (σ √(∑i wi² / ni))",
    ),
    "of one pair under tukey-kramer": Shown(
        "oat-drying",
        f"{ONE_PAIR} > power",
        f"{ONE_PAIR} > method = Tukey-Kramer",
        "showing a given pair",
        "under the family’s own critical value",
    ),
    "of every pair under tukey-kramer": Shown(
        "oat-drying",
        f"{EVERY_PAIR} > power",
        f"{EVERY_PAIR} > method = Tukey-Kramer",
        "showing every pair",
        "(any-pair and all-pairs power): by integration over the level means and s",
        ("Ramsey 1978",),
    ),
    "against the reference under dunnett": Shown(
        "oat-drying",
        f"{DUNNETT} > power",
        f"{DUNNETT} > question = hotter than 105 °C gives more",
        "hotter than 105 °C gives more (Dunnett, single-step) showing every level",
        "(any-pair and all-pairs power): by integration over the level means and s",
        ("Ramsey 1978",),
    ),
    "of equivalence": Shown(
        "holm over the responses",
        "planned_power > rows > near > power",
        "planned_power > rows > near > method = two one-sided t tests, pooled variance, Holm",
        "showing equivalence of a given pair",
        "by integration over the distribution of s; it is not the sum of two tails",
        ("Phillips 1990",),
    ),
    "values for the target": Shown(
        "oat-drying",
        f"{OVERALL} > n_for_target > 0",
        "",
        "The target is a power of 90 %",
        "Nothing here was computed from the data",
    ),
    "detectable difference": Shown(
        "oat-drying",
        f"{OVERALL} > detectable_difference",
        "",
        "Detectable: the smallest difference with the target power at the planned numbers",
        "Nothing here was computed from the data",
    ),
    "half-width": Shown(
        "holm over the responses",
        "planned_power > rows > near > half_width",
        "",
        "Half-width",
        "Half-width of an interval: c σ √(∑i wi² / ni)",
    ),
}
ALLOCATIONS = {
    "equal": Shown(
        "oat-drying",
        f"{OVERALL} > n_for_target > 4",
        "planned_power > allocation = equal",
        "6 at each level",
        "Nothing here was computed from the data",
    ),
    "control": Shown(
        "holm over the responses",
        f"{OVERALL} > n_for_target > 0",
        "planned_power > allocation = control",
        "√(k − 1) times as many values as each other level",
        "Numbers sought give the reference √(k − 1) times the values of each other level",
        ("Dunnett 1955",),
    ),
}

# The quantities of criteria: the study, the name in the report, the unit, the limit.
CRITERIA = {
    "repeatability-sd": (RANDOM, "repeatability standard deviation", "g/100 g", "at most 0.2"),
    "repeatability-rsd": ("pooled", "relative repeatability standard deviation", "%", "at most 2"),
    "repeatability-limit": (RANDOM, "repeatability limit", "g/100 g", "at most 0.5"),
    "between-sd": (RANDOM, "between-level standard deviation", "g/100 g", "at most 0.1"),
    "between-rsd": (RANDOM, "relative between-level standard deviation", "%", "at most 2"),
    "total-sd": (RANDOM, "reproducibility standard deviation", "g/100 g", "at most 0.2"),
    "total-rsd": (RANDOM, "relative reproducibility standard deviation", "%", "at most 5"),
    "largest-difference": ("pooled", "largest difference of two level means", "g/100 g", "at most 0.1"),
    "largest-difference-percent": (
        "pooled",
        "largest difference of two level means, of the mean of all values",
        "%",
        "at most 5",
    ),
    "level-mean": ("pooled", "mean of 20", "g/100 g", "at least 1.5"),
    "level-sd": ("pooled", "standard deviation of 20", "g/100 g", "at most 0.1"),
    "level-rsd": ("pooled", "relative standard deviation of 20", "%", "at most 3"),
}
