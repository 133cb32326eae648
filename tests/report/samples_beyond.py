"""Invented studies that ask for more than differences of means: equivalence, spread, precision, several "
"responses."""

from collections.abc import Callable
from dataclasses import replace
from fractions import Fraction

from assayfolio.observations.values import Observations
from assayfolio.report.facts import ReportInput
from assayfolio.study.plan import (
    AgainstReference,
    ChecksPlan,
    Contrast,
    ContrastFamily,
    Criterion,
    DataPlan,
    DesignPlan,
    EquivalencePlan,
    OutlierPlan,
    PowerPlan,
    PrecisionPlan,
    SpreadPlan,
    Trend,
    WeightedSum,
)
from report.samples import (
    HERE,
    against,
    all_pairs,
    invented,
    observations,
    report_input,
    study,
)

EVERY_CHECK = ChecksPlan(
    ("brown-forsythe", "levene", "bartlett", "cochran"), ("shapiro-wilk", "anderson-darling")
)
EVERY_OUTLIER_TEST = OutlierPlan(("grubbs", "grubbs-double", "cochran"), HERE)


def equivalence(name: str, **given: object) -> EquivalencePlan:
    """An equivalence family of the plan; what is not given is absent."""
    absent = EquivalencePlan(name, None, None, None, None, None, None, None, "none", None, None, HERE)
    return replace(absent, **given)  # type: ignore[arg-type]


def criterion(quantity: str, **given: object) -> Criterion:
    """A criterion of the plan; what is not given is absent."""
    return replace(Criterion(quantity, None, None, None, None, None, HERE), **given)  # type: ignore[arg-type]


def ordered(seen: Observations) -> Observations:
    """The observations with their lines as the measuring order."""
    return replace(seen, rows=tuple(replace(row, order=row.line - 1) for row in seen.rows))


INSTRUMENTS = ("reference bench", "rapid bench", "near-infrared bench", "near-infrared portable")


def two_responses(across: str = "bonferroni", adjust: str = "dunnett") -> ReportInput:
    """Two responses on four instruments, every part of a plan for fixed levels."""
    sizes = dict.fromkeys(INSTRUMENTS, 8)
    ash = observations(
        invented(dict(zip(INSTRUMENTS, (0.712, 0.716, 0.709, 0.731), strict=True)), 0.009, sizes, 3, 811),
        "ash",
        "instrument",
    )
    protein = observations(
        invented(dict(zip(INSTRUMENTS, (9.42, 9.47, 9.41, 9.31), strict=True)), 0.06, sizes, 2, 4711),
        "protein",
        "instrument",
    )
    ash, protein = ordered(ash), ordered(protein)
    reference = INSTRUMENTS[0]
    quarters = (
        WeightedSum(
            "near-infrared against wet chemistry",
            tuple(zip(INSTRUMENTS, map(Fraction, ("-1/2", "-1/2", "1/2", "1/2")), strict=True)),
        ),
        WeightedSum("within wet chemistry", ((reference, Fraction(-1)), (INSTRUMENTS[1], Fraction(1)))),
        WeightedSum("within near-infrared", ((INSTRUMENTS[2], Fraction(-1)), (INSTRUMENTS[3], Fraction(1)))),
    )
    plan = study(
        ash,
        title="Ash and protein in rye flour by four instruments",
        name="RYE-310",
        checks=EVERY_CHECK,
        comparisons=(
            against(reference, adjust, name="each instrument against the reference bench"),
            ContrastFamily(
                "planned contrasts", quarters, "sidak" if adjust == "dunnett" else "holm", "two-sided", HERE
            ),
        ),
    )
    plan = replace(
        plan,
        data=DataPlan(
            ash.file,
            ("ash", "protein"),
            "instrument",
            units=(("ash", "g/100 g"), ("protein", "g/100 g")),
            order="position",
            levels=INSTRUMENTS,
            replicates=8,
        ),
        design=DesignPlan(across_responses=across),  # type: ignore[arg-type]
        equivalence=(
            equivalence(
                "ash within 0.02 g/100 g",
                against=reference,
                lower=Fraction("-0.02"),
                upper=Fraction("0.02"),
                margin_source="invented specification RF-12, section 4",
                adjust="holm",
                response="ash",
            ),
            equivalence(
                "protein within 2 percent",
                against=reference,
                lower_percent=Fraction(-2),
                upper_percent=Fraction(2),
                margin_source="invented specification RF-12, section 5",
                adjust="bonferroni",
                response="protein",
            ),
            equivalence(
                "protein is not lower by 0.15 g/100 g or more",
                against=reference,
                lower=Fraction("-0.15"),
                response="protein",
            ),
        ),
        spread=SpreadPlan(reference, "bonferroni" if across != "holm" else "holm", HERE),
        outliers=EVERY_OUTLIER_TEST,
        power=PowerPlan(
            Fraction("0.02"), Fraction("0.009"), Fraction(9, 10), Fraction(0), "control", "ash", HERE
        ),
        criteria=(
            criterion("largest-difference", at_most=Fraction("0.03"), response="ash"),
            criterion("level-rsd", level=INSTRUMENTS[3], at_most=Fraction("2.5"), response="ash"),
            criterion(
                "level-mean",
                level=reference,
                at_least=Fraction("9.4"),
                at_most=Fraction("9.6"),
                response="protein",
            ),
        ),
    )
    return report_input(plan, ash, protein)


def separate_variances(omnibus: str = "welch") -> ReportInput:
    """Four methods of unequal precision, a variance for each."""
    names = ("titration", "refractometer", "strip kit", "enzymatic kit")
    values: dict[str, list[str]] = {}
    for name, mean, spread, n, seed in zip(
        names, (64.8, 65.2, 66.0, 64.9), (0.12, 0.3, 0.8, 0.45), (7, 9, 8, 6), (3, 14, 15, 92), strict=True
    ):
        values |= invented({name: mean}, spread, {name: n}, 2, seed)
    seen = observations(values, "sugar", "method")
    kits = (
        WeightedSum(
            "kits − instruments",
            tuple(zip(names, map(Fraction, ("-1/2", "-1/2", "1/2", "1/2")), strict=True)),
        ),
        WeightedSum("strip kit − enzymatic kit", ((names[2], Fraction(1)), (names[3], Fraction(-1)))),
    )
    plan = study(
        seen,
        title="Sugar in beet syrup by four methods of unequal precision",
        name="SYR-204",
        unit="g/100 g",
        comparisons=(
            all_pairs("games-howell", "all pairs of methods"),
            against(names[0], "holm", "greater", name="above titration"),
            ContrastFamily("kits and instruments", kits, "bonferroni", "two-sided", HERE),
        ),
    )
    plan = replace(
        plan,
        design=DesignPlan(variances="separate", omnibus=omnibus),  # type: ignore[arg-type]
        equivalence=(
            equivalence(
                "equivalent to titration within 0.5 g/100 g",
                against=names[0],
                lower=Fraction("-0.5"),
                upper=Fraction("0.5"),
                margin_source="invented contract of supply, annex 2",
                adjust="holm",
            ),
            equivalence(
                "all pairs within −1 to 2",
                pairs="all",
                lower=Fraction(-1),
                upper=Fraction(2),
                adjust="bonferroni",
                alpha=Fraction(1, 40),
            ),
            equivalence(
                "not higher by 1.5 percent", against=names[0], upper_percent=Fraction(3, 2), adjust="holm"
            ),
        ),
        spread=SpreadPlan(names[0], "holm", HERE),
    )
    return report_input(plan, seen)


def random_days() -> ReportInput:
    """Ten days drawn at random, three values on each."""
    days = [f"day {number}" for number in range(1, 11)]
    shift = invented(dict.fromkeys(days, 5.0), 0.02, dict.fromkeys(days, 1), 4, 6)
    means = {day: float(shift[day][0]) for day in days}
    return random_days_on(invented(means, 0.02, dict.fromkeys(days, 3), 3, 1234), "intermediate-precision")


def random_days_on(values: dict[str, list[str]], conditions: str | None) -> ReportInput:
    """Precision from days drawn at random with these values."""
    seen = observations(values, "acidity", "day")
    plan = study(
        seen,
        title="Precision of the acidity of cider vinegar",
        name="VNG-118",
        unit="g/100 mL",
        checks=ChecksPlan(("cochran",), ("shapiro-wilk",)),
    )
    plan = replace(
        plan,
        design=DesignPlan(effects="random"),
        outliers=OutlierPlan(("grubbs", "cochran"), HERE),
        precision=PrecisionPlan(True, Fraction(19, 20), "day and analyst", conditions, HERE),  # type: ignore[arg-type]
        criteria=(
            criterion("repeatability-rsd", at_most=Fraction("0.6")),
            criterion("total-rsd", at_most=Fraction("0.8")),
        ),
    )
    return report_input(plan, seen)


def no_spread_between_days() -> ReportInput:
    """Days of unequal numbers whose means lie closer than their scatter allows: a negative component."""
    values = {
        f"day {number}": [
            f"{5 + shift / 1000:.3f}" for shift in (-21 - number, number - 4, 25)[: 2 + number % 2]
        ]
        for number in range(1, 8)
    }
    values["day 8"] = ["4.979", "5.001", "5.019", "4.998"]
    return random_days_on(values, None)


def trend() -> ReportInput:
    """Five temperatures: a trend up to the third degree, and one-sided comparisons with the middle one."""
    means = {"80": 9.61, "95": 9.8, "105": 9.93, "120": 10.02, "140": 10.31}
    seen = observations(invented(means, 0.1, dict.fromkeys(means, 6), 2, 77001), "loss", "temperature")
    ends = (
        WeightedSum("hot against cold", (("80", Fraction(-1)), ("140", Fraction(1)))),
        WeightedSum(
            "thirds",
            (("80", Fraction(1, 3)), ("95", Fraction(1, 3)), ("105", Fraction(1, 3)), ("140", Fraction(-1))),
        ),
    )
    plan = study(
        seen,
        title="Loss on drying of oat flakes at five temperatures",
        name="OAT-077",
        unit="g/100 g",
        comparisons=(
            Trend("trend with temperature", 3, (), "holm", "two-sided", HERE),
            Trend("slope", 1, tuple((name, Fraction(name) / 10) for name in means), "none", "greater", HERE),
            against("105", "dunnett-step-down", name="each temperature against 105 °C"),
            against("105", "dunnett", "greater", name="hotter than 105 °C gives more"),
            all_pairs("scheffe", "all pairs, as contrasts"),
            ContrastFamily("ends", ends, "hochberg", "two-sided", HERE),
            Contrast("one end", (("80", Fraction(-1)), ("95", Fraction(1))), "scheffe", "two-sided", HERE),
        ),
        checks=ChecksPlan(("brown-forsythe", "bartlett"), ("anderson-darling",)),
    )
    return report_input(replace(plan, outliers=OutlierPlan(("grubbs",), HERE)), seen)


def sixty_levels() -> ReportInput:
    """Sixty lots with long names against one, every test that comes once a level or once a pair with it."""
    names = [f"lot {number:02d} of the autumn harvest, warehouse {number % 7}" for number in range(1, 61)]
    means = {name: 20 + 0.01 * (place % 9) for place, name in enumerate(names)}
    seen = observations(invented(means, 0.08, dict.fromkeys(names, 4), 2, 60), "content", "lot")
    plan = study(
        seen,
        title="Content of sixty lots against one",
        name="LOT-060",
        unit="mg",
        comparisons=(against(names[0], "dunnett"),),
        checks=EVERY_CHECK,
    )
    plan = replace(
        plan,
        equivalence=(
            equivalence(
                "within 1 percent",
                against=names[0],
                lower_percent=Fraction(-1),
                upper_percent=Fraction(1),
                adjust="holm",
                margin_source="invented",
            ),
        ),
        spread=SpreadPlan(names[0], "holm", HERE),
        outliers=EVERY_OUTLIER_TEST,
    )
    return report_input(plan, seen)


def nothing_to_compare() -> ReportInput:
    """Everything planned, and values that do not vary within any level."""
    seen = observations(
        {"scale 1": ["5.02"] * 4, "scale 2": ["5.03"] * 4, "scale 3": ["5.02"] * 4}, "mass", "scale"
    )
    plan = study(
        seen,
        title="One weight on three scales, everything planned",
        name="NIL-2",
        unit="g",
        comparisons=(AgainstReference("against scale 1", "scale 1", "dunnett", "two-sided", HERE),),
        checks=EVERY_CHECK,
    )
    plan = replace(
        plan,
        equivalence=(
            equivalence(
                "within 0.1 g", pairs="all", lower=Fraction(-1, 10), upper=Fraction(1, 10), adjust="holm"
            ),
        ),
        spread=SpreadPlan("scale 1", "holm", HERE),
        outliers=EVERY_OUTLIER_TEST,
        precision=PrecisionPlan(True, Fraction(19, 20), None, None, HERE),
        criteria=(
            criterion("repeatability-rsd", at_most=Fraction(1)),
            criterion("level-mean", level="scale 2", at_most=Fraction("5.03")),
        ),
    )
    return report_input(plan, seen)


CASES_BEYOND: dict[str, Callable[[], ReportInput]] = {
    "two responses": two_responses,
    "two responses by holm": lambda: two_responses("holm", "holm"),
    "separate variances": separate_variances,
    "brown-forsythe for means": lambda: separate_variances("brown-forsythe"),
    "random days": random_days,
    "no spread between days": no_spread_between_days,
    "trend": trend,
    "sixty levels": sixty_levels,
    "nothing to compare": nothing_to_compare,
}
