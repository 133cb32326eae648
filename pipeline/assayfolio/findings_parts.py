"""Parts of the document `findings.json` beside the tests of means: intake, equivalence, precision ..."""

from collections.abc import Mapping
from fractions import Fraction

from assayfolio.canonical import Json
from assayfolio.exact import Exact, Root, to_double
from assayfolio.findings import (
    CheckFindings,
    CriterionFindings,
    EquivalenceFamily,
    Interval,
    OutlierFindings,
    PowerFindings,
    PrecisionFindings,
    SpreadFindings,
)
from assayfolio.findings_intake import (
    CensoringFindings,
    Deviation,
    ExclusionFindings,
    FlowFindings,
    PolicyFamily,
    PolicyFindings,
)


def number_of(value: Exact | float | int | None) -> float | int | None:
    """A quantity as the document gives it: what is exact becomes the nearest double."""
    if isinstance(value, Fraction | Root):
        return to_double(value)
    return value


def interval_of(interval: Interval | None) -> Json:
    """An interval as a list of its two ends; null for an open end and for no interval."""
    return None if interval is None else [interval[0], interval[1]]


def flow_part(counts: FlowFindings) -> Mapping[str, Json]:
    """The counts of one level from received to analysed."""
    return {
        "level": counts.level,
        "received": counts.received,
        "missing": counts.missing,
        "below_limit": counts.below_limit,
        "above_limit": counts.above_limit,
        "excluded": counts.excluded,
        "merged": counts.merged,
        "analysed": counts.analysed,
    }


def exclusion_part(found: ExclusionFindings) -> Mapping[str, Json]:
    """One value that a person left out."""
    return {
        "response": found.response,
        "file": found.file,
        "line": found.line,
        "level": found.level,
        "text": found.text,
        "value": number_of(found.value),
        "reason": found.reason,
        "decided_by": found.decided_by,
        "decided_at": found.decided_at,
        "approved_by": found.approved_by,
    }


def deviation_part(deviation: Deviation) -> Mapping[str, Json]:
    """Something that was not done as planned."""
    return {
        "what": deviation.what,
        "reason": deviation.reason,
        "response": deviation.response,
        "lines": list(deviation.lines),
    }


def censoring_part(found: CensoringFindings) -> Mapping[str, Json]:
    """Values beyond a limit, and the result under each policy."""
    return {
        "policy": {"below_limit": found.below_limit, "above_limit": found.above_limit},
        "below": found.below,
        "above": found.above,
        "levels": [
            {
                "level": level.level,
                "received": level.received,
                "below": level.below,
                "above": level.above,
                "below_limits": [number_of(limit) for limit in level.below_limits],
                "above_limits": [number_of(limit) for limit in level.above_limits],
            }
            for level in found.levels
        ],
        "sensitivity": [_policy(one) for one in found.sensitivity],
        "verdicts_agree": found.verdicts_agree,
    }


def _policy(found: PolicyFindings) -> Mapping[str, Json]:
    return {
        "policy": found.policy,
        "planned": found.planned,
        "levels": [{"level": level, "n": n, "mean": number_of(mean)} for level, n, mean in found.levels],
        "p": found.p,
        "p_adjusted": found.p_adjusted,
        "verdict": found.verdict,
        "comparisons": [_policy_family(family) for family in found.comparisons],
        "equivalence": [_policy_family(family) for family in found.equivalence],
        "spread": [] if found.spread is None else _policy_rows(found.spread),
        "criteria": list(found.criteria),
    }


def _policy_family(family: PolicyFamily) -> Mapping[str, Json]:
    return {"name": family.name, "rows": _policy_rows(family)}


def _policy_rows(family: PolicyFamily) -> list[Json]:
    return [
        {
            "label": row.label,
            "estimate": number_of(row.estimate),
            "p_adjusted": row.p_adjusted,
            "verdict": row.verdict,
        }
        for row in family.rows
    ]


def equivalence_part(family: EquivalenceFamily) -> Mapping[str, Json]:
    """A family of equivalence or non-inferiority tests."""
    return {
        "name": family.name,
        "claim": family.claim,
        "against": family.against,
        "scale": family.scale,
        "lower": number_of(family.lower),
        "upper": number_of(family.upper),
        "margin_source": family.margin_source,
        "adjust": family.adjust,
        "method": family.method,
        "alpha": to_double(family.alpha),
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
                "ci": interval_of(row.ci),
                "critical": row.critical,
                "t_lower": number_of(row.t_lower),
                "t_upper": number_of(row.t_upper),
                "p_lower": row.p_lower,
                "p_upper": row.p_upper,
                "p": row.p,
                "p_adjusted": row.p_adjusted,
                "log10_p_adjusted": row.log10_p_adjusted,
                "boundaries": [
                    {
                        "margin": number_of(one.margin),
                        "t": number_of(one.t),
                        "se": number_of(one.se),
                        "df": one.df,
                        "p": one.p,
                    }
                    for one in row.boundaries
                ],
                "verdict": row.verdict,
            }
            for row in family.rows
        ],
    }


def spread_part(spread: SpreadFindings) -> Mapping[str, Json]:
    """The variance ratios against the reference."""
    return {
        "against": spread.against,
        "adjust": spread.adjust,
        "method": spread.method,
        "responses": spread.responses,
        "across_responses": spread.across_responses,
        "rows": [
            {
                "label": row.label,
                "ratio": number_of(row.ratio),
                "df": list(row.df),
                "p": row.p,
                "p_adjusted": row.p_adjusted,
                "ci": interval_of(row.ci),
                "verdict": row.verdict,
            }
            for row in spread.rows
        ],
    }


def check_part(check: CheckFindings) -> Mapping[str, Json]:
    """A check that informs."""
    return {
        "name": check.name,
        "statistic": number_of(check.statistic),
        "df": None if check.df is None else list(check.df),
        "p": check.p,
        "note": check.note,
    }


def outlier_part(found: OutlierFindings) -> Mapping[str, Json]:
    """One outlier test; `line` and `value` are the first of `lines` and `values`.

    `files` is there where the study has several data files.
    """
    document: dict[str, Json] = {
        "test": found.test,
        "about": found.about,
        "level": found.level or None,
        "levels": list(found.levels),
        "line": found.lines[0] if found.lines else None,
        "value": number_of(found.values[0]) if found.values else None,
        "lines": list(found.lines),
        "values": [number_of(value) for value in found.values],
        "statistic": number_of(found.statistic),
        "straggler_limit": found.straggler_limit,
        "outlier_limit": found.outlier_limit,
        "p": found.p,
        "verdict": found.verdict,
        "note": found.note,
    }
    if found.files:
        document["files"] = list(found.files)
    return document


def precision_part(found: PrecisionFindings) -> Mapping[str, Json]:
    """The precision; with fixed levels all but the repeatability is null."""
    return {
        "confidence": to_double(found.confidence),
        "varied": found.varied,
        "repeatability_sd": number_of(found.repeatability_sd),
        "repeatability_sd_ci": interval_of(found.repeatability_sd_ci),
        "repeatability_rsd": number_of(found.repeatability_rsd),
        "repeatability_limit": number_of(found.repeatability_limit),
        "relative_mean": number_of(found.relative_mean),
        "relative_to": found.relative_to,
        "between_sd": number_of(found.between_sd),
        "between_sd_ci": interval_of(found.between_sd_ci),
        "between_interval_method": found.between_interval_method,
        "between_variance_raw": number_of(found.between_variance_raw),
        "between_rsd": number_of(found.between_rsd),
        "total_name": found.total_name,
        "total_sd": number_of(found.total_sd),
        "total_sd_ci": interval_of(found.total_sd_ci),
        "total_sd_ci_satterthwaite": interval_of(found.total_sd_ci_satterthwaite),
        "total_df": found.total_df,
        "total_rsd": number_of(found.total_rsd),
        "total_limit": number_of(found.total_limit),
        "interval_method": found.interval_method,
        "n0": number_of(found.n0),
        "icc": number_of(found.icc),
        "icc_ci": interval_of(found.icc_ci),
        "icc_method": found.icc_method,
        "mean": number_of(found.mean),
        "mean_u": number_of(found.mean_u),
        "mean_df": found.mean_df,
        "mean_method": found.mean_method,
        "mean_ci": interval_of(found.mean_ci),
        "mean_ways": [
            {
                "way": way.way,
                "mean": number_of(way.mean),
                "u": number_of(way.u),
                "df": way.df,
                "ci": interval_of(way.ci),
            }
            for way in found.mean_ways
        ],
    }


def criterion_part(criterion: CriterionFindings) -> Mapping[str, Json]:
    """One limit that was set in advance."""
    return {
        "quantity": criterion.quantity,
        "level": criterion.level,
        "value": number_of(criterion.value),
        "relation": criterion.relation,
        "limit": to_double(criterion.limit),
        "unit": criterion.unit,
        "verdict": criterion.verdict,
    }


def power_part(power: PowerFindings) -> Mapping[str, Json]:
    """The power of the plan."""
    return {
        "response": power.response,
        "unit": power.unit,
        "levels": list(power.levels),
        "replicates": list(power.replicates),
        "alpha": to_double(power.alpha),
        "difference": to_double(power.difference),
        "sigma": to_double(power.sigma),
        "target": to_double(power.target),
        "true_difference": to_double(power.true_difference),
        "allocation": power.allocation,
        "rows": [
            {
                "question": row.question,
                "method": row.method,
                "meaning": row.meaning,
                "power": row.power,
                "n_for_target": None if row.n_for_target is None else list(row.n_for_target),
                "detectable_difference": row.detectable_difference,
                "half_width": row.half_width,
            }
            for row in power.rows
        ],
    }
