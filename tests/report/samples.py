"""Invented studies with invented data, as the report gets them: one for each case a page has to hold."""

import hashlib
from collections.abc import Callable
from fractions import Fraction

from assayfolio.errors import Place
from assayfolio.evaluation.apply import evaluate
from assayfolio.exact import parse_decimal
from assayfolio.findings_document import findings_bytes
from assayfolio.observations.values import CountFlow, Observation, Observations, RawFile
from assayfolio.report.facts import AttachedFile, InputFacts, ReportInput, RunFacts
from assayfolio.study.plan import (
    AgainstReference,
    AllPairs,
    ChecksPlan,
    Comparison,
    Contrast,
    DataPlan,
    DesignPlan,
    Laboratory,
    SignOff,
    StudyDefinition,
)

HERE = Place("study.yaml", 1, 1)
SIGN_OFF = (
    SignOff("author", "I performed this analysis as planned"),
    SignOff("reviewer", "I checked data, plan and result"),
    SignOff("approver", "I approve this report"),
)
BOTH_CHECKS = ChecksPlan(("brown-forsythe",), ("shapiro-wilk",))
LABORATORY = Laboratory(
    name="Tarn Valley Water Laboratory",
    address=("3 Weir Lane", "Tarn Valley"),
    note="Invented laboratory: every name and every value in this report is made up.",
)


def tally(seed: int) -> Callable[[], int]:
    """A small generator of whole numbers for invented data (the recurrence of Park and Miller)."""
    state = seed

    def step() -> int:
        nonlocal state
        state = state * 48271 % 2147483647
        return state

    return step


def wobble(step: Callable[[], int]) -> float:
    """A number around zero with a standard deviation near one, made of twelve even ones."""
    return sum(step() / 2147483647 for _ in range(12)) - 6


def invented(
    means: dict[str, float], spread: float, sizes: dict[str, int], places: int, seed: int
) -> dict[str, list[str]]:
    step = tally(seed)
    return {
        level: [f"{mean + spread * wobble(step):.{places}f}" for _ in range(sizes[level])]
        for level, mean in means.items()
    }


def observations(
    values: dict[str, list[str]], response: str = "nitrate", factor: str = "method"
) -> Observations:
    order = [(level, place) for level in values for place in range(len(values[level]))]
    order.sort(key=lambda pair: (pair[1], list(values).index(pair[0])))
    rows = tuple(
        Observation(line, level, parse_decimal(values[level][place]), values[level][place])
        for line, (level, place) in enumerate(order, start=2)
    )
    digest = hashlib.sha256(repr(rows).encode()).hexdigest()
    return Observations(
        files=(RawFile("data/values.csv", 40 + 14 * len(rows), digest),),
        response=response,
        factor=factor,
        levels=tuple(values),
        extra_columns=(),
        rows=rows,
        flow=tuple(
            CountFlow(level, len(texts), 0, 0, 0, 0, 0, len(texts)) for level, texts in values.items()
        ),
    )


def study(
    seen: Observations,
    *,
    title: str = "Nitrate in drinking water by four methods",
    comparisons: tuple[Comparison, ...] = (),
    checks: ChecksPlan = BOTH_CHECKS,
    unit: str | None = "mg/L",
    sign_off: tuple[SignOff, ...] = SIGN_OFF,
    alpha: Fraction = Fraction(1, 20),
    name: str = "WTR-017",
) -> StudyDefinition:
    return StudyDefinition(
        study=name,
        title=title,
        purpose="Find out whether the methods in use give the same mean result on one homogenised sample.",
        data=DataPlan(seen.file, (seen.response,), seen.factor, unit=unit, levels=seen.levels),
        design=DesignPlan(),
        alpha=alpha,
        comparisons=comparisons,
        equivalence=(),
        spread=None,
        outliers=None,
        checks=checks,
        precision=None,
        power=None,
        criteria=(),
        sign_off=sign_off,
        places=(),
    )


def report_input(
    definition: StudyDefinition, *observed: Observations, laboratory: Laboratory = LABORATORY
) -> ReportInput:
    findings = evaluate(definition, observed)
    raw = observed[0].files[0]
    document = findings_bytes(findings)
    yaml = f"study: {definition.study}\ntitle: {definition.title}\n".encode()
    digest = hashlib.sha256(yaml).hexdigest()
    run = RunFacts(
        study=definition.study,
        number=1,
        started_utc="2026-11-30T09:58:31Z",
        started_local="2026-11-30T10:58:31+01:00",
        actor="j.meadow",
        host="bench-4",
        inputs=(
            InputFacts("study definition", "configs/nitrate.yaml", "data/study.yaml", len(yaml), digest),
            InputFacts("raw data", "configs/data/values.csv", "data/inputs/values.csv", raw.size, raw.sha256),
            InputFacts("laboratory settings", "configs/lab.yaml", "data/context/lab.yaml", 312, "5e" * 32),
        ),
        findings_sha256=hashlib.sha256(document).hexdigest(),
        trail_seq=41,
        trail_sha256="a7" * 32,
        python="3.11.7",
        platform="Linux x86_64, glibc 2.36",
        software=(
            ("assayfolio", "0.1.0"),
            ("jinja2", "3.1.6"),
            ("numpy", "2.4.6"),
            ("scipy", "1.17.1"),
            ("weasyprint", "70.0"),
        ),
        native_libraries=(
            ("pango", "1.50.12"),
            ("harfbuzz", "6.0.0"),
            ("fontconfig", "2.14.1"),
            ("zlib", "1.2.13"),
        ),
        self_check="Before the run, 5 certified references were recomputed and agreed to every digit.",
    )
    attachments = (
        AttachedFile("study.yaml", "application/yaml", "Study definition", "Source", yaml),
        AttachedFile("values.csv", "text/csv", "Raw data", "Source", b"method,nitrate\n"),
        AttachedFile("findings.json", "application/json", "Findings", "Data", document),
    )
    return ReportInput(definition, laboratory, observed, findings, run, attachments)


def all_pairs(adjust: str = "tukey-kramer", name: str = "all pairs") -> AllPairs:
    return AllPairs(name, adjust, HERE)  # type: ignore[arg-type]


def against(
    reference: str, adjust: str = "bonferroni", alternative: str = "two-sided", name: str = ""
) -> AgainstReference:
    return AgainstReference(name or f"each method against {reference}", reference, adjust, alternative, HERE)  # type: ignore[arg-type]


def balanced() -> ReportInput:
    """Four methods, six values each."""
    means = {"ion chromatography": 10.02, "kit A": 10.05, "kit B": 10.34, "electrode": 10.21}
    seen = observations(invented(means, 0.09, dict.fromkeys(means, 6), 2, 20261))
    weights = (
        ("ion chromatography", Fraction(-1, 2)),
        ("electrode", Fraction(-1, 2)),
        ("kit A", Fraction(1, 2)),
        ("kit B", Fraction(1, 2)),
    )
    kits = Contrast("kits against instruments", weights, "none", "two-sided", HERE)
    plan = study(seen, comparisons=(against("ion chromatography", "holm"), all_pairs(), kits))
    return report_input(plan, seen)


def unequal() -> ReportInput:
    """Six analysts with unequal numbers of values, every kind of family."""
    means = {
        "analyst 1": 98.4,
        "analyst 2": 99.1,
        "analyst 3": 98.7,
        "analyst 4": 97.2,
        "analyst 5": 98.9,
        "analyst 6": 99.6,
    }
    sizes = dict(zip(means, (8, 5, 7, 9, 4, 6), strict=True))
    seen = observations(invented(means, 0.7, sizes, 1, 77), "recovery", "analyst")
    weights = (
        ("analyst 1", Fraction(1, 3)),
        ("analyst 2", Fraction(1, 3)),
        ("analyst 3", Fraction(1, 3)),
        ("analyst 4", Fraction(-1, 3)),
        ("analyst 5", Fraction(-1, 3)),
        ("analyst 6", Fraction(-1, 3)),
    )
    families: tuple[Comparison, ...] = (
        all_pairs(),
        against("analyst 1", "sidak", "greater", "above analyst 1"),
        against("analyst 1", "bonferroni", "less", "below analyst 1"),
        against("analyst 4", "holm", name="against analyst 4, stepwise"),
        Contrast("first shift against second shift", weights, "none", "two-sided", HERE),
        all_pairs("none", "all pairs, unadjusted"),
    )
    plan = study(
        seen, title="Recovery of caffeine by six analysts", comparisons=families, unit="%", name="CAF-003"
    )
    return report_input(plan, seen)


def without_scatter() -> ReportInput:
    """Values that do not vary within any level: nothing can be tested."""
    seen = observations(
        {"scale 1": ["5.02"] * 4, "scale 2": ["5.03"] * 4, "scale 3": ["5.02"] * 3}, "mass", "scale"
    )
    return report_input(
        study(seen, title="One weight on three scales", comparisons=(all_pairs(),), unit="g"), seen
    )


def many_levels(count: int = 22, each: int = 5) -> ReportInput:
    """Many lots, every pair of them compared."""
    means = {f"lot {number:03d}": 250 + 1.3 * wobble(tally(number * 991)) for number in range(1, count + 1)}
    seen = observations(invented(means, 1.1, dict.fromkeys(means, each), 1, 5), "content", "lot")
    plan = study(
        seen,
        title=f"Content of {count} lots",
        comparisons=(all_pairs(), against("lot 001", "bonferroni")),
        unit="mg",
    )
    return report_input(plan, seen)


def single_values() -> ReportInput:
    """Two levels with one value only, beside two with several."""
    seen = observations(
        {"a": ["7.1", "7.4", "7.2"], "b": ["7.9"], "c": ["7.0", "7.3"], "d": ["6.2"]}, "pH", "buffer"
    )
    return report_input(
        study(
            seen, title="pH of four buffers", comparisons=(all_pairs("bonferroni"),), unit=None, sign_off=()
        ),
        seen,
    )


def long_names() -> ReportInput:
    """Names of eighty characters, and names that look like markup or template code."""
    names = [
        "liquid chromatography with ultraviolet detection at 254 nm, column kept at 40 °C",
        "liquid chromatography with ultraviolet detection at 254 nm, column kept at 30 °C",
        "<script>alert('x')</script> & {{ 7 * 7 }} {% raw %}",
        "Inductively_coupled_plasma_mass_spectrometry_with_collision_cell_and_helium_gas_",
    ]
    means = dict(zip(names, (4.11, 4.32, 4.08, 4.51), strict=True))
    seen = observations(
        invented(means, 0.12, dict.fromkeys(names, 5), 3, 404),
        "mass fraction of caffeine in dry matter",
        "method & <instrument>",
    )
    plan = study(
        seen,
        title="Mass fraction of caffeine in decaffeinated coffee, long names & <b>markup</b>",
        comparisons=(all_pairs(), against(names[0], "holm")),
        unit="mg/kg",
    )
    return report_input(plan, seen)


def huge_offset() -> ReportInput:
    """Values that share thirteen leading digits."""
    step = tally(13)
    values = {
        name: [f"1000000000000{round(4 + shift + wobble(step), 1)}" for _ in range(6)]
        for name, shift in (("a", 0), ("b", 1.5), ("c", 0.5))
    }
    seen = observations(values, "count", "counter")
    return report_input(
        study(
            seen, title="Readings of three counters", comparisons=(all_pairs(),), unit="counts", name="BIG-1"
        ),
        seen,
    )


def tiny_values() -> ReportInput:
    """Values near ten to the minus thirty, and a probability below any floor."""
    step = tally(31)
    values = {
        name: [f"{shift + 0.01 * wobble(step):.3f}e-30" for _ in range(40)]
        for name, shift in (("a", 1.0), ("b", 9.0), ("c", 3.0))
    }
    seen = observations(values, "cross section", "sample")
    return report_input(
        study(seen, title="Very small numbers", comparisons=(all_pairs("sidak"),), unit="m²", name="TINY-1"),
        seen,
    )


def large_file() -> ReportInput:
    """More values than can be drawn one by one."""
    means = {"line 1": 20.0, "line 2": 20.4, "line 3": 19.9, "line 4": 20.1}
    seen = observations(invented(means, 0.6, dict.fromkeys(means, 1500), 2, 9), "thickness", "line")
    return report_input(
        study(seen, title="Thickness from four lines", comparisons=(all_pairs(),), unit="µm", name="LRG-1"),
        seen,
    )


CASES_OF_DIFFERENCES: dict[str, Callable[[], ReportInput]] = {
    "balanced": balanced,
    "unequal": unequal,
    "without scatter": without_scatter,
    "many levels": many_levels,
    "single values": single_values,
    "long names": long_names,
    "huge offset": huge_offset,
    "tiny values": tiny_values,
    "large file": large_file,
}
