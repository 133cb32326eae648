"""The findings of a run: typed values, and the document `findings.json` made from them.

Quantities that are rational, or the square root of a rational, stay exact here (`Fraction`, `Root`) and
become the correctly rounded double in the document. Quantities through a distribution function are floats
already rounded to 12 significant digits.
"""

from collections.abc import Mapping
from dataclasses import dataclass, field
from fractions import Fraction

from assayfolio.canonical import Json, canonical_bytes
from assayfolio.exact import Exact, ExactSums, Root, to_double

FORMAT = "assayfolio-findings/1"

DIFFERENCE_SHOWN = "difference shown"
DIFFERENCE_NOT_SHOWN = "difference not shown"
NOT_ASSESSABLE = "not assessable"

Interval = tuple[float | None, float | None]


@dataclass(frozen=True, slots=True)
class LevelFindings:
    """One level: n, mean, standard deviation and their intervals (pooled error, N - k degrees of freedom).

    `sd_ci` is the chi-square interval of this level's own standard deviation with n - 1 degrees of freedom.
    `sd` and `sd_ci` are None where n = 1, `sd_ci` also where all values of the level are equal; `ci` is None
    where inference is not reported.
    """

    level: str
    n: int
    mean: Fraction
    sd: Root | None
    sd_ci: Interval | None
    minimum: Fraction
    maximum: Fraction
    ci: Interval | None
    sums: ExactSums


@dataclass(frozen=True, slots=True)
class Source:
    """One source of variation: sum of squares, degrees of freedom, mean square (None where df = 0)."""

    ss: Fraction
    df: int
    ms: Fraction | None


@dataclass(frozen=True, slots=True)
class AnovaFindings:
    """The analysis of variance. `f` and what follows from it are None where inference is not reported."""

    between: Source
    within: Source
    total: Source
    residual_sd: Root | None
    r_squared: Fraction | None
    f: Fraction | None
    p: float | None
    log10_p: float | None
    f_critical: float | None
    verdict: str


@dataclass(frozen=True, slots=True)
class ComparisonRow:
    """One comparison. `ci` is None where the method has no interval; an open end is None."""

    label: str
    estimate: Fraction
    se: Root
    df: int
    statistic: Exact
    p: float
    p_adjusted: float
    log10_p_adjusted: float
    ci: Interval | None
    verdict: str


@dataclass(frozen=True, slots=True)
class ComparisonFamily:
    """A registered family of comparisons with its own error rate."""

    name: str
    adjust: str
    alternative: str
    registered: bool
    family_size: int
    rows: tuple[ComparisonRow, ...]


@dataclass(frozen=True, slots=True)
class CheckFindings:
    """A check that informs and never chooses: statistic, degrees of freedom, p, and a note.

    `statistic` and `p` are None where the check is not assessable; the note then says why.
    """

    name: str
    statistic: Exact | float | None
    df: tuple[int, ...] | None
    p: float | None
    note: str


@dataclass(frozen=True, slots=True)
class NotReported:
    """Something that was asked for and cannot be given, with the reason."""

    what: str
    reason: str


@dataclass(frozen=True, slots=True)
class ResponseFindings:
    """All findings on one response. `comparisons` keeps the order of the plan."""

    response: str
    unit: str | None
    alpha: Fraction
    levels: tuple[LevelFindings, ...]
    anova: AnovaFindings
    comparisons: tuple[ComparisonFamily, ...] = ()
    checks: tuple[CheckFindings, ...] = ()


@dataclass(frozen=True, slots=True)
class Findings:
    """The findings of a study: one entry a response, and what could not be reported."""

    study: str
    responses: tuple[ResponseFindings, ...]
    not_reported: tuple[NotReported, ...] = field(default=())


def findings_document(findings: Findings) -> Mapping[str, Json]:
    """`findings` as the value of `findings.json`: doubles, texts, lists; keys as published."""
    return {
        "format": FORMAT,
        "study": findings.study,
        "responses": {response.response: _response(response) for response in findings.responses},
        "exclusions": [],
        "deviations": [],
        "not_reported": [{"what": item.what, "reason": item.reason} for item in findings.not_reported],
    }


def findings_bytes(findings: Findings) -> bytes:
    """`findings.json`: the document as canonical JSON (RFC 8785)."""
    return canonical_bytes(findings_document(findings))


def _number(value: Exact | float | int | None) -> float | int | None:
    if isinstance(value, Fraction | Root):
        return to_double(value)
    return value


def _interval(interval: Interval | None) -> Json:
    return None if interval is None else [interval[0], interval[1]]


def _response(found: ResponseFindings) -> Mapping[str, Json]:
    document: dict[str, Json] = {
        "unit": found.unit,
        "alpha": to_double(found.alpha),
        "levels": [_level(level) for level in found.levels],
        "anova": _anova(found.anova),
    }
    if found.comparisons:
        document["comparisons"] = [_family(family) for family in found.comparisons]
    if found.checks:
        document["checks"] = [
            {
                "name": check.name,
                "statistic": _number(check.statistic),
                "df": None if check.df is None else list(check.df),
                "p": check.p,
                "note": check.note,
            }
            for check in found.checks
        ]
    return document


def _level(level: LevelFindings) -> Mapping[str, Json]:
    return {
        "level": level.level,
        "n": level.n,
        "mean": _number(level.mean),
        "sd": _number(level.sd),
        "sd_ci": _interval(level.sd_ci),
        "min": _number(level.minimum),
        "max": _number(level.maximum),
        "ci": _interval(level.ci),
        "sums": {
            "n": str(level.sums.n),
            "sum": level.sums.sum_text,
            "sum_of_squares": level.sums.sum_of_squares_text,
        },
    }


def _anova(anova: AnovaFindings) -> Mapping[str, Json]:
    return {
        "between": _source(anova.between),
        "within": _source(anova.within),
        "total": {"ss": _number(anova.total.ss), "df": anova.total.df},
        "residual_sd": _number(anova.residual_sd),
        "r_squared": _number(anova.r_squared),
        "f": _number(anova.f),
        "p": anova.p,
        "log10_p": anova.log10_p,
        "f_critical": anova.f_critical,
        "verdict": anova.verdict,
    }


def _source(source: Source) -> Mapping[str, Json]:
    return {"ss": _number(source.ss), "df": source.df, "ms": _number(source.ms)}


def _family(family: ComparisonFamily) -> Mapping[str, Json]:
    return {
        "name": family.name,
        "adjust": family.adjust,
        "alternative": family.alternative,
        "registered": family.registered,
        "family_size": family.family_size,
        "rows": [
            {
                "label": row.label,
                "estimate": _number(row.estimate),
                "se": _number(row.se),
                "df": row.df,
                "statistic": _number(row.statistic),
                "p": row.p,
                "p_adjusted": row.p_adjusted,
                "log10_p_adjusted": row.log10_p_adjusted,
                "ci": _interval(row.ci),
                "verdict": row.verdict,
            }
            for row in family.rows
        ],
    }
