"""The document `findings.json`, made from findings: doubles, texts, lists; keys as published.

The levels, the analysis of variance and the planned tests are here, every other part in `findings_parts`.
"""

from collections.abc import Callable, Mapping
from typing import TypeVar

from assayfolio.canonical import Json, canonical_bytes
from assayfolio.exact import to_double
from assayfolio.findings import (
    AnovaFindings,
    BrownForsytheMeansFindings,
    ComparisonFamily,
    EffectFindings,
    Findings,
    LevelFindings,
    ResponseFindings,
    Source,
    WelchFindings,
)
from assayfolio.findings_parts import (
    censoring_part,
    check_part,
    criterion_part,
    deviation_part,
    equivalence_part,
    exclusion_part,
    flow_part,
    interval_of,
    number_of,
    outlier_part,
    power_part,
    precision_part,
    spread_part,
)

FORMAT = "assayfolio-findings/1"

Part = TypeVar("Part")


def findings_document(findings: Findings) -> Mapping[str, Json]:
    """`findings` as the value of `findings.json`: doubles, texts, lists; keys as published.

    A key whose analysis was not asked for is absent.
    """
    document: dict[str, Json] = {
        "format": FORMAT,
        "study": findings.study,
        "responses": {response.response: _response(response) for response in findings.responses},
        "exclusions": [exclusion_part(exclusion) for exclusion in findings.exclusions],
        "deviations": [deviation_part(deviation) for deviation in findings.deviations],
        "not_reported": [
            {"what": item.what, "reason": item.reason, "response": item.response}
            for item in findings.not_reported
        ],
    }
    if findings.power is not None:
        document["planned_power"] = power_part(findings.power)
    return document


def findings_bytes(findings: Findings) -> bytes:
    """`findings.json`: the document as canonical JSON (RFC 8785)."""
    return canonical_bytes(findings_document(findings))


def _response(found: ResponseFindings) -> Mapping[str, Json]:
    document: dict[str, Json] = {
        "unit": found.unit,
        "alpha": to_double(found.alpha),
        "omnibus": found.omnibus,
        "levels": [_level(level) for level in found.levels],
        "anova": _anova(found.anova),
    }
    _put(document, "effect", found.effect, _effect)
    _put(document, "welch", found.welch, _welch)
    _put(document, "brown_forsythe_means", found.brown_forsythe_means, _brown_forsythe_means)
    _put_all(document, "comparisons", found.comparisons, _family)
    _put_all(document, "equivalence", found.equivalence, equivalence_part)
    _put(document, "spread", found.spread, spread_part)
    _put_all(document, "checks", found.checks, check_part)
    _put_all(document, "outliers", found.outliers, outlier_part)
    _put(document, "precision", found.precision, precision_part)
    _put_all(document, "criteria", found.criteria, criterion_part)
    _put_all(document, "flow", found.flow, flow_part)
    _put(document, "censoring", found.censoring, censoring_part)
    _put(document, "without_exclusions", found.without_exclusions, _response)
    return document


def _put(document: dict[str, Json], key: str, part: Part | None, form: Callable[[Part], Json]) -> None:
    if part is not None:
        document[key] = form(part)


def _put_all(
    document: dict[str, Json], key: str, parts: tuple[Part, ...], form: Callable[[Part], Json]
) -> None:
    if parts:
        document[key] = [form(part) for part in parts]


def _level(level: LevelFindings) -> Mapping[str, Json]:
    return {
        "level": level.level,
        "n": level.n,
        "mean": number_of(level.mean),
        "sd": number_of(level.sd),
        "sd_ci": interval_of(level.sd_ci),
        "min": number_of(level.minimum),
        "max": number_of(level.maximum),
        "ci": interval_of(level.ci),
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
        "total": {"ss": number_of(anova.total.ss), "df": anova.total.df},
        "residual_sd": number_of(anova.residual_sd),
        "r_squared": number_of(anova.r_squared),
        "f": number_of(anova.f),
        "p": anova.p,
        "log10_p": anova.log10_p,
        "p_adjusted": anova.p_adjusted,
        "f_critical": anova.f_critical,
        "verdict": anova.verdict,
    }


def _source(source: Source) -> Mapping[str, Json]:
    return {"ss": number_of(source.ss), "df": source.df, "ms": number_of(source.ms)}


def _effect(effect: EffectFindings) -> Mapping[str, Json]:
    return {
        "eta_squared": number_of(effect.eta_squared),
        "omega_squared": number_of(effect.omega_squared),
        "epsilon_squared": number_of(effect.epsilon_squared),
        "cohen_f": number_of(effect.cohen_f),
        "cohen_f_ci": interval_of(effect.cohen_f_ci),
        "confidence": to_double(effect.confidence),
    }


def _welch(test: WelchFindings) -> Mapping[str, Json]:
    return {
        "f": number_of(test.f),
        "df1": test.df1,
        "df2": number_of(test.df2),
        "p": test.p,
        "log10_p": test.log10_p,
        "p_adjusted": test.p_adjusted,
        "verdict": test.verdict,
    }


def _brown_forsythe_means(test: BrownForsytheMeansFindings) -> Mapping[str, Json]:
    return {
        "f": number_of(test.f),
        "df1": test.df1,
        "df2": number_of(test.df2),
        "p": test.p,
        "log10_p": test.log10_p,
        "p_adjusted": test.p_adjusted,
        "df1_mehrotra": number_of(test.df1_mehrotra),
        "p_mehrotra": test.p_mehrotra,
        "verdict": test.verdict,
    }


def _family(family: ComparisonFamily) -> Mapping[str, Json]:
    return {
        "name": family.name,
        "kind": family.kind,
        "against": family.against,
        "adjust": family.adjust,
        "method": family.method,
        "alternative": family.alternative,
        "registered": family.registered,
        "family_size": family.family_size,
        "responses": family.responses,
        "across_responses": family.across_responses,
        "critical": family.critical,
        "rows": [
            {
                "label": row.label,
                "estimate": number_of(row.estimate),
                "se": number_of(row.se),
                "df": row.df,
                "statistic": number_of(row.statistic),
                "p": row.p,
                "p_adjusted": row.p_adjusted,
                "log10_p_adjusted": row.log10_p_adjusted,
                "ci": interval_of(row.ci),
                "critical": row.critical,
                "verdict": row.verdict,
            }
            for row in family.rows
        ],
    }
