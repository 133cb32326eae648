"""`findings.json`: its published keys, its numbers, its bytes."""

import json
from decimal import Decimal
from fractions import Fraction
from typing import Any

import pytest

from assayfolio.evaluation.apply import evaluate
from assayfolio.findings_document import findings_bytes, findings_document
from support.reference import square_root
from support.studies import demo_study, findings_of

TOP = {"format", "study", "responses", "exclusions", "deviations", "not_reported"}
RESPONSE = {"unit", "alpha", "omnibus", "flow", "levels", "anova", "effect", "comparisons", "checks"}
LEVEL = {"level", "n", "mean", "sd", "sd_ci", "min", "max", "ci", "sums"}
SUMS = {"n", "sum", "sum_of_squares"}
ANOVA = {
    *("between", "within", "total", "residual_sd", "r_squared"),
    *("f", "p", "log10_p", "p_adjusted", "f_critical", "verdict"),
}
FAMILY = {
    *("name", "kind", "against", "adjust", "method", "alternative", "registered", "family_size"),
    *("responses", "across_responses", "critical", "rows"),
}
ROW = {
    *("label", "estimate", "se", "df", "statistic", "p", "p_adjusted"),
    *("log10_p_adjusted", "ci", "critical", "verdict"),
}
CHECK = {"name", "statistic", "df", "p", "note"}
NOT_REPORTED = {"what", "reason", "response"}


@pytest.fixture(params=("brine-chloride", "whey-moisture"))
def name(request: pytest.FixtureRequest) -> str:
    return str(request.param)


@pytest.fixture
def document(name: str) -> dict[str, Any]:
    study, observations = demo_study(name)
    return json.loads(findings_bytes(evaluate(study, observations)))


@pytest.fixture
def response(document: dict[str, Any]) -> dict[str, Any]:
    (only,) = document["responses"].values()
    return only


@pytest.fixture
def values(name: str) -> dict[str, list[Fraction]]:
    _, (observations,) = demo_study(name)
    return {
        level: [Fraction(row.text.replace(",", ".")) for row in observations.rows if row.level == level]
        for level in observations.levels
    }


def is_number(value: object) -> bool:
    return isinstance(value, int | float) and not isinstance(value, bool)


def is_interval(value: object) -> bool:
    return value is None or (
        isinstance(value, list) and len(value) == 2 and all(end is None or is_number(end) for end in value)
    )


@pytest.mark.requirement("REPORT-5")
def test_published_keys(document, response):
    assert set(document) == TOP
    assert set(response) == RESPONSE
    assert set(response["anova"]) == ANOVA
    assert set(response["anova"]["between"]) == set(response["anova"]["within"]) == {"ss", "df", "ms"}
    assert set(response["anova"]["total"]) == {"ss", "df"}
    for level in response["levels"]:
        assert set(level) == LEVEL
        assert set(level["sums"]) == SUMS
    for family in response["comparisons"]:
        assert set(family) == FAMILY
        assert all(set(row) == ROW for row in family["rows"])
    assert all(set(check) == CHECK for check in response["checks"])


def test_types_of_what_the_keys_hold(document, response):
    assert document["format"] == "assayfolio-findings/1"
    assert (document["exclusions"], document["deviations"]) == ([], [])
    assert isinstance(response["unit"], str)
    anova = response["anova"]
    for key in ("residual_sd", "r_squared", "f", "p", "log10_p", "f_critical"):
        assert is_number(anova[key]), key
    assert all(isinstance(anova[source]["df"], int) for source in ("between", "within", "total"))
    for level in response["levels"]:
        assert isinstance(level["n"], int)
        assert is_interval(level["ci"])
        assert is_interval(level["sd_ci"])
        assert all(isinstance(text, str) for text in level["sums"].values())
    for family in response["comparisons"]:
        assert family["registered"] is False
        assert family["family_size"] == len(family["rows"])
        for row in family["rows"]:
            assert isinstance(row["df"], int)
            assert is_interval(row["ci"])
            assert all(is_number(row[key]) for key in ("estimate", "se", "statistic", "p", "p_adjusted"))
            assert isinstance(row["verdict"], str)
    for check in response["checks"]:
        assert is_number(check["statistic"])
        assert is_number(check["p"])
        assert check["df"] is None or all(isinstance(df, int) for df in check["df"])


def test_what_cannot_be_given_stands_with_its_reason():
    equal = {"lot-1": ["1", "1"], "lot-2": ["2"]}
    document = findings_document(findings_of(equal, "comparisons: [{name: c, pairs: all, adjust: holm}]"))
    (response,) = document["responses"].values()
    assert [set(item) for item in document["not_reported"]] == [NOT_REPORTED, NOT_REPORTED]
    assert "comparisons" not in response
    assert "checks" not in response
    assert response["anova"]["f"] is None
    assert response["anova"]["verdict"] == "not assessable"
    one, lone = response["levels"]
    assert (one["sd"], one["sd_ci"], one["ci"]) == (0.0, None, None)
    assert (lone["sd"], lone["sd_ci"], lone["ci"]) == (None, None, None)


def test_a_part_that_was_not_asked_for_is_absent():
    (response,) = findings_document(findings_of({"A": ["1.0", "2.0"], "B": ["3.0"]}))["responses"].values()
    assert set(response) == RESPONSE - {"comparisons", "checks"}


def test_holm_has_no_interval_and_a_one_sided_interval_an_open_end():
    parts = """\
comparisons:
  - {name: h, pairs: all, adjust: holm}
  - {name: g, against: A, adjust: bonferroni, alternative: greater}
  - {name: l, against: A, adjust: sidak, alternative: less}
"""
    data = {"A": ["1", "2", "4"], "B": ["3", "5"], "C": ["2", "2.5"]}
    (response,) = findings_document(findings_of(data, parts))["responses"].values()
    holm, greater, less = response["comparisons"]
    assert all(row["ci"] is None for row in holm["rows"])
    assert all(row["ci"][1] is None and is_number(row["ci"][0]) for row in greater["rows"])
    assert all(row["ci"][0] is None and is_number(row["ci"][1]) for row in less["rows"])


def test_exact_quantities_are_the_nearest_doubles(response, values):
    # Worked out anew, by deviations from the mean rather than by sums of squares.
    n = {level: len(listed) for level, listed in values.items()}
    mean = {level: sum(listed) / n[level] for level, listed in values.items()}
    ss = {level: sum((v - mean[level]) ** 2 for v in listed) for level, listed in values.items()}
    total = sum(n.values())
    grand = sum(sum(listed) for listed in values.values()) / total
    between = sum(n[level] * (mean[level] - grand) ** 2 for level in n)
    within = sum(ss.values())
    df1, df2 = len(n) - 1, total - len(n)
    anova = response["anova"]
    assert anova["between"] == {"ss": float(between), "df": df1, "ms": float(between / df1)}
    assert anova["within"] == {"ss": float(within), "df": df2, "ms": float(within / df2)}
    assert anova["total"] == {"ss": float(between + within), "df": total - 1}
    assert anova["f"] == float((between / df1) / (within / df2))
    assert anova["r_squared"] == float(between / (between + within))
    assert anova["residual_sd"] == square_root(within / df2)
    for level in response["levels"]:
        label = level["level"]
        assert level["n"] == n[label]
        assert level["mean"] == float(mean[label])
        assert level["sd"] == square_root(ss[label] / (n[label] - 1))
        assert (level["min"], level["max"]) == (float(min(values[label])), float(max(values[label])))
        assert int(level["sums"]["n"]) == n[label]
        assert Fraction(level["sums"]["sum"]) == sum(values[label])
        assert Fraction(level["sums"]["sum_of_squares"]) == sum(v * v for v in values[label])
    check_pairs(response, n, mean, within / df2)


def check_pairs(response: dict[str, Any], n: dict[str, int], mean: dict[str, Fraction], ms: Fraction) -> None:
    rows = [row for family in response["comparisons"] for row in family["rows"] if " - " in row["label"]]
    assert rows
    for row in rows:
        a, b = row["label"].split(" - ")
        estimate = mean[a] - mean[b]
        variance = ms * (Fraction(1, n[a]) + Fraction(1, n[b]))
        assert row["estimate"] == float(estimate)
        assert row["se"] == square_root(variance)
        assert row["statistic"] == (1 if estimate >= 0 else -1) * square_root(estimate**2 / variance)


def has_twelve_digits(value: float) -> bool:
    return len(Decimal(repr(value)).normalize().as_tuple().digits) <= 12


def test_quantities_through_a_distribution_have_at_most_twelve_digits(response):
    anova = response["anova"]
    numbers = [anova["p"], anova["log10_p"], anova["f_critical"]]
    numbers += [end for level in response["levels"] for end in level["sd_ci"]]
    numbers += [check["p"] for check in response["checks"]]
    for family in response["comparisons"]:
        for row in family["rows"]:
            numbers += [row["p"], row["p_adjusted"], row["log10_p_adjusted"]]
    assert len(numbers) > 20
    assert all(has_twelve_digits(number) for number in numbers)


def test_interval_ends_are_the_exact_centre_and_a_half_width_of_twelve_digits(response, values):
    mean = {level: sum(listed) / len(listed) for level, listed in values.items()}
    centred = [(mean[level["level"]], level["ci"]) for level in response["levels"]]
    for family in response["comparisons"]:
        for row in family["rows"]:
            if " - " in row["label"] and row["ci"] is not None:
                a, b = row["label"].split(" - ")
                centred.append((mean[a] - mean[b], row["ci"]))
    assert len(centred) > len(mean)
    for centre, (lower, upper) in centred:
        half = Fraction(float(f"{float((Fraction(upper) - Fraction(lower)) / 2):.11e}"))
        assert (lower, upper) == (float(centre - half), float(centre + half))


def test_the_logarithm_agrees_with_p(response):
    pairs = [(response["anova"]["p"], response["anova"]["log10_p"])]
    for family in response["comparisons"]:
        pairs += [(row["p_adjusted"], row["log10_p_adjusted"]) for row in family["rows"]]
    for p, log10_p in pairs:
        assert 10**log10_p == pytest.approx(p, rel=1e-10)


def test_the_document_is_canonical_json(name):
    study, observations = demo_study(name)
    text = findings_bytes(evaluate(study, observations)).decode("utf-8")
    # Numbers are kept as they are written; all the rest has one way to be written: keys sorted, no blanks.
    numbers: list[str] = []

    def kept(number: str) -> str:
        numbers.append(number)
        return f"<{number}>"

    parsed = json.loads(text, parse_int=kept, parse_float=kept)
    again = json.dumps(parsed, sort_keys=True, separators=(",", ":"), ensure_ascii=False)
    assert again.replace('"<', "").replace('>"', "") == text
    for number in numbers:
        digits = Decimal(number).normalize().as_tuple().digits
        assert digits == Decimal(repr(float(number))).normalize().as_tuple().digits
        assert number not in {"-0", "-0.0"}
        assert not number.endswith(".0")


def test_the_same_findings_give_the_same_bytes(name):
    study, observations = demo_study(name)
    assert findings_bytes(evaluate(study, observations)) == findings_bytes(evaluate(study, observations))


def test_labels_outside_ascii_are_kept():
    data = {"Prüfer Ä": ["1", "2"], "Probe µ": ["3", "4"]}
    text = findings_bytes(findings_of(data)).decode("utf-8")
    assert "Prüfer Ä" in text
    assert "Probe µ" in text
