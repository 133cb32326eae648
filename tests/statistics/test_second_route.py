"""The second route recomputes by other algorithms what is reported; a changed digit does not get past it."""

import ast
from collections.abc import Callable, Sequence
from dataclasses import replace
from fractions import Fraction
from itertools import combinations, pairwise
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.exact import Decimal10, ExactSums, Root, round_significant, to_double
from assayfolio.statistics import second_nodes, second_tails
from assayfolio.statistics import second_route as second_route_module
from assayfolio.statistics.distributions import many_to_one_sf, studentized_range_isf, studentized_range_sf
from assayfolio.statistics.oneway import OneWay, one_way
from assayfolio.statistics.second_route import (
    MOST_ROWS,
    NotCompared,
    ReportedTable,
    ReportedTail,
    ReportedTails,
    SecondRoute,
    chosen_rows,
    second_route,
)
from assayfolio.statistics.second_tails import (
    ManyToOneAbove,
    ManyToOneTwoSided,
    StudentAbove,
    StudentizedRange,
    StudentTwoSided,
    VarianceRatio,
)
from assayfolio.statistics.tails import f_isf, f_sf, t_isf, t_sf, t_two_sided
from sources.nist import NAMES, read_dataset
from support.reference import Groups, cases_of, decimals, relative_error

METHODS = {
    "electrode": ["5.21", "5.43", "5.38", "5.29", "5.41"],
    "kit a": ["5.77", "5.69", "5.93", "5.82", "5.71"],
    "kit b": ["5.35", "5.52", "5.30", "5.44", "5.61"],
    "reference": ["5.33", "5.37", "5.49", "5.36", "5.45"],
}


def analysis_of(groups: Groups) -> OneWay:
    return one_way([(level, ExactSums.of(values)) for level, values in groups])


def table_of(analysis: OneWay) -> ReportedTable:
    return ReportedTable(
        means={level.level: to_double(level.mean) for level in analysis.levels},
        ss_between=to_double(analysis.ss_between),
        ss_within=to_double(analysis.ss_within),
        f=None if analysis.f is None else to_double(analysis.f),
    )


def root(analysis: OneWay, a: int, b: int, factor: int = 1) -> float:
    """The t statistic of a pair of levels, times the square root of `factor`."""
    one, other = analysis.levels[a], analysis.levels[b]
    variance = analysis.ms_within * (Fraction(1, one.n) + Fraction(1, other.n))
    difference = one.mean - other.mean
    return to_double(Root((difference > 0) - (difference < 0), factor * difference**2 / variance))


def stated(p: float) -> float:
    return round_significant(float(p))


def tails_of(analysis: OneWay) -> list[ReportedTails]:
    """One family of every kind, as a report would state them."""
    k, df = analysis.k, analysis.df_within
    assert analysis.f is not None
    f, df1 = to_double(analysis.f), analysis.df_between
    pairs = [(a, b, f"{a} - {b}") for a, b in combinations(range(k), 2)]
    control, others = analysis.levels[0].n, tuple(level.n for level in analysis.levels[1:])
    t, q = [root(analysis, a, b) for a, b, _ in pairs], [abs(root(analysis, a, b, 2)) for a, b, _ in pairs]
    d = [root(analysis, other, 0) for other in range(1, k)]
    names = [name for _, _, name in pairs]

    def family(
        quantity: str, law, labels: Sequence[str], statistics: Sequence[float], sf: Callable
    ) -> ReportedTails:
        p = sf(np.array(statistics))
        rows = [
            ReportedTail(*row) for row in zip(labels, [law] * len(p), statistics, map(stated, p), strict=True)
        ]
        return ReportedTails(quantity, rows)

    two_sided, above = ManyToOneTwoSided(control, others, df), ManyToOneAbove(control, others, df)
    to_first = names[: k - 1]
    return [
        family("F test", VarianceRatio(df1, df), ["F"], [f], lambda x: f_sf(x, df1, df)),
        family("all pairs, t", StudentTwoSided(df), names, t, lambda x: t_two_sided(x, df)),
        family("all pairs, t above", StudentAbove(df), names, t, lambda x: t_sf(x, df)),
        family("all pairs", StudentizedRange(k, df), names, q, lambda x: studentized_range_sf(x, k, df)),
        family(
            "against the first", two_sided, to_first, d, lambda x: many_to_one_sf(abs(x), control, others, df)
        ),
        family(
            "above the first",
            above,
            to_first,
            d,
            lambda x: many_to_one_sf(x, control, others, df, two_sided=False),
        ),
    ]


def route_of(groups: Groups) -> SecondRoute:
    analysis = analysis_of(groups)
    return second_route(groups, table_of(analysis), tails_of(analysis) if analysis.f else [])


def test_a_study_agrees_in_every_quantity():
    route = route_of(decimals(METHODS))
    assert route.holds
    assert route.failures == route.not_compared == ()
    assert [agreement.quantity for agreement in route.agreements] == [
        *(
            "means",
            "SS between",
            "SS within",
            "F",
            "F test",
            "all pairs, t",
            "all pairs, t above",
            "all pairs",
        ),
        *("against the first", "above the first"),
    ]
    assert all(agreement.digits > 10.9 for agreement in route.agreements)
    assert [(one.compared, one.of) for one in route.agreements[:5]] == [
        (4, 4),
        (1, 1),
        (1, 1),
        (1, 1),
        (1, 1),
    ]


EIGHTH_DIGIT = 1 + 1.1e-8


@pytest.mark.parametrize("field", ["ss_between", "ss_within", "f"])
@pytest.mark.parametrize("factor", [EIGHTH_DIGIT, 1 / EIGHTH_DIGIT, -1, 0, 1e200])
def test_an_altered_sum_of_squares_or_f_is_found(field, factor):
    groups = decimals(METHODS)
    table = table_of(analysis_of(groups))
    route = second_route(groups, replace(table, **{field: getattr(table, field) * factor}))
    assert [failure.quantity for failure in route.failures] == [
        {"f": "F"}.get(field, field.replace("ss_", "SS "))
    ]
    assert not route.holds


@pytest.mark.parametrize("level", METHODS)
def test_an_altered_mean_is_found_and_named(level):
    groups = decimals(METHODS)
    table = table_of(analysis_of(groups))
    altered = {**table.means, level: table.means[level] * EIGHTH_DIGIT}
    (failure,) = second_route(groups, replace(table, means=altered)).failures
    assert (failure.quantity, failure.at) == ("means", level)
    assert 7 < failure.digits < 8


@pytest.mark.parametrize("family", range(6))
@pytest.mark.parametrize("factor", [EIGHTH_DIGIT, 1 / EIGHTH_DIGIT, 0])
def test_an_altered_tail_is_found_and_named(family, factor):
    groups = decimals(METHODS)
    analysis = analysis_of(groups)
    reported = tails_of(analysis)[family]
    for row, tail in enumerate(reported.rows):
        rows = [*reported.rows]
        rows[row] = replace(tail, p=tail.p * factor)
        (failure,) = second_route(groups, table_of(analysis), [replace(reported, rows=rows)]).failures
        assert (failure.quantity, failure.at) == (reported.quantity, tail.label)


@pytest.mark.parametrize("wrong", [float("nan"), float("inf"), float("-inf")])
def test_what_is_not_a_number_does_not_agree(wrong):
    groups = decimals(METHODS)
    table = table_of(analysis_of(groups))
    for altered in (replace(table, ss_within=wrong), replace(table, f=wrong)):
        (failure,) = second_route(groups, altered).failures
        assert failure.digits == 0


@pytest.mark.requirement("NUMBERS-3")
@pytest.mark.parametrize("name", NAMES)
def test_nist_data_sets_agree_to_fourteen_digits_whatever_their_common_offset(name):
    groups = decimals(read_dataset(name).groups)
    route = route_of(groups)
    assert route.holds
    for agreement in route.agreements[:4]:
        assert agreement.digits > 14
        assert agreement.bound < 1e-12


def test_level_offsets_far_beyond_the_spread_do_not_blur_the_variation_within():
    groups = decimals({"a": ["1e30", "1000000000000000000000000000000.2"], "b": ["0.1", "0.4", "0.2"]})
    route = route_of(groups)
    assert route.holds
    assert route.agreements[2].bound < 1e-13


values = st.builds(Decimal10, st.integers(-(10**15), 10**15), st.integers(-30, 20))


@given(st.lists(st.lists(values, min_size=1, max_size=6), min_size=2, max_size=5), st.integers(1, 9))
def test_correct_numbers_agree_for_any_data(levels, spread):
    levels[0] = [*levels[0], Decimal10(levels[0][0].mantissa + spread, levels[0][0].exponent)]
    groups = [(f"L{at}", level) for at, level in enumerate(levels)]
    assert second_route(groups, table_of(analysis_of(groups))).holds


def test_equal_level_means_agree_although_their_sum_of_squares_is_zero():
    groups = decimals({"a": ["0.1", "0.7"], "b": ["0.2", "0.6"], "c": ["0.35", "0.45"]})
    table = table_of(analysis_of(groups))
    assert (table.ss_between, table.f) == (0, 0)
    assert second_route(groups, table).holds
    assert not second_route(groups, replace(table, ss_between=1e-25)).holds


def test_without_variation_within_f_is_named_as_not_compared():
    groups = decimals({"a": ["0.1", "0.1"], "b": ["0.2", "0.2", "0.2"]})
    route = second_route(groups, table_of(analysis_of(groups)))
    assert route.holds
    assert route.not_compared == (NotCompared("F", "it is not reported"),)
    claimed = replace(table_of(analysis_of(groups)), f=12.0)
    assert [failure.quantity for failure in second_route(groups, claimed).failures] == ["F"]


def test_two_hundred_levels_agree_on_forty_of_their_pairs():
    groups = decimals(
        {f"L{i}": [f"{i % 13}.{(i * 7 + j * 31) % 100:02}" for j in range(3 + i % 3)] for i in range(200)}
    )
    route = route_of(groups)
    assert route.holds
    all_pairs = next(agreement for agreement in route.agreements if agreement.quantity == "all pairs")
    assert (all_pairs.compared, all_pairs.of) == (MOST_ROWS, 19_900)


def test_a_hundred_thousand_values_agree():
    units = np.random.default_rng(7).integers(-999, 1000, size=(4, 25_000))
    groups = [
        (f"L{at}", [Decimal10(10**12 + int(unit) + 3 * at, -3) for unit in row])
        for at, row in enumerate(units)
    ]
    route = route_of(groups)
    assert route.holds
    assert min(agreement.digits for agreement in route.agreements[:4]) > 12


def test_tails_too_small_for_either_route_are_named_and_have_to_be_small_in_both():
    groups = decimals(METHODS)
    table = table_of(analysis_of(groups))
    tiny = ReportedTail("a - b", StudentTwoSided(1000), 80.0, 0.0)
    small = ReportedTails("all pairs", [tiny])
    route = second_route(groups, table, [small])
    assert route.not_compared == (NotCompared("all pairs", "1 of 1 tails are below 1e-280 in both"),)
    assert route.holds
    claimed_tiny = ReportedTails("all pairs", [replace(tiny, statistic=2.0)])
    assert [failure.quantity for failure in second_route(groups, table, [claimed_tiny]).failures] == [
        "all pairs"
    ]


def test_a_family_without_tails_is_named():
    groups = decimals(METHODS)
    route = second_route(groups, table_of(analysis_of(groups)), [ReportedTails("all pairs", [])])
    assert route.not_compared == (NotCompared("all pairs", "no tails are reported"),)


def test_means_of_other_levels_are_refused():
    groups = decimals(METHODS)
    table = table_of(analysis_of(groups))
    with pytest.raises(ValueError, match="levels that were analysed"):
        second_route(groups[1:], table)


def test_of_a_large_family_the_smallest_the_largest_and_evenly_spaced_ones_are_chosen():
    p = [((i * 7919) % 1000) / 1000 for i in range(1000)]
    chosen = chosen_rows(p)
    assert len(set(chosen)) == MOST_ROWS == 40
    assert list(chosen) == sorted(chosen)
    ranks = sorted(round(p[row] * 1000) for row in chosen)
    assert (ranks[0], ranks[-1]) == (0, 999)
    assert {b - a for a, b in pairwise(ranks)} == {25, 26}
    assert chosen_rows([0.5] * 41) == chosen_rows([0.5] * 41)
    assert chosen_rows(p[:40]) == tuple(range(40))


def test_of_a_family_with_many_different_sizes_fewer_rows_are_recomputed_but_four_at_least():
    sizes = tuple(range(3, 83))
    groups = decimals(METHODS)
    rows = [
        ReportedTail(str(d), ManyToOneTwoSided(6, sizes, 40), d, stated(many_to_one_sf(d, 6, sizes, 40)))
        for d in (0.5, 1.5, 2.5, 3.5, 4.5, 5.5, 6.5)
    ]
    route = second_route(groups, table_of(analysis_of(groups)), [ReportedTails("against the first", rows)])
    assert route.holds
    assert (route.agreements[-1].compared, route.agreements[-1].of) == (5, 7)


@pytest.mark.requirement("NUMBERS-2")
@pytest.mark.parametrize("module", [second_route_module, second_tails, second_nodes])
def test_the_second_route_is_built_of_nothing_that_the_first_is_built_of(module):
    tree = ast.parse(Path(module.__file__).read_text("utf-8"))
    imported = {node.module for node in ast.walk(tree) if isinstance(node, ast.ImportFrom) and node.module}
    own = {name.removeprefix("assayfolio.") for name in imported if name.startswith("assayfolio.")}
    assert own <= {"exact", "statistics.arguments", "statistics.second_nodes", "statistics.second_tails"}
    names = {node.id for node in ast.walk(tree) if isinstance(node, ast.Name)}
    assert not names & {"ExactSums", "to_double", "Root"}


RANGES = {
    name: case
    for name, case in cases_of("studentized_range").items()
    if "sf" in case["expected"] and case["inputs"]["df"] != "inf"  # a run always has a finite number
}


@pytest.mark.parametrize("name", RANGES)
def test_range_tails_of_the_second_node_set_are_right(name):
    inputs, expected = RANGES[name]["inputs"], RANGES[name]["expected"]
    (tail,) = StudentizedRange(inputs["k"], float(inputs["df"])).tails(np.array([float(inputs["q"])]))
    assert relative_error(float(tail), expected["sf"]) < 1e-11


# Computed by nested trapezoidal sums in 113-bit arithmetic, independently of this package.
MANY_TO_ONE = [
    (ManyToOneTwoSided(5, (5, 5, 5), 16), 2.3, "0.08726719488454976025912"),
    (ManyToOneTwoSided(6, (6,) * 8, 40), 8.0, "6.21835592004636769462e-9"),
    (ManyToOneAbove(6, (6, 6, 7), 12), 0.5, "0.5424245131294490055661"),
    (ManyToOneTwoSided(5, (3, 9), 14), 0.2, "0.9713454960369800716856"),
    (ManyToOneAbove(4, (4, 5, 6), 15), -1.2, "0.9720658313626358058976"),
    (ManyToOneTwoSided(7, (13,), 5), 2.570581835636315514696246, "0.05"),
]


@pytest.mark.parametrize(("law", "statistic", "expected"), MANY_TO_ONE)
def test_many_to_one_tails_of_the_second_node_set_are_right(law, statistic, expected):
    (tail,) = law.tails(np.array([statistic]))
    assert relative_error(float(tail), expected) < 1e-12


P = np.array([0.9999, 0.9, 0.5, 0.05, 1e-3, 1e-6, 1e-10, 1e-14, 1e-50, 1e-200])


@pytest.mark.parametrize("df", [1, 2, 5, 42, 1000, 99_996, 1_000_000])
def test_both_routes_give_the_same_elementary_tails(df):
    for df1 in (1, 3, 29, 199):
        f = np.array([float(f_isf(p, df1, df)) for p in P])
        f = f[f < 1e250]
        assert VarianceRatio(df1, df).tails(f) == pytest.approx(f_sf(f, df1, df), rel=2e-12, abs=0)
    t = t_isf(P[P > 1e-100], df)
    assert StudentAbove(df).tails(t) == pytest.approx(t_sf(t, df), rel=2e-12, abs=0)
    assert StudentTwoSided(df).tails(-t) == pytest.approx(t_two_sided(t, df), rel=2e-12, abs=0)


@pytest.mark.parametrize("df", [1, 3, 10, 120, 5000, 1_000_000])
@pytest.mark.parametrize("k", [2, 3, 8, 40, 200])
def test_both_routes_give_the_same_range_tails(k, df):
    q = studentized_range_isf(P, k, df)
    q = q[q < 1e250]
    tails = StudentizedRange(k, df).tails(np.array([0.0, *q]))
    assert tails[0] == 1
    assert tails[1:] == pytest.approx(studentized_range_sf(q, k, df), rel=5e-11, abs=0)


@pytest.mark.parametrize("df", [2, 10, 120, 20_000])
@pytest.mark.parametrize(
    ("n_control", "n_others"),
    [(6, (6,) * 3), (6, (6,) * 20), (2, (40,) * 6), (10, (3, 4, 5, 6)), (3, (3,) * 199)],
)
def test_both_routes_give_the_same_many_to_one_tails(n_control, n_others, df):
    d = np.array([0.0, 0.4, 1.5, 2.5, 4.0, 9.0])
    two_sided = many_to_one_sf(d, n_control, n_others, df)
    assert ManyToOneTwoSided(n_control, n_others, df).tails(-d) == pytest.approx(two_sided, rel=5e-11, abs=0)
    d = np.array([-3.0, -0.7, 0.0, 0.4, 2.5, 9.0])
    above = many_to_one_sf(d, n_control, n_others, df, two_sided=False)
    assert ManyToOneAbove(n_control, n_others, df).tails(d) == pytest.approx(above, rel=5e-11, abs=0)


@pytest.mark.parametrize("n_others", [7, 300])
def test_one_difference_from_a_control_has_students_tail(n_others):
    t = np.array([-2.0, 0.0, 0.3, 2.0, 8.0, 40.0])
    assert ManyToOneAbove(4, (n_others,), 9).tails(t) == pytest.approx(t_sf(t, 9), rel=1e-12, abs=0)
    assert ManyToOneTwoSided(4, (n_others,), 9).tails(t) == pytest.approx(t_two_sided(t, 9), rel=1e-12, abs=0)


@pytest.mark.parametrize("df", [1, 42, 1_000_000])
def test_statistics_far_out_have_tails_of_zero_and_one(df):
    far = np.array([1e290])
    laws = [StudentizedRange(6, df), ManyToOneTwoSided(6, (6, 8), df), StudentTwoSided(df), StudentAbove(df)]
    assert max(float(law.tails(far)[0]) for law in [*laws, VarianceRatio(200, 2 * df)]) < 1e-280
    assert StudentAbove(df).tails(-far) == 1
    assert ManyToOneAbove(6, (6, 8), df).tails(-far) == pytest.approx([1.0], rel=1e-11)


def test_a_tail_does_not_depend_on_which_others_are_recomputed_with_it():
    # The nodes are those of all rows together, so that the last digits may differ, and no more than these.
    law, q = StudentizedRange(6, 42), np.array([0.5, 2.0, 4.2, 9.0])
    alone = [float(law.tails(np.array([one]))[0]) for one in q]
    assert law.tails(q) == pytest.approx(alone, rel=1e-13, abs=0)
