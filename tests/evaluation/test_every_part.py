"""`findings.json` of studies that ask for everything: the published keys of every part, and its numbers."""

import json
from collections.abc import Iterator
from decimal import Decimal
from functools import cache
from typing import Any

import pytest
from scipy import stats

from assayfolio.evaluation.apply import evaluate
from assayfolio.findings_document import findings_bytes, findings_document
from support.every_option import PLANS, findings_with_every
from support.studies import demo_study

EFFECT = {
    *("eta_squared", "omega_squared", "epsilon_squared"),
    *("cohen_f", "cohen_f_ci", "confidence"),
}
WELCH = {"f", "df1", "df2", "p", "log10_p", "p_adjusted", "verdict"}
BROWN_FORSYTHE = WELCH | {"df1_mehrotra", "p_mehrotra"}
EQUIVALENCE = {
    *("name", "claim", "against", "scale", "lower", "upper", "margin_source", "adjust", "method", "alpha"),
    *("registered", "family_size", "responses", "across_responses", "critical", "rows"),
}
EQUIVALENCE_ROW = {
    *("label", "estimate", "se", "df", "ci", "p_lower", "p_upper", "p", "p_adjusted"),
    *("log10_p_adjusted", "verdict", "critical", "t_lower", "t_upper", "boundaries"),
}
BOUNDARY = {"margin", "t", "se", "df", "p"}
SPREAD = {"against", "adjust", "method", "responses", "across_responses", "rows"}
SPREAD_ROW = {"label", "ratio", "df", "p", "p_adjusted", "ci", "verdict"}
OUTLIER = {
    *("test", "about", "level", "levels", "line", "value", "lines", "values", "statistic"),
    *("straggler_limit", "outlier_limit", "p", "verdict", "note"),
}
PRECISION = {
    *("confidence", "varied", "repeatability_sd", "repeatability_sd_ci", "repeatability_rsd"),
    *("repeatability_limit", "between_sd", "between_variance_raw", "between_rsd", "total_name"),
    *("total_sd", "total_sd_ci", "total_sd_ci_satterthwaite", "total_df", "total_rsd", "total_limit"),
    *("interval_method", "n0", "icc", "icc_ci", "icc_method"),
    *("mean", "mean_u", "mean_df", "mean_method", "mean_ci", "mean_ways"),
    *("relative_mean", "relative_to", "between_sd_ci", "between_interval_method"),
}
CRITERION = {"quantity", "level", "value", "relation", "limit", "unit", "verdict"}
POWER = {
    *("response", "unit", "levels", "replicates", "alpha", "difference", "sigma", "target"),
    *("true_difference", "allocation", "rows"),
}
POWER_ROW = {
    *("question", "method", "meaning", "power", "n_for_target", "detectable_difference", "half_width"),
}
PARTS = {
    "pooled": {
        *("unit", "alpha", "omnibus", "flow", "levels", "anova", "effect", "comparisons", "equivalence"),
        *("spread", "checks", "outliers", "precision", "criteria"),
    },
    "holm over the responses": {
        *(
            "unit",
            "alpha",
            "omnibus",
            "flow",
            "levels",
            "anova",
            "effect",
            "comparisons",
            "equivalence",
            "checks",
        ),
    },
    "separate variances": {
        *("unit", "alpha", "omnibus", "flow", "levels", "anova", "welch", "brown_forsythe_means"),
        *("comparisons", "equivalence", "spread", "checks", "outliers", "criteria"),
    },
    "random levels": {
        *(
            "unit",
            "alpha",
            "omnibus",
            "flow",
            "levels",
            "anova",
            "checks",
            "outliers",
            "precision",
            "criteria",
        ),
    },
}
PARTS["bonferroni over the responses"] = PARTS["pooled"]


@cache
def text_of(option: str) -> bytes:
    return findings_bytes(findings_with_every(option))


@pytest.fixture(params=PLANS)
def option(request: pytest.FixtureRequest) -> str:
    return str(request.param)


@pytest.fixture
def responses(option: str) -> list[dict[str, Any]]:
    document = json.loads(text_of(option))
    assert list(document["responses"]) == ["ash", "protein"]
    return list(document["responses"].values())


@pytest.mark.requirement("PLAN-7")
def test_a_part_is_there_where_it_was_asked_for_and_nowhere_else(option, responses):
    assert [set(response) for response in responses] == [PARTS[option], PARTS[option]]


def test_published_keys_of_every_part(responses):
    for response in responses:
        for name, keys in (
            ("effect", EFFECT),
            ("welch", WELCH),
            ("brown_forsythe_means", BROWN_FORSYTHE),
            ("spread", SPREAD),
            ("precision", PRECISION),
        ):
            assert set(response.get(name, keys)) == keys, name
        for name, keys in (("equivalence", EQUIVALENCE), ("outliers", OUTLIER), ("criteria", CRITERION)):
            assert all(set(item) == keys for item in response.get(name, [])), name
        rows = [row for family in response.get("equivalence", []) for row in family["rows"]]
        assert all(set(row) == EQUIVALENCE_ROW for row in rows)
        assert all(set(one) == BOUNDARY for row in rows for one in row["boundaries"])
        assert all(set(row) == SPREAD_ROW for row in response.get("spread", {"rows": []})["rows"])


def entries(part: Any) -> Iterator[dict[str, Any]]:
    """Every object of the document, whatever it lies in."""
    if isinstance(part, dict):
        yield part
    for inner in part.values() if isinstance(part, dict) else part if isinstance(part, list) else ():
        yield from entries(inner)


def test_every_probability_is_one_and_has_twelve_digits_at_most(responses):
    names = ("p", "p_adjusted", "p_lower", "p_upper", "p_mehrotra")
    found = [entry[name] for entry in entries(responses) for name in names if entry.get(name) is not None]
    assert len(found) > 2
    for p in found:
        assert 0 <= p <= 1
        assert len(Decimal(repr(p)).normalize().as_tuple().digits) <= 12


def test_adjusting_never_lowers_a_p_and_logarithms_agree(responses):
    rows = [entry for entry in entries(responses) if entry.get("p_adjusted") is not None]
    for row in rows:
        assert row["p_adjusted"] >= row["p"]
        if "log10_p_adjusted" in row:
            assert 10 ** row["log10_p_adjusted"] == pytest.approx(row["p_adjusted"], rel=1e-10)


def test_every_verdict_follows_its_adjusted_p(responses):
    for response in responses:
        families = response.get("equivalence", [])
        levels = [(family["rows"], family["alpha"]) for family in families]
        others = [response["anova"], response.get("welch"), response.get("brown_forsythe_means")]
        tests = [test for test in others if test is not None]
        tests += [row for family in response.get("comparisons", []) for row in family["rows"]]
        tests += response.get("spread", {"rows": []})["rows"]
        levels.append((tests, response["alpha"]))
        for rows, alpha in levels:
            for row in rows:
                assert ("not shown" not in row["verdict"]) == (row["p_adjusted"] <= alpha)


def test_intervals_are_in_order_and_hold_their_estimates(responses):
    held = (
        *(("ci", name) for name in ("mean", "estimate", "ratio")),
        ("sd_ci", "sd"),
        ("cohen_f_ci", "cohen_f"),
        ("repeatability_sd_ci", "repeatability_sd"),
        ("between_sd_ci", "between_sd"),
        ("icc_ci", "icc"),
    )
    count = 0
    for entry in entries(responses):
        for interval, name in held:
            ends, value = entry.get(interval), entry.get(name)
            if ends is None or value is None:
                continue
            low, high = ends
            assert low is None or low <= value, entry
            assert high is None or value <= high, entry
            count += 1
    assert count > 10


def test_the_first_line_and_value_of_an_outlier_stand_by_themselves(option):
    document = json.loads(text_of(option))
    for entry in (entry for entry in entries(document) if "straggler_limit" in entry):
        assert entry["line"] == (entry["lines"] or [None])[0]
        assert entry["value"] == (entry["values"] or [None])[0]


def test_of_what_was_asked_about_the_data_nothing_is_missing(option):
    missing = json.loads(text_of(option))["not_reported"]
    assert [item for item in missing if item["response"] is not None] == []


@pytest.mark.requirement("NUMBERS-5")
def test_a_reviewer_can_recompute_every_test_of_equivalence(responses):
    families = [family for response in responses for family in response.get("equivalence", [])]
    tests = [(family, row, one) for family in families for row in family["rows"] for one in row["boundaries"]]
    assert tests or not families
    for family, row, one in tests:
        upper = one["margin"] == family["upper"]
        p, t = (row["p_upper"], row["t_upper"]) if upper else (row["p_lower"], row["t_lower"])
        assert (one["p"], one["t"]) == (p, t)
        assert stats.t.sf(-t if upper else t, one["df"]) == pytest.approx(p, rel=1e-9)
        if family["scale"] == "units":
            assert (row["estimate"] - one["margin"]) / row["se"] == pytest.approx(t, rel=1e-9)
            assert (one["se"], one["df"]) == (row["se"], row["df"])


@pytest.mark.requirement("NUMBERS-5")
def test_a_reviewer_can_recompute_every_interval(responses):
    families = [family for response in responses for family in response.get("comparisons", [])]
    count = 0
    for family in families:
        assert family["critical"] in {None, *(row["critical"] for row in family["rows"])}
        for row in family["rows"]:
            assert (row["ci"] is None) == (row["critical"] is None)
            for end, sign in zip(row["ci"] or [], (-1, 1), strict=False):
                if end is not None:
                    reach = sign * row["critical"] * row["se"]
                    assert end - row["estimate"] == pytest.approx(reach, rel=1e-9)
                    count += 1
    assert count or not any(row["ci"] for family in families for row in family["rows"])


def test_the_power_of_the_plan_stands_beside_the_responses():
    power = findings_document(evaluate(*demo_study("oat-drying")))["planned_power"]
    assert set(power) == POWER
    assert power["replicates"] == [6] * len(power["levels"])
    assert all(set(row) == POWER_ROW and 0 <= row["power"] <= 1 for row in power["rows"])
