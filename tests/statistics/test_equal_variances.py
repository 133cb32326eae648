"""Tests of equal variances: the statistics, what they do not depend on, and what cannot be tested."""

from fractions import Fraction
from math import fsum, log, log10
from statistics import mean, median

import mpmath as mp
import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st
from scipy import stats

from assayfolio.exact import Decimal10, ExactSums
from assayfolio.statistics.cochran import cochran_limit, cochran_variances, largest_variance_share
from assayfolio.statistics.equal_variances import (
    bartlett_variances,
    brown_forsythe_variances,
    levene_variances,
)
from assayfolio.statistics.oneway import NotComputableError, one_way
from support.measured import analysed, scaled, shifted, varying
from support.reference import analysed as analysed_texts
from support.reference import decimals

values = st.builds(Decimal10, st.integers(-(10**5), 10**5), st.integers(-3, 1))
groups = st.lists(st.lists(values, min_size=1, max_size=8), min_size=2, max_size=5)

CENTRES = {"median": (brown_forsythe_variances, median), "mean": (levene_variances, mean)}
centres = pytest.mark.parametrize("centre", CENTRES)


@centres
@given(listed=groups)
def test_the_statistic_is_f_of_the_distances_from_the_level_centres(centre, listed):
    check, centre_of = CENTRES[centre]
    named = [(f"L{at}", one) for at, one in enumerate(listed)]
    distances = []
    for level, one in named:
        middle = centre_of(value.fraction for value in one)
        # In units of 1/840 000 every distance is a whole number here: up to 8 values to three decimals.
        units = [abs(value.fraction - middle) * 840_000 for value in one]
        assert all(unit.denominator == 1 for unit in units)
        distances.append((level, ExactSums.of(Decimal10(int(unit), 0) for unit in units)))
    try:
        expected = one_way(distances).f
    except NotComputableError:
        expected = None
    if expected is None:
        with pytest.raises(NotComputableError):
            check(named)
    else:
        assert check(named).f == expected


@centres
def test_levels_of_two_values_say_nothing_about_variances(centre):
    with pytest.raises(NotComputableError, match="do not vary within any level"):
        CENTRES[centre][0](decimals({"A": ["1", "9"], "B": ["2", "3"]}))


def test_a_level_with_one_value_takes_part_with_distance_zero():
    check = brown_forsythe_variances(decimals({"A": ["1", "2", "6"], "B": ["5"]}))
    # Distances 1, 0, 4 and 0: means 5/3 and 0; SS between 25/12, SS within 26/3 on 2.
    assert check.f == Fraction(25, 12) / (Fraction(26, 3) / 2)
    assert check.df == (1, 2)


@centres
def test_one_value_at_every_level_has_no_check_of_variances(centre):
    with pytest.raises(NotComputableError, match="one value at every level"):
        CENTRES[centre][0](decimals({"A": ["1"], "B": ["2"]}))


@centres
def test_a_level_without_values_is_named(centre):
    with pytest.raises(NotComputableError, match="'B' has no values"):
        CENTRES[centre][0](decimals({"A": ["1", "2", "4"], "B": []}))


def test_many_levels_of_many_sizes_have_one_unit():
    data = {f"L{n}": [f"{(n * at * at) % 17}" for at in range(n)] for n in range(2, 40)}
    check = levene_variances(decimals(data))
    other = stats.levene(*([float(text) for text in texts] for texts in data.values()), center="mean")
    assert float(check.f) == pytest.approx(other.statistic, rel=1e-12)


@given(varying(levels=4))
def test_bartlett_is_the_textbook_formula(data):
    analysis = analysed(data)
    found = bartlett_variances(analysis)
    assert found.statistic >= 0
    with mp.workdps(50):
        pooled = mp.mpf(analysis.ms_within.numerator) / analysis.ms_within.denominator
        logs = [
            (level.n - 1) * mp.log(mp.mpf(level.ss.numerator) / level.ss.denominator / (level.n - 1))
            for level in analysis.levels
        ]
        inverse = mp.fsum(mp.mpf(1) / (level.n - 1) for level in analysis.levels)
        correction = 1 + (inverse - mp.mpf(1) / analysis.df_within) / (3 * (analysis.k - 1))
        expected = (analysis.df_within * mp.log(pooled) - mp.fsum(logs)) / correction
        assert found.statistic == pytest.approx(float(expected), rel=1e-13, abs=1e-300)


def test_bartlett_keeps_its_digits_where_the_variances_are_almost_equal():
    # Variances of 1 and 1 + 2e-12: the logarithms of the formula would cancel to the twelfth digit.
    data = {"A": ["0", "1", "2"], "B": ["0", "1", "2.000000000001"]}
    found = bartlett_variances(analysed_texts(data))
    with mp.workdps(60):
        second = mp.mpf("2.000000000001")
        middle = (1 + second) / 3
        variance = (middle**2 + (1 - middle) ** 2 + (second - middle) ** 2) / 2
        uncorrected = 4 * mp.log((1 + variance) / 2) - 2 * mp.log(variance)
        expected = float(uncorrected / (1 + mp.mpf(3) / 4 / 3))
    assert found.statistic == pytest.approx(expected, rel=1e-13)


@given(varying(levels=4), st.integers(-20, 20), st.integers(-(10**9), 10**9))
def test_unit_and_zero_point_do_not_matter(data, power, constant):
    for change in (scaled(data, power), shifted(data, constant)):
        assert bartlett_variances(analysed(change)) == bartlett_variances(analysed(data))
        assert cochran_variances(analysed(change)) == cochran_variances(analysed(data))
        try:
            before = levene_variances(list(data.items()))
        except NotComputableError:
            assume(False)
        assert levene_variances(list(change.items())) == before


@given(varying(levels=4), st.randoms(use_true_random=False))
def test_order_does_not_matter(data, random):
    moved = dict(random.sample(list(data.items()), len(data)))
    one, other = cochran_variances(analysed(data)), cochran_variances(analysed(moved))
    assert (one.share, one.bound) == (other.share, other.bound)
    assert bartlett_variances(analysed(moved)).statistic == pytest.approx(
        bartlett_variances(analysed(data)).statistic, rel=1e-15
    )


def test_bartlett_leaves_out_levels_with_one_value_and_says_so():
    data = {"A": ["1", "2", "4"], "B": ["1", "5", "7", "8"]}
    with_single = data | {"C": ["3"]}
    found, without = (bartlett_variances(analysed_texts(one)) for one in (with_single, data))
    assert (found.left_out, without.left_out) == (("C",), ())
    assert (found.statistic, found.tail, found.df) == (without.statistic, without.tail, 1)


@pytest.mark.parametrize(
    ("data", "reason"),
    [
        ({"A": ["1", "1"], "B": ["1", "2"]}, "all values of level 'A' are equal"),
        ({"A": ["1", "3"], "B": ["2"]}, "fewer than two levels"),
    ],
)
def test_bartlett_is_refused_with_the_reason(data, reason):
    with pytest.raises(NotComputableError, match=reason):
        bartlett_variances(analysed_texts(data))


@pytest.mark.parametrize(
    ("data", "reason"),
    [
        ({"A": ["1", "1"], "B": ["1", "2"]}, "fewer than two levels vary"),
        ({"A": ["1", "3"], "B": ["2"]}, "fewer than two levels have more than one value"),
    ],
)
def test_cochran_is_refused_with_the_reason(data, reason):
    with pytest.raises(NotComputableError, match=reason):
        cochran_variances(analysed_texts(data))


def test_cochran_with_two_levels_is_the_two_sided_f_test():
    data = {"A": ["1.0", "1.4", "0.7", "1.1"], "B": ["2.0", "4.1", "1.7", "5.0"]}
    found = cochran_variances(analysed_texts(data))
    variances = [np.var([float(text) for text in texts], ddof=1) for texts in data.values()]
    assert found.level == "B"
    assert found.bound.p == pytest.approx(2 * stats.f.sf(variances[1] / variances[0], 3, 3), rel=1e-12)
    assert found.bound.log10_p == pytest.approx(log10(found.bound.p), rel=1e-12)


def test_with_unequal_sizes_each_share_has_its_own_degrees_of_freedom():
    # The largest variance is that of two values, which prove little; the level of ten is the conspicuous one.
    data = {
        "A": ["1.0", "1.1", "0.9", "1.0", "1.1"],
        "B": ["1.0", "2.6"],
        "C": ["1.0", "2.1", "0.2", "1.9", "0.1", "2.2", "1.2", "0.3", "1.8", "0.1"],
        "D": ["1.0", "1.1", "1.2", "0.9", "1.0"],
    }
    analysis = analysed_texts(data)
    found = cochran_variances(analysis)
    assert largest_variance_share(analysis)[0] == "B"
    assert (found.level, found.df, found.levels) == ("C", (9, 9), 4)
    assert found.share == analysis.summary_of("C").ss / analysis.ss_within


@given(st.floats(0.0005, 0.2), st.integers(2, 40), st.integers(1, 30))
def test_the_limit_of_cochran_is_where_the_bound_equals_alpha(alpha, levels, df):
    rest = (levels - 1) * df
    share = cochran_limit(alpha, levels, df, rest)
    assert 0 < share < 1
    f = share / df / ((1 - share) / rest)
    assert levels * stats.f.sf(f, df, rest) == pytest.approx(alpha, rel=1e-6)


def test_the_bound_of_cochran_is_kept_in_simulated_samples():
    generator = np.random.default_rng(3)
    samples = generator.normal(size=(40_000, 6, 4))
    sums = samples.var(axis=2)
    shares = sums.max(axis=1) / sums.sum(axis=1)
    seen = float(np.mean(shares > cochran_limit(0.05, 6, 3, 15)))
    assert (
        0.044 < seen < 0.0535
    )  # 0.05 at most, less the little that a bound gives away; four errors of 0.0011


def test_a_wide_range_of_variances_stays_within_doubles():
    data = {"A": ["0", "1e-50"], "B": ["0", "1e50", "2e50"]}
    found = bartlett_variances(analysed_texts(data))
    second = analysed_texts(data).summary_of("B")
    pooled = float(Fraction(second.ss) / 3)
    expected = fsum([3 * log(pooled), -2 * log(float(second.ss) / 2), -log(5e-101)])
    assert found.statistic * float(found.correction) == pytest.approx(expected, rel=1e-12)
