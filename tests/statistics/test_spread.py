"""Ratios of variances to that of a reference."""

from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from assayfolio.statistics.spread import variance_ratios
from support.measured import analysed, scaled, shifted, varying
from support.reference import analysed as analysed_texts

METHODS = {
    "reference": ["5.02", "5.10", "4.97", "5.05", "5.01"],
    "kit a": ["5.11", "5.04", "5.20", "5.09"],
    "kit b": ["4.80", "5.30", "5.05", "4.95", "5.15", "5.00"],
}


def test_ratio_test_and_interval_are_those_of_f():
    rows = variance_ratios(analysed_texts(METHODS), "reference", 0.05, "none")
    assert [row.label for row in rows] == ["kit a / reference", "kit b / reference"]
    variance = {level: np.var([float(x) for x in texts], ddof=1) for level, texts in METHODS.items()}
    for row in rows:
        ratio = variance[row.level] / variance["reference"]
        assert float(row.ratio) == pytest.approx(ratio, rel=1e-10)
        assert row.df == (len(METHODS[row.level]) - 1, 4)
        p = 2 * min(stats.f.sf(ratio, *row.df), stats.f.cdf(ratio, *row.df))
        assert row.tail.p == pytest.approx(p, rel=1e-9)
        limits = ratio / stats.f.isf(0.025, *row.df), ratio / stats.f.ppf(0.025, *row.df)
        assert row.interval == pytest.approx(limits, rel=1e-9)
        assert row.reason is None


@given(varying(levels=4), st.sampled_from(["none", "bonferroni"]))
def test_the_interval_excludes_one_exactly_where_a_difference_is_shown(data, adjust):
    for row in variance_ratios(analysed(data), "L0", 0.05, adjust):
        if abs(row.adjusted.p - 0.05) > 1e-9:
            assert (not row.interval[0] <= 1 <= row.interval[1]) is (row.adjusted.p <= 0.05)


@given(varying(levels=2))
def test_exchanging_the_levels_inverts_the_ratio(data):
    (there,) = variance_ratios(analysed(data), "L0", 0.05, "none")
    (back,) = variance_ratios(analysed(data), "L1", 0.05, "none")
    assert back.ratio == 1 / there.ratio
    assert back.tail == there.tail
    assert back.interval == pytest.approx((1 / there.interval[1], 1 / there.interval[0]), rel=1e-10)


@given(varying(), st.integers(-20, 20), st.integers(-(10**9), 10**9))
def test_unit_and_zero_point_do_not_matter(data, power, constant):
    rows = variance_ratios(analysed(data), "L0", 0.05, "holm")
    assert variance_ratios(analysed(scaled(data, power)), "L0", 0.05, "holm") == rows
    assert variance_ratios(analysed(shifted(data, constant)), "L0", 0.05, "holm") == rows


def test_families():
    analysis = analysed_texts(METHODS)
    plain, fair, stepped = (
        variance_ratios(analysis, "reference", 0.05, how) for how in ("none", "bonferroni", "holm")
    )
    assert [row.adjusted for row in plain] == [row.tail for row in plain]
    assert [row.adjusted.p for row in fair] == [min(1.0, 2 * row.tail.p) for row in plain]
    assert [row.interval for row in stepped] == [row.interval for row in plain]
    narrower = variance_ratios(analysis, "reference", 0.025, "none")
    assert [row.interval for row in fair] == [row.interval for row in narrower]
    assert max(row.adjusted.p for row in stepped) <= max(row.adjusted.p for row in fair)


def test_equal_variances_have_p_one():
    (row,) = variance_ratios(analysed_texts({"A": ["1", "2", "3"], "B": ["5", "6", "7"]}), "A", 0.05, "none")
    assert row.ratio == Fraction(1)
    assert row.tail.p == pytest.approx(1.0, rel=1e-12)
    assert row.tail.p <= 1.0


def test_levels_without_a_variance_have_a_reason_and_count_as_p_one():
    data = METHODS | {"single": ["5.0"], "flat": ["5.0", "5.0"]}
    rows = {row.level: row for row in variance_ratios(analysed_texts(data), "reference", 0.05, "bonferroni")}
    assert "one value" in rows["single"].reason
    assert "all values of level 'flat' are equal" in rows["flat"].reason
    for level in ("single", "flat"):
        row = rows[level]
        assert (row.ratio, row.df, row.tail, row.adjusted, row.interval) == (None,) * 5
    family = variance_ratios(analysed_texts(METHODS), "reference", 0.05 / 4, "none")
    for alone in family:
        assert rows[alone.level].interval == alone.interval
        assert rows[alone.level].adjusted.p == min(1.0, 4 * alone.tail.p)


@pytest.mark.parametrize("reference", [["5.0"], ["5.0", "5.0"]])
def test_a_reference_without_a_variance_leaves_no_row(reference):
    rows = variance_ratios(
        analysed_texts(METHODS | {"reference": reference}), "reference", 0.05, "bonferroni"
    )
    assert len(rows) == 2
    assert all("'reference'" in row.reason and row.tail is None for row in rows)


def test_variances_too_far_apart_for_doubles_have_a_reason():
    data = {"A": ["0", "1e-60"], "B": ["0", "9" * 38 + "e60"]}
    (row,) = variance_ratios(analysed_texts(data), "A", 0.05, "none")
    assert "150 powers of ten" in row.reason
    assert row.tail is None


@pytest.mark.parametrize(("reference", "adjust"), [("nobody", "none"), ("reference", "tukey-kramer")])
def test_unknown_names(reference, adjust):
    with pytest.raises(KeyError):
        variance_ratios(analysed_texts(METHODS), reference, 0.05, adjust)
