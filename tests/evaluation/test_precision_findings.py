"""Precision of the measurement, as planned."""

from fractions import Fraction

import pytest

from assayfolio.findings import NOT_ASSESSABLE
from support.studies import findings_of

DAYS = {
    "day 1": ["10.12", "10.31", "10.24"],
    "day 2": ["10.41", "10.52", "10.33"],
    "day 3": ["10.01", "10.22", "10.11"],
    "day 4": ["10.64", "10.48", "10.55"],
}
RANDOM = "design: {effects: random}\n"


def precision_of(parts: str, data=None):
    findings = findings_of(data or DAYS, parts)
    return findings.responses[0].precision, findings.not_reported


def test_random_levels_give_repeatability_between_and_total():
    found, gaps = precision_of(
        f"{RANDOM}precision: {{estimate: true, varied: day, conditions: intermediate-precision}}\n"
    )
    assert gaps == ()
    assert found.total_name == "intermediate precision"
    assert found.varied == "day"
    assert found.total_sd.square == found.repeatability_sd.square + found.between_sd.square
    assert found.between_sd.square == found.between_variance_raw > 0
    assert found.repeatability_limit.square == Fraction("2.8") ** 2 * found.repeatability_sd.square
    assert found.total_limit.square == Fraction("2.8") ** 2 * found.total_sd.square
    assert found.n0 == 3
    assert found.icc == found.between_sd.square / found.total_sd.square
    for inside, (low, high) in (
        (found.repeatability_sd, found.repeatability_sd_ci),
        (found.total_sd, found.total_sd_ci),
        (found.total_sd, found.total_sd_ci_satterthwaite),
    ):
        assert low**2 < inside.square < high**2


@pytest.mark.requirement("REPORT-19", "WORDS-5")
@pytest.mark.parametrize(
    ("conditions", "name"),
    [
        (", conditions: reproducibility", "reproducibility"),
        (", conditions: intermediate-precision", "intermediate precision"),
        ("", "total"),
    ],
)
def test_the_total_is_called_what_was_varied(conditions, name):
    found, _ = precision_of(f"{RANDOM}precision: {{estimate: true, varied: laboratory{conditions}}}\n")
    assert found.total_name == name


def test_a_negative_component_is_shown_as_it_came_out_and_stated_as_zero():
    level = ["10.1", "10.9", "10.5"]
    data = {"day 1": level, "day 2": [*level[1:], level[0]], "day 3": ["10.0", "10.9", "10.6"]}
    found, _ = precision_of(f"{RANDOM}precision: {{estimate: true}}\n", data)
    assert found.between_variance_raw < 0
    assert found.between_sd.square == 0
    assert found.total_sd == found.repeatability_sd
    assert found.icc == 0


def test_unequal_numbers_are_told_by_the_methods():
    data = {**DAYS, "day 5": ["10.3", "10.4"]}
    found, _ = precision_of(f"{RANDOM}precision: {{estimate: true}}\n", data)
    balanced, _ = precision_of(f"{RANDOM}precision: {{estimate: true}}\n")
    assert (balanced.icc_method, found.icc_method) == ("F", "Wald")
    assert "n0" in found.interval_method
    assert "n0" not in balanced.interval_method


def test_the_uncertainty_of_the_mean_is_given_both_ways_and_one_is_stated():
    found, _ = precision_of(f"{RANDOM}precision: {{estimate: true}}\n")
    assert [way.way for way in found.mean_ways] == ["between levels", "pooled"]
    stated = found.mean_ways[0]
    assert (found.mean, found.mean_u, found.mean_df, found.mean_ci) == (
        stated.mean,
        stated.u,
        stated.df,
        stated.ci,
    )


def test_fixed_levels_give_the_repeatability_alone_and_lack_nothing():
    found, gaps = precision_of("precision: {estimate: true}\n")
    assert found.repeatability_sd.square == findings_of(DAYS).responses[0].anova.within.ms
    assert found.between_sd is found.total_sd is found.icc is found.mean is None
    assert found.between_sd_ci is None
    assert gaps == ()
    assert (found.relative_mean, found.relative_to) == (
        sum(Fraction(text) for texts in DAYS.values() for text in texts) / 12,
        "mean of all values",
    )


def test_relative_figures_are_in_percent_of_the_mean_that_is_stated():
    data = {**DAYS, "day 5": ["12.3", "12.4"]}
    found, _ = precision_of(f"{RANDOM}precision: {{estimate: true}}\n", data)
    assert found.relative_to == "mean of the level means"
    assert found.relative_mean == found.mean == found.mean_ways[0].mean != found.mean_ways[1].mean
    for relative, sd in (
        (found.repeatability_rsd, found.repeatability_sd),
        (found.between_rsd, found.between_sd),
        (found.total_rsd, found.total_sd),
    ):
        assert relative.square == 10_000 * sd.square / found.mean**2


def test_where_the_pooled_mean_is_stated_relative_figures_are_in_percent_of_it():
    level = ["10.1", "10.9", "10.5"]
    data = {"day 1": level, "day 2": level, "day 3": [*level, "10.6"]}
    found, _ = precision_of(f"{RANDOM}precision: {{estimate: true}}\n", data)
    assert found.between_variance_raw < 0
    assert found.relative_to == "mean of all values"
    assert found.relative_mean == found.mean == found.mean_ways[1].mean


def test_the_interval_between_levels_names_its_method():
    balanced, _ = precision_of(f"{RANDOM}precision: {{estimate: true}}\n")
    low, high = balanced.between_sd_ci
    assert low**2 < balanced.between_sd.square < high**2
    assert balanced.between_interval_method == "Williams-Tukey"
    unequal, _ = precision_of(f"{RANDOM}precision: {{estimate: true}}\n", {**DAYS, "day 5": ["10.3", "10.4"]})
    assert "harmonic mean of n" in unequal.between_interval_method


def test_a_confidence_of_its_own_sets_the_intervals():
    wide, _ = precision_of(f"{RANDOM}precision: {{estimate: true, confidence: 0.99}}\n")
    usual, _ = precision_of(f"{RANDOM}precision: {{estimate: true}}\n")
    assert (float(wide.confidence), float(usual.confidence)) == (0.99, 0.95)
    assert wide.total_sd_ci[0] < usual.total_sd_ci[0] < usual.total_sd_ci[1] < wide.total_sd_ci[1]


def test_what_the_data_cannot_give_is_named_with_its_reason():
    data = {"day 1": ["1.0", "1.0"], "day 2": ["2.0", "2.0"], "day 3": ["1.5", "1.5"]}
    found, gaps = precision_of(f"{RANDOM}precision: {{estimate: true}}\n", data)
    assert found.repeatability_sd.square == 0
    assert found.repeatability_sd_ci is None
    named = [gap.what for gap in gaps]
    assert "precision: interval of the repeatability standard deviation" in named
    assert findings_of(data, RANDOM).responses[0].overall_verdict == NOT_ASSESSABLE
