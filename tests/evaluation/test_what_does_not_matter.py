"""What may not change a result: the order of rows and levels, a constant added, the unit."""

from dataclasses import replace
from decimal import Decimal

import pytest

from assayfolio.evaluation.apply import evaluate
from assayfolio.findings import ResponseFindings
from support.every_option import ASH, ORDER, PLANS, PROTEIN, study_with_every
from support.studies import observations_of_each

LEVELS = list(ASH)
BOTH = {"ash": ASH, "protein": PROTEIN}
_places = iter(ORDER)
PLACES = {level: [next(_places) for _ in texts] for level, texts in ASH.items()}


def responses_of(option, data, order=ORDER) -> tuple[ResponseFindings, ...]:
    study, _ = study_with_every(option)
    return evaluate(study, observations_of_each(study, data, order)).responses


def without_order(response: ResponseFindings) -> ResponseFindings:
    """The findings without the lines of outliers, whose values stand in the order of the lines."""
    outliers = (replace(one, lines=(), values=tuple(sorted(one.values))) for one in response.outliers)
    return replace(response, outliers=tuple(outliers))


def changed(data, change):
    return {
        response: {level: [change(text) for text in texts] for level, texts in by_level.items()}
        for response, by_level in data.items()
    }


@pytest.mark.parametrize("option", PLANS)
@pytest.mark.parametrize("turn", [lambda row: row[::-1], lambda row: row[2:] + row[:2]], ids=["back", "on"])
def test_the_order_of_the_rows_within_the_levels(option, turn):
    moved = {
        response: {level: turn(texts) for level, texts in by_level.items()}
        for response, by_level in BOTH.items()
    }
    order = [position for level in LEVELS for position in turn(PLACES[level])]
    plain, other = responses_of(option, BOTH), responses_of(option, moved, order)
    assert [without_order(one) for one in other] == [without_order(one) for one in plain]


@pytest.mark.parametrize("option", PLANS)
def test_a_constant_added_to_every_value(option):
    plain, other = (
        responses_of(option, data) for data in (BOTH, changed(BOTH, lambda text: str(Decimal(text) + 1000)))
    )
    for one, two in zip(plain, other, strict=True):
        assert (two.anova.f, two.anova.p) == (one.anova.f, one.anova.p)
        assert (two.effect, two.welch, two.brown_forsythe_means) == (
            one.effect,
            one.welch,
            one.brown_forsythe_means,
        )
        assert two.checks == one.checks
        assert two.spread == one.spread
        assert [test.statistic for test in two.outliers] == [test.statistic for test in one.outliers]
        for before, after in zip(one.comparisons, two.comparisons, strict=True):
            assert [replace(row, ci=None) for row in after.rows] == [
                replace(row, ci=None) for row in before.rows
            ]


@pytest.mark.parametrize("option", PLANS)
@pytest.mark.parametrize("power", [-9, 6])
def test_the_unit(option, power):
    plain = responses_of(option, BOTH)
    other = responses_of(option, changed(BOTH, lambda text: f"{text}e{power}"))
    for one, two in zip(plain, other, strict=True):
        assert (two.anova.f, two.anova.p, two.effect) == (one.anova.f, one.anova.p, one.effect)
        assert (two.welch, two.brown_forsythe_means) == (one.welch, one.brown_forsythe_means)
        assert two.spread == one.spread
        for before, after in zip(one.comparisons, two.comparisons, strict=True):
            assert [(row.p, row.p_adjusted, row.verdict) for row in after.rows] == [
                (row.p, row.p_adjusted, row.verdict) for row in before.rows
            ]
        assert [(test.p, test.verdict) for test in two.outliers] == [
            (test.p, test.verdict) for test in one.outliers
        ]


@pytest.mark.parametrize("option", PLANS)
def test_the_order_of_the_levels(option):
    turned = {
        response: {level: values[level] for level in reversed(LEVELS)} for response, values in BOTH.items()
    }
    order = [position for level in reversed(LEVELS) for position in PLACES[level]]
    plain, other = responses_of(option, BOTH), responses_of(option, turned, order)
    for one, two in zip(plain, other, strict=True):
        assert two.anova == one.anova
        assert (two.effect, two.welch, two.brown_forsythe_means) == (
            one.effect,
            one.welch,
            one.brown_forsythe_means,
        )
        assert two.precision == one.precision
        for before, after in zip(one.comparisons, two.comparisons, strict=True):
            found = {frozenset(row.label.split(" - ")): row for row in after.rows}
            for row in before.rows:
                other_row = found[frozenset(row.label.split(" - "))]
                assert abs(other_row.estimate) == abs(row.estimate)
                assert other_row.p == row.p
                assert other_row.p_adjusted == pytest.approx(row.p_adjusted, rel=1e-11)
