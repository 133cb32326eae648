# A script for a terminal.
# ruff: noqa: T201
"""Every level against a control: this package and scipy.stats.dunnett side by side, on the same data.

    python tests/benchmarks/many_to_one_times.py

Each side does the whole procedure, from the data to adjusted p-values and simultaneous 95 % intervals: 20
treatments and a control of six values each, then of different sizes. SciPy samples at random, so its digits
differ from call to call; its seed is fixed here.
"""

import sys
from pathlib import Path

import numpy as np
from scipy import stats

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))

from assayfolio.statistics.comparisons import TWO_SIDED, ComparisonResult
from assayfolio.statistics.distributions import many_to_one_isf, many_to_one_sf
from assayfolio.statistics.many_to_one_comparisons import compare_dunnett, compare_dunnett_step_down
from benchmarks.side_by_side import Texts, analysis_of, digits_in_common, doubles_of, levels_of, timed


def ours(texts: Texts) -> tuple[ComparisonResult, ...]:
    """The procedure by this package; the first level is the control."""
    return compare_dunnett(analysis_of(texts), next(iter(texts)), TWO_SIDED, 0.05)


def theirs(texts: Texts) -> tuple[list[float], list[float]]:
    """Adjusted p-values and lower ends by SciPy."""
    control, *others = [np.array(values) for values in doubles_of(texts)]
    result = stats.dunnett(*others, control=control, rng=np.random.default_rng(1))
    return result.pvalue.tolist(), result.confidence_interval(0.95).low.tolist()


def compare(title: str, texts: Texts) -> None:
    """Print both times, their ratio, and the digits that agree."""
    first, median, rows = timed(lambda: ours(texts), 15)
    _, theirs_median, (p, low) = timed(lambda: theirs(texts), 3)
    print(title)
    print(f"  this package, first call    {first:9.2f} ms  (makes the curves of this set of sizes)")
    print(f"  this package, median        {median:9.2f} ms")
    print(f"  scipy.stats.dunnett, median {theirs_median:9.2f} ms")
    print(f"  ratio, first call / median  {theirs_median / first:9.0f} / {theirs_median / median:.0f}")
    worst, middle = digits_in_common([row.adjusted.p for row in rows], p, 1e-4)
    print(f"  digits in common, p >= 1e-4 {worst:9.1f} worst, {middle:.1f} median (SciPy's sampling)")
    worst, middle = digits_in_common([abs(row.interval[0]) for row in rows], [abs(end) for end in low], 0)
    print(f"  digits in common, lower end {worst:9.1f} worst, {middle:.1f} median")


def main() -> None:
    """Print the comparisons, then single calls."""
    # Imports and tables that both sides make once are not the subject.
    ours(levels_of(3, 4))
    theirs(levels_of(3, 4))
    equal = levels_of(21, 6)
    compare("20 treatments, n = 6", equal)
    unequal = {level: values[: 4 + at % 3] for at, (level, values) in enumerate(equal.items())}
    compare("20 treatments, n = 4, 5, 6 in turn", unequal)
    distinct = {level: values[: 4 + at] for at, (level, values) in enumerate(levels_of(21, 24).items())}
    compare("20 treatments, n = 5 to 24", distinct)
    print("single calls                                     first      then")
    d = np.linspace(0.1, 6, 5000)
    calls = {
        "many_to_one_sf, 19 others n = 7, df 105, one d": lambda: many_to_one_sf(3.0, 7, [7] * 19, 105),
        "many_to_one_isf, 19 others n = 7, df 105": lambda: many_to_one_isf(0.05, 7, [7] * 19, 105),
        "many_to_one_sf, 19 others n = 7, df 105, 5000 d": lambda: many_to_one_sf(d, 7, [7] * 19, 105),
        "many_to_one_sf, 199 others n = 2, df 200, one d": lambda: many_to_one_sf(3.0, 2, [2] * 199, 200),
        "many_to_one_sf, n = 2 to 200, df 1e4, one d": lambda: many_to_one_sf(3.0, 2, range(2, 201), 1e4),
        "step-down, 20 treatments, n = 6": lambda: compare_dunnett_step_down(
            analysis_of(equal), next(iter(equal)), TWO_SIDED
        ),
        "step-down, 20 treatments, n = 4, 5, 6": lambda: compare_dunnett_step_down(
            analysis_of(unequal), next(iter(unequal)), TWO_SIDED
        ),
    }
    for name, call in calls.items():
        first, median, _ = timed(call, 9)
        print(f"  {name:47s} {first:8.2f}  {median:8.2f} ms")


if __name__ == "__main__":
    main()
