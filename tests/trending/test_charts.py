"""Charts over lots: what is charted, where limits come from, which lots signal."""

from fractions import Fraction

import pytest

from assayfolio.exact import to_double
from assayfolio.statistics.false_signals import range_signal_rate, settled_rate
from assayfolio.statistics.run_rules import RULES
from assayfolio.study.reading import read_study
from assayfolio.trending.charts import RANGE_RULE, chart_lots
from assayfolio.trending.series import LotResult, series_of

STUDY = """\
study: TST-1
title: Sulfate at three places of a drum
data: {file: v.csv, response: sulfate, factor: place, unit: mg/L, levels: [top, middle, bottom]}
alpha: 0.05
comparisons: [{name: to the top, against: top, adjust: dunnett}]
precision: {estimate: true}
criteria: [{quantity: repeatability-sd, at-most: 0.5, unit: mg/L}]
trend:
  baseline: {first: 6}
  rules: [beyond-limits, nine-one-side, range-beyond-limit]
  criteria: [{quantity: lot-mean, at-most: 12}]
"""
MEANS = ["10.0", "10.2", "9.9", "10.1", "9.8", "10.0", "10.1", "12.5", "10.0"]


def study_of(text: str = STUDY):
    return read_study(text.encode(), "study.yaml")


def result(number: int, mean: str, *, sd: float | None = 0.3, unit: str = "mg/L", lot: str = "") -> LotResult:
    """A run of one lot: three values in all, and `mean` the mean of all of them."""
    total = Fraction(mean)
    levels = [
        {"level": place, "sums": {"n": "1", "sum": str(total + step), "sum_of_squares": "0"}}
        for place, step in (("top", -1), ("middle", 0), ("bottom", 1))
    ]
    rows = [
        {"label": f"{place} - top", "estimate": step, "ci": [step - 0.5, step + 0.5]}
        for place, step in (("middle", 1.0), ("bottom", 2.0 + number / 64))
    ]
    comparisons = [
        {"kind": "against", "against": "top", "rows": rows},
        {"kind": "against", "against": "top", "rows": rows},
        {"kind": "pairs", "against": None, "rows": rows},
    ]
    part = {"unit": unit, "levels": levels, "anova": {"residual_sd": sd}, "comparisons": comparisons}
    return LotResult(
        lot or f"L-{number}",
        f"TST-1/run-{number:04d}",
        f"2031-05-{number:02d}T02:00:00.000000Z",
        "a" * 64,
        "b" * 64,
        {"responses": {"sulfate": part}},
    )


def results(means=MEANS):
    return [result(number, mean) for number, mean in enumerate(means, start=1)]


def chart_of(quantity: str, found):
    return next(chart for chart in found.charts if chart.series.quantity == quantity)


def test_lot_mean_repeatability_and_every_difference_to_a_reference_are_charted_once() -> None:
    found = series_of(study_of(), results())
    assert [(one.quantity, one.of) for one in found] == [
        ("lot-mean", ""),
        ("repeatability-sd", ""),
        ("difference", "middle - top"),
        ("difference", "bottom - top"),
    ]
    assert all(len(one.points) == len(MEANS) for one in found)


def test_a_lot_mean_is_exact() -> None:
    series = series_of(study_of(), [result(1, "1/3")])[0]
    assert series.points[0].value == Fraction(1, 3)


def test_values_of_the_findings_are_charted_with_every_digit() -> None:
    scatter = series_of(study_of(), [result(1, "10", sd=0.1 + 0.2)])[1]
    assert to_double(scatter.points[0].value) == 0.1 + 0.2
    differences = series_of(study_of(), results())[3]
    assert [to_double(point.value) for point in differences.points] == [
        2.0 + number / 64 for number in range(1, len(MEANS) + 1)
    ]
    assert differences.points[0].interval == (1.5 + 1 / 64, 2.5 + 1 / 64)


def test_a_lot_that_is_a_level_of_the_factor_is_charted_by_that_level() -> None:
    series = series_of(study_of(), [result(1, "10", lot="bottom"), result(2, "10", lot="middle")])
    assert [point.value for point in series[0].points] == [11, 10]
    (difference,) = (one for one in series if one.quantity == "difference")
    assert difference.of == "lot - top"
    assert [to_double(point.value) for point in difference.points] == [2.0 + 1 / 64, 1.0]


def test_only_the_planned_quantities_are_charted() -> None:
    study = study_of(STUDY.replace("  rules:", "  quantities: repeatability-sd\n  rules:"))
    assert [one.quantity for one in series_of(study, results())] == ["repeatability-sd"]


def test_a_lot_without_a_value_is_named_with_the_reason() -> None:
    series = series_of(study_of(), [result(1, "10"), result(2, "10", sd=None), result(3, "10", unit="g/L")])
    mean, scatter = series[0], series[1]
    assert mean.absent == (("L-3", "its run is in g/L, the plan in mg/L"),)
    assert [lot for lot, _ in scatter.absent] == ["L-3", "L-2"]
    assert [point.lot for point in scatter.points] == ["L-1"]


def test_a_lot_far_off_signals_by_name_of_the_rule() -> None:
    chart = chart_of("lot-mean", chart_lots(study_of(), results()))
    assert chart.limits is not None
    assert chart.limits.n == 6
    assert chart.limits.centre == 10
    assert chart.limits.mean_range == Fraction("0.24")
    assert [(one.panel, one.lot, one.rule) for one in chart.signals] == [
        ("individuals", "L-8", "beyond-limits"),
        ("moving range", "L-8", RANGE_RULE),
        ("moving range", "L-9", RANGE_RULE),
    ]


def test_moving_ranges_signal_only_where_the_plan_has_that_rule() -> None:
    study = study_of(STUDY.replace(", range-beyond-limit", ""))
    found = chart_lots(study, results())
    assert {one.panel for one in chart_of("lot-mean", found).signals} == {"individuals"}
    assert found.range_rate == 0


def test_a_criterion_line_names_the_lots_that_do_not_meet_it() -> None:
    found = chart_lots(study_of(), results())
    (line,) = chart_of("lot-mean", found).lines
    assert (line.relation, line.limit, line.unmet) == ("at most", 12, (7,))
    (line,) = chart_of("repeatability-sd", found).lines
    assert (line.limit, line.unmet) == (Fraction("0.5"), ())
    assert found.unmet == 1


def test_a_value_on_a_criterion_line_meets_it() -> None:
    found = chart_lots(study_of(), results(["12"] * 3))
    assert found.unmet == 0


def test_a_baseline_that_is_not_complete_gives_no_limits_and_no_signals() -> None:
    found = chart_lots(study_of(), results(MEANS[:5]))
    for chart in found.charts:
        assert chart.limits is None
        assert chart.why_no_limits == "the planned baseline is 6 lots, and 5 of them are there"
        assert chart.signals == ()
        assert chart.expected == 0
    assert found.month is not None
    assert found.month.signals == 0


def test_a_named_baseline_is_where_its_lots_are() -> None:
    text = STUDY.replace("{first: 6}", "{lots: [L-2, L-3, L-4, L-5, L-6]}")
    chart = chart_of("lot-mean", chart_lots(study_of(text), results()))
    assert chart.baseline == (1, 2, 3, 4, 5)
    missing = chart_of("lot-mean", chart_lots(study_of(text.replace("L-6", "L-99")), results()))
    assert missing.why_no_limits.endswith("there is none of L-99")


def test_values_that_never_change_have_no_limits() -> None:
    chart = chart_of("lot-mean", chart_lots(study_of(), results(["10"] * 8)))
    assert chart.limits is None
    assert "never differ" in chart.why_no_limits


def test_the_false_signals_of_a_month_are_those_of_all_charts_with_limits() -> None:
    means = [f"{10 + number % 3}.{number % 7}" for number in range(28)]
    found = chart_lots(study_of(), results(means))
    charts = [chart for chart in found.charts if chart.limits is not None]
    assert 0 < len(charts) < len(found.charts)  # the same repeatability in every lot gives none
    rate = settled_rate([RULES[name].rule for name in ("beyond-limits", "nine-one-side")])
    assert found.rate == rate
    assert found.month is not None
    assert found.month.lots == 28
    assert found.month.signals == pytest.approx(len(charts) * 28 * (rate + range_signal_rate()))


def test_only_the_lots_of_the_last_thirty_days_make_the_month() -> None:
    early = [result(number, "10") for number in range(1, 4)]
    late = LotResult("Z", "TST-1/run-0009", "2031-06-01T02:00:00.000000Z", "a", "b", early[0].findings)
    month = chart_lots(study_of(), [*early, late]).month
    assert month is not None
    assert month.lots == 2  # the first two came thirty days before, or earlier
    assert (month.begins, month.ends) == ("2031-05-02", "2031-06-01")
