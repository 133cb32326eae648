"""The drift of values with their order of measurement."""

from fractions import Fraction

import numpy as np
import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st
from statsmodels.formula.api import ols

from assayfolio.exact import Decimal10, parse_decimal, to_double
from assayfolio.statistics.oneway import NotComputableError
from assayfolio.statistics.run_order import run_order_trend

DATA = {
    "A": [(1, "5.02"), (5, "5.11"), (9, "5.20"), (11, "5.15")],
    "B": [(2, "4.80"), (4, "4.95"), (8, "4.90")],
    "C": [(3, "5.55"), (6, "5.40"), (7, "5.61"), (10, "5.70"), (12, "5.66")],
}


def ordered(data):
    return [
        (level, [(Fraction(place), parse_decimal(text)) for place, text in listed])
        for level, listed in data.items()
    ]


def test_it_is_the_analysis_of_covariance_with_one_slope():
    found = run_order_trend(ordered(DATA))
    frame = pd.DataFrame(
        [(level, place, float(text)) for level, listed in DATA.items() for place, text in listed],
        columns=["level", "place", "value"],
    )
    fit = ols("value ~ C(level) + place", frame).fit()
    assert float(found.slope) == pytest.approx(fit.params["place"], rel=1e-12)
    assert to_double(found.statistic) == pytest.approx(fit.tvalues["place"], rel=1e-11)
    assert found.df == fit.df_resid == 8
    assert found.tail.p == pytest.approx(fit.pvalues["place"], rel=1e-10)


def test_exact_figures_of_a_small_case():
    # Deviations of order -1, 0, 1 and of value -1, 1, 0 in both levels: slope 1/2, SSE 4 - 1 = 3 on 3.
    data = {"A": [(1, "1"), (2, "3"), (3, "2")], "B": [(4, "11"), (5, "13"), (6, "12")]}
    found = run_order_trend(ordered(data))
    assert (found.slope, found.df) == (Fraction(1, 2), 3)
    assert (found.statistic.sign, found.statistic.square) == (1, Fraction(1))


places = st.integers(0, 500).map(lambda place: Fraction(place, 4))
runs = st.lists(
    st.lists(st.tuples(places, st.builds(Decimal10, st.integers(-500, 500), st.integers(-2, 0))), max_size=6),
    min_size=1,
    max_size=4,
)


def outcome(groups):
    try:
        return run_order_trend(groups)
    except NotComputableError as error:
        return str(error)


@given(runs, st.randoms(use_true_random=False), st.integers(-100, 100))
def test_rows_levels_and_the_means_of_the_levels_do_not_matter(listed, random, constant):
    groups = [(f"L{at}", one) for at, one in enumerate(listed)]
    moved = [
        (
            level,
            [
                (place, Decimal10(y.mantissa + 10**-y.exponent * constant * at, y.exponent))
                for place, y in one
            ],
        )
        for at, (level, one) in enumerate(groups)
    ]
    shuffled = [(level, random.sample(one, len(one))) for level, one in random.sample(moved, len(moved))]
    assert outcome(shuffled) == outcome(groups)


@given(runs, st.integers(1, 9), st.integers(-9, 9))
def test_the_unit_and_the_origin_of_the_order_do_not_matter_to_t(listed, factor, origin):
    groups = [(f"L{at}", one) for at, one in enumerate(listed)]
    other = [(level, [(place * factor + origin, value) for place, value in one]) for level, one in groups]
    before, after = outcome(groups), outcome(other)
    if isinstance(before, str):
        assert after == before
    else:
        assert after.slope * factor == before.slope
        assert (after.statistic, after.tail) == (before.statistic, before.tail)


def test_a_reversed_order_turns_the_sign():
    backwards = {level: [(-place, text) for place, text in listed] for level, listed in DATA.items()}
    found, turned = run_order_trend(ordered(DATA)), run_order_trend(ordered(backwards))
    assert turned.slope == -found.slope
    assert turned.statistic.sign == -found.statistic.sign
    assert turned.tail == found.tail


def test_no_slope_is_no_evidence():
    found = run_order_trend(ordered({"A": [(1, "1"), (2, "2"), (3, "1")], "B": [(4, "1"), (6, "1")]}))
    assert found.slope == 0
    assert found.tail.p == 1


@pytest.mark.parametrize(
    ("data", "reason"),
    [
        ({"A": [(1, "1"), (2, "2")]}, "too few values"),
        ({"A": [(1, "1"), (2, "2")], "B": [(3, "1")]}, "too few values"),
        ({}, "too few values"),
        ({"A": [(1, "1"), (1, "2"), (1, "4")]}, "does not vary within any level"),
        ({"A": [(1, "1"), (2, "2"), (3, "3")]}, "no error is left"),
        ({"A": [(1, "1"), (2, "1"), (3, "1")]}, "no error is left"),
    ],
)
def test_what_cannot_be_tested_is_refused_with_the_reason(data, reason):
    with pytest.raises(NotComputableError, match=reason):
        run_order_trend(ordered(data))


def test_p_keeps_its_meaning_in_simulated_samples_without_drift():
    generator = np.random.default_rng(8)
    shown = 0
    for _ in range(400):
        values = generator.normal(size=12)
        groups = [
            (level, [(Fraction(at), Decimal10(round(1e6 * values[at]), -6)) for at in range(start, 12, 3)])
            for start, level in enumerate("ABC")
        ]
        shown += run_order_trend(groups).tail.p <= 0.1
    assert 17 <= shown <= 65  # 40 expected, four standard errors of 6 either way
