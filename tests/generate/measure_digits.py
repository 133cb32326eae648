"""How many digits the distribution functions have, measured: the table of DEVELOPERS.md.

    python tests/generate/measure_digits.py

Digits are -log10 of the largest relative difference on the grid that the row names. Tails are compared at the
exact binary value of the argument; a point by how far it would have to move to have exactly the tail it was
asked for. Takes some minutes.
"""

import itertools
import math
import sys
from collections.abc import Callable, Iterable, Iterator
from fractions import Fraction
from pathlib import Path

import mpmath as mp

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))

from assayfolio.statistics import tails
from assayfolio.statistics.distributions import (
    many_to_one_isf,
    many_to_one_log10_sf,
    many_to_one_sf,
    studentized_range_isf,
    studentized_range_log10_sf,
    studentized_range_sf,
)
from assayfolio.statistics.grubbs_pairs import pair_tail
from assayfolio.statistics.noncentral import (
    noncentral_f_cdf,
    noncentral_f_noncentrality,
    noncentral_f_sf,
    noncentral_t_cdf,
    noncentral_t_sf,
)
from assayfolio.statistics.power import f_power_of_means
from assayfolio.statistics.power_equivalence import equivalence_power
from support.high_precision import (
    chi2_below,
    chi2_tail,
    distance,
    distance_by_log10,
    f_tail,
    normal_tail,
    t_tail,
)
from support.many_to_one_by_trapezoid import many_to_one_tail
from support.many_to_one_in_high_precision import normal_maximum_tail
from support.noncentral_in_high_precision import noncentral_f_tails, noncentral_t_tails
from support.range_by_trapezoid import studentized_range_tails
from support.reference import cases_of
from support.sphere_of_four import four_values_tail

Row = tuple[str, str, Iterable[float], str]

DFS = (1.0, 1.5, 2.0, 5.0, 12.7, 60.0, 300.0, 5000.0, 1e6)
NUMERATORS = (1.0, 2.0, 3.5, 8.0, 40.0, 1000.0)
SHARES = (0.98, 0.7, 0.3, 0.05, 1e-3, 1e-8, 1e-15, 1e-29)
SMALL = (1e-31, 1e-60, 1e-120, 1e-200, 1e-299)
LEVELS = (0.99, 0.7, 0.3, 0.05, 0.005, 1e-6, 1e-14)


def f_errors(
    shares: Iterable[float], measure: Callable[[float, mp.mpf], float], name: str
) -> Iterator[float]:
    """Over all degrees of freedom, at points with about these tails."""
    for share, dfn, dfd in itertools.product(shares, NUMERATORS, DFS):
        f = tails.f_isf(share, dfn, dfd)
        if math.isfinite(f):
            yield measure(getattr(tails, name)(f, dfn, dfd), f_tail(f, dfn, dfd))


def t_errors(
    shares: Iterable[float], measure: Callable[[float, mp.mpf], float], name: str
) -> Iterator[float]:
    """Over all degrees of freedom, infinity included, at points with about these tails."""
    for share, df in itertools.product(shares, (*DFS, math.inf)):
        t = tails.t_isf(share, df)
        yield measure(getattr(tails, name)(t, df), t_tail(t, df))


def chi2_errors(shares: Iterable[float]) -> Iterator[float]:
    """Over all degrees of freedom, at points with about these tails."""
    for share, df in itertools.product(shares, DFS):
        x = tails.chi2_isf(share, df)
        yield distance(tails.chi2_sf(x, df), chi2_tail(x, df))


def point_error(point: float, level: float, tail: Callable[[float], mp.mpf]) -> float:
    """By what share of itself `point` misses the place where `tail` is `level`."""
    with mp.workdps(40):
        at, beyond = tail(point), tail(point * (1 + 1e-6))
        slope = (beyond - at) / (mp.mpf(point * (1 + 1e-6)) / mp.mpf(point) - 1)
        return float(abs((at - mp.mpf(level)) / slope))


def f_point_errors() -> Iterator[float]:
    """Of `f_isf`."""
    for level, dfn, dfd in itertools.product(LEVELS, NUMERATORS, DFS):
        yield point_error(tails.f_isf(level, dfn, dfd), level, lambda f, n=dfn, d=dfd: f_tail(f, n, d))


def t_point_errors() -> Iterator[float]:
    """Of `t_isf`."""
    for level, df in itertools.product(LEVELS, (*DFS, math.inf)):
        yield point_error(tails.t_isf(level, df), level, lambda t, d=df: t_tail(t, d))


def chi2_point_errors() -> Iterator[float]:
    """Of `chi2_isf` and `chi2_ppf`."""
    for level, df in itertools.product(LEVELS, DFS):
        yield point_error(tails.chi2_isf(level, df), level, lambda x, d=df: chi2_tail(x, d))
        yield point_error(tails.chi2_ppf(level, df), level, lambda x, d=df: chi2_below(x, d))


def normal_errors() -> Iterator[float]:
    """Of `normal_sf`, by steps of 0.37 up to 37."""
    for step in range(-100, 101):
        yield distance(tails.normal_sf(0.37 * step), normal_tail(0.37 * step))


def normal_point_errors() -> Iterator[float]:
    """Of `normal_isf`."""
    for level in (*LEVELS, *SMALL):
        yield point_error(tails.normal_isf(level), level, normal_tail)


def reference_tail_errors() -> Iterator[float]:
    """Of `studentized_range_sf` against the reference vectors."""
    for case in cases_of("studentized_range").values():
        inputs = case["inputs"]
        if "q" in inputs:
            tail = studentized_range_sf(float(inputs["q"]), inputs["k"], float(inputs["df"]))
            yield distance(tail, mp.mpf(case["expected"]["sf"]))


def reference_point_errors() -> Iterator[float]:
    """Of `studentized_range_isf` against the reference vectors."""
    for case in cases_of("studentized_range").values():
        inputs = case["inputs"]
        if "upper_tail" in inputs:
            point = studentized_range_isf(float(inputs["upper_tail"]), inputs["k"], float(inputs["df"]))
            yield distance(point, mp.mpf(case["expected"]["q"]))


def pair_errors(shares: Iterable[float]) -> Iterator[float]:
    """Of `studentized_range_log10_sf` for two means, which is Student's t."""
    for share, df in itertools.product(shares, (*DFS, math.inf)):
        t = tails.t_isf(share / 2, df)
        q = t * math.sqrt(2)
        with mp.workdps(40):
            truth = 2 * t_tail(mp.mpf(q) / mp.sqrt(2), df)
        yield distance_by_log10(studentized_range_log10_sf(q, 2, df), truth)


def trapezoid_errors(levels: Iterable[float]) -> Iterator[float]:
    """Of `studentized_range_sf` against the nested trapezoidal rule."""
    for level, k, df in itertools.product(
        levels, (3, 10, 50, 200), (2.0, 6.3, 20.0, 120.0, 1e4, 1e6, math.inf)
    ):
        q = studentized_range_isf(level, k, df)
        upper, lower = studentized_range_tails(q, k, df)
        tail = studentized_range_sf(q, k, df)
        yield max(abs(tail / upper - 1), abs((1 - tail) - lower))


def many_to_one_reference_errors(given: str) -> Iterator[float]:
    """Of `many_to_one_sf` where a statistic t is `given`, else of `many_to_one_isf`, against the vectors."""
    for case in cases_of("dunnett").values():
        inputs, expected = case["inputs"], case["expected"]
        if given in inputs:
            law = (inputs["n_control"], inputs["n_treatments"], float(inputs["df"]), inputs["sided"] == "two")
            if given == "t":
                yield distance(many_to_one_sf(float(inputs["t"]), *law), mp.mpf(expected["sf"]))
            else:
                yield distance(many_to_one_isf(float(inputs["alpha"]), *law), mp.mpf(expected["d"]))


def many_to_one_trapezoid_errors(levels: Iterable[float], dfs: Iterable[float]) -> Iterator[float]:
    """Of `many_to_one_log10_sf` against the nested trapezoidal rule."""
    sizes: list[tuple[float, list[float]]] = [
        (6, [6] * 20),
        (4, [4] * 199),
        (10, [4, 6, 20]),
        (1, [40, 7]),
        (100, [3] * 30),
    ]
    for level, (n_control, n_others), df, sides in itertools.product(levels, sizes, dfs, (1, 2)):
        d = many_to_one_isf(level, n_control, n_others, df, two_sided=sides == 2)
        truth = many_to_one_tail(d, n_control, n_others, df, sides)
        tail = many_to_one_log10_sf(d, n_control, n_others, df, two_sided=sides == 2)
        yield distance_by_log10(tail, mp.mpf(truth))


def unequal_sizes_errors(levels: Iterable[float]) -> Iterator[float]:
    """Of `many_to_one_log10_sf` with sigma known and sizes up to a million apart."""
    sizes: list[tuple[float, list[float]]] = [
        (1, [1e6] * 5),
        (1e6, [1] * 199),
        (1, [1e4] * 199),
        (1, [1e6, 30]),
    ]
    for level, (n_control, n_others), sides in itertools.product(levels, sizes, (1, 2)):
        d = many_to_one_isf(level, n_control, n_others, math.inf, two_sided=sides == 2)
        truth = normal_maximum_tail(d, n_control, n_others, sides)
        tail = many_to_one_log10_sf(d, n_control, n_others, math.inf, two_sided=sides == 2)
        yield distance_by_log10(tail, truth)


def noncentral_f_errors() -> Iterator[float]:
    """Of both tails of noncentral F, wherever they are 1e-14 or more."""
    grid = itertools.product((1.0, 3.0, 40.0), (1.5, 8.0, 20.0, 300.0), (0.3, 12.0, 300.0), (0.3, 1.0, 3.0))
    for df1, df2, noncentrality, share in grid:
        f = share * (df1 + noncentrality) / df1
        above, below = noncentral_f_tails(f, df1, df2, noncentrality)
        if above >= 1e-14:
            yield distance(noncentral_f_sf(f, df1, df2, noncentrality), above)
        if below >= 1e-14:
            yield distance(noncentral_f_cdf(f, df1, df2, noncentrality), below)


def noncentral_t_errors() -> Iterator[float]:
    """Of both tails of noncentral t, wherever they are 1e-14 or more."""
    grid = itertools.product((1.0, 2.7, 8.0, 50.0, 1000.0), (-3.0, 0.3, 8.0, 40.0), (-2.0, 0.0, 2.0, 5.0))
    for df, delta, away in grid:
        above, below = noncentral_t_tails(delta + away, df, delta)
        if above >= 1e-14:
            yield distance(noncentral_t_sf(delta + away, df, delta), above)
        if below >= 1e-14:
            yield distance(noncentral_t_cdf(delta + away, df, delta), below)


def noncentrality_errors() -> Iterator[float]:
    """Of `noncentral_f_noncentrality`: how far the tail there is from the one that was asked for."""
    for f, df1, df2, p in itertools.product((2.0, 9.0, 80.0), (1.0, 3.0, 20.0), (8.0, 300.0), (0.975, 0.025)):
        found = noncentral_f_noncentrality(f, df1, df2, p)
        if found > 0:
            yield distance(p, noncentral_f_tails(f, df1, df2, found)[1])


def published_power_errors() -> Iterator[float]:
    """Of the power of the F test against the reference vectors."""
    for case in cases_of("power").values():
        inputs = case["inputs"]
        if "means" in inputs and "power" in case["expected"]:
            means = [Fraction(mean) for mean in inputs["means"]]
            found = f_power_of_means(means, inputs["n"], float(inputs["sigma"]), float(inputs["alpha"]))
            yield distance(found, mp.mpf(case["expected"]["power"]))


def published_equivalence_power_errors() -> Iterator[float]:
    """Of the power of equivalence against the reference vectors."""
    for case in cases_of("power").values():
        inputs = case["inputs"]
        if "margin" in inputs and "n" in inputs:
            lower, upper = map(float, inputs["margin"])
            df, true, sigma = (float(inputs[key]) for key in ("df", "true_difference", "sigma"))
            found = equivalence_power(*inputs["n"], df, true, lower, upper, sigma, float(inputs["alpha"]))
            yield distance(found, mp.mpf(case["expected"]["power"]))


def grubbs_pair_errors() -> Iterator[float]:
    """Of `pair_tail` for four values, whose residuals are a point on a sphere."""
    for ratio in (1e-8, 0.001, 0.01, 0.1, 0.3, 0.6):
        yield distance(pair_tail(ratio, 4), mp.mpf(four_values_tail(ratio)))


def rows() -> Iterator[Row]:
    """The table."""
    yield from tail_rows()
    yield from studentized_range_rows()
    yield from many_to_one_rows()
    yield from planning_rows()


def planning_rows() -> Iterator[Row]:
    """Noncentral distributions, power, and Grubbs' test of two values."""
    library = "mpmath, 50 digits"
    yield "noncentral_f_sf, _cdf", "p >= 1e-14, lambda to 300", noncentral_f_errors(), library
    yield "noncentral_t_sf, _cdf", "p >= 1e-14, df 1 to 1000", noncentral_t_errors(), "mpmath, 25 digits"
    yield "noncentral_f_noncentrality, by its tail", "p 0.975 and 0.025", noncentrality_errors(), library
    vectors = "tests/vectors/power.json, 20 digits"
    yield "f_power_of_means", "all cases with means", published_power_errors(), vectors
    yield "equivalence_power", "9 cases, power down to 5e-4", published_equivalence_power_errors(), vectors
    yield "pair_tail", "n = 4, ratio 1e-8 to 0.6", grubbs_pair_errors(), "an integral over the sphere, mpmath"


def tail_rows() -> Iterator[Row]:
    """F, t, chi-square and the normal distribution."""
    library, df = "mpmath, 50 digits", "df 1 to 1e6"
    yield "f_sf", f"p >= 1e-30, {df}", f_errors(SHARES, distance, "f_sf"), library
    yield "f_sf", f"1e-30 > p >= 1e-300, {df}", f_errors(SMALL, distance, "f_sf"), library
    yield (
        "f_log10_sf, as a tail",
        f"p >= 1e-300, {df}",
        f_errors((*SHARES, *SMALL), distance_by_log10, "f_log10_sf"),
        library,
    )
    yield "f_isf", f"p 0.99 to 1e-14, {df}", f_point_errors(), library
    yield "t_sf", f"p >= 1e-30, {df} and infinite", t_errors(SHARES, distance, "t_sf"), library
    yield "t_sf", f"1e-30 > p >= 1e-300, {df} and infinite", t_errors(SMALL, distance, "t_sf"), library
    yield "t_isf", f"p 0.99 to 1e-14, {df} and infinite", t_point_errors(), library
    yield "chi2_sf", f"p >= 1e-30, {df}", chi2_errors(SHARES), library
    yield "chi2_sf", f"1e-30 > p >= 1e-300, {df}", chi2_errors(SMALL), library
    yield "chi2_isf, chi2_ppf", f"p 0.99 to 1e-14, {df}", chi2_point_errors(), library
    yield "normal_sf", "z from -37 to 37", normal_errors(), library
    yield "normal_isf", "p 0.99 to 1e-299", normal_point_errors(), library


def studentized_range_rows() -> Iterator[Row]:
    """The studentized range."""
    library, plain = "mpmath, 50 digits", "nested trapezoidal rule, doubles"
    vectors = "tests/vectors/studentized_range.json, 18 digits and more"
    df = "df 1 to 1e6"
    yield "studentized_range_sf", "15 cases, p down to 2e-20", reference_tail_errors(), vectors
    yield "studentized_range_isf", "13 cases, p 0.999 to 1e-10", reference_point_errors(), vectors
    yield (
        "studentized_range_sf",
        "k 3 to 200, df 2 to 1e6 and infinite, p 0.99 to 1e-14",
        trapezoid_errors((0.99, 0.5, 0.05, 1e-4, 1e-9, 1e-14)),
        plain,
    )
    yield (
        "studentized_range_log10_sf, as a tail",
        f"k = 2, p >= 1e-30, {df} and infinite",
        pair_errors(SHARES),
        library,
    )
    yield "studentized_range_log10_sf, as a tail", "k = 2, 1e-30 > p >= 1e-299", pair_errors(SMALL), library


def many_to_one_rows() -> Iterator[Row]:
    """The many-to-one distribution, two-sided and one-sided in every row."""
    plain, vectors = "nested trapezoidal rule, doubles", "tests/vectors/dunnett.json, 18 digits and more"
    yield "many_to_one_sf", "6 cases, p down to 6e-9", many_to_one_reference_errors("t"), vectors
    yield "many_to_one_isf", "14 cases, p 0.999 to 1e-10", many_to_one_reference_errors("alpha"), vectors
    yield (
        "many_to_one_log10_sf, as a tail",
        "2 to 199 others, df 1 to 1e6 and infinite, p 0.999 to 1e-14",
        many_to_one_trapezoid_errors(
            (0.999, 0.9, 0.5, 0.05, 1e-5, 1e-14), (1.0, 2.5, 12.0, 120.0, 1e6, math.inf)
        ),
        plain,
    )
    yield (
        "many_to_one_log10_sf, as a tail",
        "2 to 199 others, df 100 to 1e6 and infinite, p 1e-30 to 1e-200",
        many_to_one_trapezoid_errors((1e-30, 1e-60, 1e-200), (100.0, 1e6, math.inf)),
        plain,
    )
    yield (
        "many_to_one_log10_sf, as a tail",
        "sizes up to a million apart, df infinite, p 0.9 to 1e-14",
        unequal_sizes_errors((0.9, 0.05, 1e-14)),
        "mpmath, 20 digits",
    )
    yield (
        "many_to_one_log10_sf, as a tail",
        "the same, p 1e-60 to 1e-290",
        unequal_sizes_errors((1e-60, 1e-290)),
        "mpmath, 20 digits",
    )


def main() -> None:
    """Print the table."""
    print("| function | range | digits | against |")
    print("|---|---|---|---|")
    for name, where, errors, against in rows():
        worst = max(errors)
        digits = 16.0 if worst < 1e-16 else -math.log10(worst)
        print(f"| {name} | {where} | {digits:.1f} | {against} |", flush=True)


if __name__ == "__main__":
    main()
