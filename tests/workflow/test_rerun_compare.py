"""Comparing archived findings with those computed again: by equality, and where stated within a bound."""

import dataclasses
import math
import types
import typing

import pytest

from assayfolio import findings as found
from assayfolio import findings_intake
from assayfolio.workflow.rerun_compare import APPROXIMATE, BOUND, LOGARITHMS, differences


def only(old, new, lenient=False):
    (one,) = differences(old, new, lenient)
    return one


def test_equal_findings_have_no_differences():
    document = {"a": [1, 2.5, "x", None, True], "b": {"ci": [1.0, None], "p": 0.5}}
    assert differences(document, document) == ()


@pytest.mark.parametrize(
    "key", ["mean", "ss", "ms", "sd", "f", "se", "estimate", "statistic", "df", "r_squared"]
)
def test_one_unit_in_the_last_place_of_an_exact_number_is_different(key):
    one = only({key: 48.2}, {key: math.nextafter(48.2, 50)})
    assert (one.kind, one.within) == ("exact", False)
    assert one.digits_lost == pytest.approx(0.1, abs=0.25)


@pytest.mark.requirement("RERUN-4")
@pytest.mark.parametrize("key", sorted(APPROXIMATE))
def test_an_approximate_number_is_held_to_its_bound(key):
    assert only({key: 0.5}, {key: 0.5 * (1 + 0.9 * BOUND)}).within
    assert not only({key: 0.5}, {key: 0.5 * (1 + 1.1 * BOUND)}).within


def test_whole_numbers_and_doubles_of_the_same_value_are_the_same():
    assert differences({"mean": 5}, {"mean": 5.0}) == ()
    assert only({"mean": 1}, {"mean": True}).within is False


def test_a_lost_digit_is_counted():
    one = only({"p": 0.123456789012}, {"p": 0.123456789})
    assert one.digits_lost == pytest.approx(2.0, abs=0.1)
    assert only({"mean": 1.0}, {"mean": 10.0}).digits_lost >= 15.9


@pytest.mark.parametrize("key", sorted(LOGARITHMS))
def test_a_logarithm_near_zero_is_held_to_the_bound_of_p(key):
    p = 1 - 1e-6
    assert only({key: math.log10(p)}, {key: math.log10(p * (1 + 0.9 * BOUND))}).within
    assert not only({key: math.log10(p)}, {key: math.log10(p * (1 + 1.5 * BOUND))}).within


@pytest.mark.parametrize("key", sorted(LOGARITHMS))
def test_a_large_logarithm_is_held_to_its_own_size(key):
    assert only({key: -250.0}, {key: -250.0 * (1 + 0.9 * BOUND)}).within
    assert not only({key: -250.0}, {key: -250.0 * (1 + 1.1 * BOUND)}).within


def test_an_interval_is_held_to_half_its_width_not_to_its_place():
    old = {"estimate": 1000.0, "ci": [999.5, 1000.5]}
    near = 1000.5 + 0.4 * BOUND * 0.5 + 0.5e-12
    assert only(old, {"estimate": 1000.0, "ci": [999.5, near]}).within
    far = 1000.5 + 1000 * BOUND * 0.9
    assert not only(old, {"estimate": 1000.0, "ci": [999.5, far]}).within


def test_an_open_interval_is_held_to_its_distance_from_the_estimate():
    old = {"estimate": 1000.0, "ci": [None, 1000.5]}
    assert not only(old, {"estimate": 1000.0, "ci": [None, 1000.5 + 1e-9]}).within
    assert only({"estimate": 0.0, "ci": [None, 0.5]}, {"estimate": 0.0, "ci": [None, 0.5 + 4e-12]}).within


def test_an_interval_that_lost_an_end_is_different():
    one = only({"ci": [1.0, 2.0]}, {"ci": [1.0, None]})
    assert (one.place, one.within) == ("/ci/1", False)


def test_an_interval_on_data_with_a_large_offset_may_differ_by_one_unit_in_the_last_place():
    end = 1e12 + 0.125
    old = {"mean": 1e12, "ci": [1e12 - 0.125, end]}
    assert only(old, {"mean": 1e12, "ci": [1e12 - 0.125, math.nextafter(end, math.inf)]}).within


def test_the_shapiro_wilk_test_has_a_wider_bound_of_its_own():
    old = {"name": "Shapiro-Wilk test on residuals", "statistic": 0.963284062182, "p": 0.507861614875}
    seen = {**old, "statistic": 0.963284062202, "p": 0.507861615324}  # the next version of the library
    assert [one.within for one in differences(old, seen)] == [True, True]
    assert {one.bound for one in differences(old, seen)} == {1e-8}
    assert not only(old, {**old, "p": old["p"] * (1 + 1.1e-8)}).within
    bartlett = {**old, "name": "Bartlett test of equal variances"}
    assert [one.within for one in differences(bartlett, {**seen, "name": bartlett["name"]})] == [False, False]


def test_the_statistic_of_an_approximate_check_has_a_bound_and_that_of_an_exact_one_has_none():
    near = 0.9 * (1 + 1e-13)
    shapiro = {"name": "Shapiro-Wilk test on residuals", "statistic": 0.9}
    assert only(shapiro, {**shapiro, "statistic": near}).within
    levene = {"name": "Levene test of equal variances", "statistic": 0.9}
    assert not only(levene, {**levene, "statistic": near}).within


def test_a_verdict_is_compared_letter_by_letter():
    assert not only({"verdict": "difference shown"}, {"verdict": "difference not shown"}).within


def test_a_place_names_the_field_and_what_it_belongs_to():
    old = {"comparisons": [{"name": "all pairs", "rows": [{"label": "A - B", "p": 0.5}]}]}
    new = {"comparisons": [{"name": "all pairs", "rows": [{"label": "A - B", "p": 0.6}]}]}
    one = only(old, new)
    assert (one.place, one.about) == ("/comparisons/0/rows/0/p", "A - B")


def test_a_row_more_or_less_is_different_whatever_the_version():
    for lenient in (False, True):
        assert not only({"rows": [1]}, {"rows": [1, 2]}, lenient).within
        assert not only({"rows": [1, 2]}, {"rows": [1]}, lenient).within


def test_a_field_that_only_another_version_knows_is_named_and_not_compared():
    assert not only({}, {"later": 1}).within
    assert only({}, {"later": 1}, lenient=True).within
    assert not only({"earlier": 1}, {}, lenient=True).within


def _is_approximate(annotation) -> bool:
    """Whether a field of the findings is a plain double: what is exact is a Fraction, a Root or an int."""
    union = isinstance(annotation, types.UnionType) or typing.get_origin(annotation) is typing.Union
    arguments = typing.get_args(annotation) if union else (annotation,)
    return float in arguments and int not in arguments


def test_every_plain_double_of_the_findings_is_declared_approximate_and_nothing_else_is():
    exact_doubles = {"df", "total_df", "mean_df", "statistic"}
    classes = [
        value
        for module in (found, findings_intake)
        for value in vars(module).values()
        if dataclasses.is_dataclass(value)
    ]
    declared = set()
    for each in classes:
        hints = typing.get_type_hints(each, vars(found))
        declared |= {name for name, hint in hints.items() if _is_approximate(hint)}
    assert declared - exact_doubles == APPROXIMATE | LOGARITHMS
