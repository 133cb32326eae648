"""The answers of a findings document in words, and its numbers as they are shown on a screen."""

import math
from collections import Counter
from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from assayfolio.pages.values import NO_RESULT, LevelSeries

NONE_SET = "none set"
MET = "met"
NOT_MET = "not met"
NOT_ASSESSABLE = "not assessable"
_MINUS = "\u2212"
_DIGITS = 6
_SPREAD_DIGITS = 3
_OVERALL = {"f": "anova", "welch": "welch", "brown-forsythe": "brown_forsythe_means"}
_TEST_NAMES = {
    "f": "F test of the one-way analysis of variance",
    "welch": "Welch’s test",
    "brown-forsythe": "Brown-Forsythe test of means",
}


def number_words(value: float | int | None) -> str:
    """A number with six significant digits and a true minus sign; a dash where there is none."""
    if value is None:
        return "–"
    return f"{value:.{_DIGITS}g}".replace("-", _MINUS)


def column_words(values: Sequence[float | None], digits: int) -> list[str]:
    """A column of numbers with equal decimals: the largest of them has `digits` significant digits."""
    largest = max((abs(value) for value in values if value is not None), default=0.0)
    if not 1e-4 <= largest < 1e9:
        return [number_words(value) for value in values]
    places = max(0, digits - 1 - math.floor(math.log10(largest)))
    return ["–" if value is None else f"{value:.{places}f}".replace("-", _MINUS) for value in values]


def level_rows(response: Mapping[str, Any]) -> list[tuple[str, int, str, str]]:
    """Each level of a response: its name, n, mean, standard deviation."""
    levels = response["levels"]
    means = column_words([level["mean"] for level in levels], _DIGITS)
    spreads = column_words([level["sd"] for level in levels], _SPREAD_DIGITS)
    return [
        (level["level"], level["n"], mean, sd) for level, mean, sd in zip(levels, means, spreads, strict=True)
    ]


def overall_verdict(response: Mapping[str, Any]) -> str:
    """The answer of the overall test that was planned for one response of a findings document."""
    part = response.get(_OVERALL.get(response.get("omnibus", "f"), "anova"))
    return str(part["verdict"]) if isinstance(part, Mapping) and part.get("verdict") else NOT_ASSESSABLE


def overall_test(response: Mapping[str, Any]) -> str:
    """The usual name of the overall test that was planned."""
    return _TEST_NAMES.get(response.get("omnibus", "f"), str(response.get("omnibus")))


def overall_words(findings: Mapping[str, Any] | None) -> str:
    """The overall answers of a run: one verdict, or one a response."""
    responses = _responses(findings)
    if not responses:
        return NO_RESULT
    verdicts = [overall_verdict(response) for response in responses.values()]
    if len(verdicts) == 1:
        return verdicts[0]
    if len(set(verdicts)) == 1:
        return f"{verdicts[0]} (all {len(verdicts)} responses)"
    return "; ".join(f"{name}: {verdict}" for name, verdict in zip(responses, verdicts, strict=True))


def criteria_words(findings: Mapping[str, Any] | None) -> str:
    """Whether the criteria set in advance are met, over all responses."""
    responses = _responses(findings)
    if not responses:
        return NO_RESULT
    verdicts = [one["verdict"] for response in responses.values() for one in response.get("criteria", ())]
    if not verdicts:
        return NONE_SET
    unmet = sum(verdict != "criterion met" for verdict in verdicts)
    if not unmet:
        return f"{MET} ({len(verdicts)} of {len(verdicts)})"
    return f"{NOT_MET} ({unmet} of {len(verdicts)})"


def series_of(findings: Mapping[str, Any] | None) -> Mapping[str, LevelSeries]:
    """Level means and residual standard deviation by response."""
    return {
        name: LevelSeries(
            response.get("unit") or "",
            {level["level"]: level["mean"] for level in response["levels"]},
            response["anova"].get("residual_sd"),
        )
        for name, response in _responses(findings).items()
    }


def answer_rows(response: Mapping[str, Any]) -> Iterator[tuple[str, str]]:
    """Each planned question of a response with its answer in words."""
    yield f"All level means equal? ({overall_test(response)})", overall_verdict(response)
    for family in (*response.get("comparisons", ()), *response.get("equivalence", ())):
        yield str(family["name"]), _family_words(family["rows"])


def _family_words(rows: Sequence[Mapping[str, Any]]) -> str:
    if len(rows) == 1:
        return f"{rows[0]['label']}: {rows[0]['verdict']}"
    counted = Counter(str(row["verdict"]) for row in rows)
    return "; ".join(f"{verdict} in {count} of {len(rows)}" for verdict, count in counted.items())


def criterion_rows(response: Mapping[str, Any]) -> Iterator[tuple[str, str, str, str]]:
    """Each criterion: quantity, value, limit, verdict."""
    for one in response.get("criteria", ()):
        unit = f" {one['unit']}" if one.get("unit") else ""
        of_level = f" of {one['level']}" if one.get("level") else ""
        value = "not assessable" if one["value"] is None else f"{number_words(one['value'])}{unit}"
        limit = f"{one['relation']} {number_words(one['limit'])}{unit}"
        yield f"{one['quantity']}{of_level}", value, limit, str(one["verdict"])


def plan_lines(findings: Mapping[str, Any] | None) -> Iterator[tuple[str, str]]:
    """The plan in short, as the findings of a run on it tell it: what and how."""
    for name, response in _responses(findings).items():
        unit = f", in {response['unit']}" if response.get("unit") else ""
        levels = [level["level"] for level in response["levels"]]
        yield f"{name}{unit}", f"{len(levels)} levels: {', '.join(levels)}"
        yield "Overall question", f"{overall_test(response)}, alpha {number_words(response['alpha'])}"
        for family in (*response.get("comparisons", ()), *response.get("equivalence", ())):
            rows = len(family["rows"])
            yield str(family["name"]), f"{family['method']}, {rows} {'row' if rows == 1 else 'rows'}"
        for quantity, _, limit, _ in criterion_rows(response):
            yield f"Criterion: {quantity}", limit


def _responses(findings: Mapping[str, Any] | None) -> Mapping[str, Any]:
    found = {} if findings is None else findings.get("responses", {})
    return found if isinstance(found, Mapping) else {}
