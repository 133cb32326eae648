# A script for a terminal.
# ruff: noqa: T201
"""All pairs of levels: this package and scipy.stats.tukey_hsd side by side; memory; a whole analysis.

    python tests/benchmarks/pairs_times.py

Each side does the whole procedure, from the data to adjusted p-values and simultaneous 95 % intervals. Then
the memory of all pairs for 50, 100 and 200 levels, and the time of a complete analysis of six levels of eight
values.
"""

import sys
import tracemalloc
from pathlib import Path

from scipy import stats

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))

from assayfolio.evaluation.apply import evaluate
from assayfolio.statistics.comparisons import ComparisonResult
from assayfolio.statistics.estimates import pair_estimates
from assayfolio.statistics.simultaneous import compare_tukey_kramer
from benchmarks.side_by_side import Texts, analysis_of, digits_in_common, doubles_of, levels_of, timed
from support.studies import observations_of, study_of

COMPLETE = """\
comparisons:
  - {name: every pair, pairs: all, adjust: tukey-kramer}
  - {name: each against the first, against: L000, adjust: dunnett}
"""


def ours(texts: Texts) -> tuple[ComparisonResult, ...]:
    """The procedure by this package."""
    analysis = analysis_of(texts)
    return compare_tukey_kramer(analysis, pair_estimates(analysis), 0.05)


def theirs(texts: Texts) -> tuple[list[float], list[float]]:
    """Adjusted p-values and lower ends by SciPy, in the order of the pairs."""
    result = stats.tukey_hsd(*doubles_of(texts))
    low = result.confidence_interval(0.95).low
    pairs = [(a, b) for a in range(len(texts)) for b in range(a + 1, len(texts))]
    return [float(result.pvalue[pair]) for pair in pairs], [float(low[pair]) for pair in pairs]


def compare(k: int, n: int) -> None:
    """Print both times, their ratio, and the digits that agree."""
    texts = levels_of(k, n)
    first, median, rows = timed(lambda: ours(texts), 9)
    _, theirs_median, (p, low) = timed(lambda: theirs(texts), 1)
    print(f"all pairs, k = {k}, n = {n}: {len(rows)} pairs")
    print(f"  this package, first call      {first:9.2f} ms  (makes the curves of this k)")
    print(f"  this package, median          {median:9.2f} ms")
    print(f"  scipy.stats.tukey_hsd         {theirs_median:9.2f} ms")
    print(f"  ratio, first call / median    {theirs_median / first:9.0f} / {theirs_median / median:.0f}")
    for least in (1e-3, 1e-8):
        worst, middle = digits_in_common([row.adjusted.p for row in rows], p, least)
        print(f"  digits in common, p >= {least:.0e}  {worst:7.1f} worst, {middle:.1f} median")
    worst, middle = digits_in_common([abs(row.interval[0]) for row in rows], [abs(end) for end in low], 0)
    print(f"  digits in common, lower end   {worst:9.1f} worst, {middle:.1f} median")


def show_memory(k: int) -> None:
    """Print the peak while all pairs are compared, beside what the results themselves hold."""
    analysis = analysis_of(levels_of(k, 4))
    compare_tukey_kramer(analysis, pair_estimates(analysis)[:1], 0.05)  # the curves of this k stay
    tracemalloc.start()
    rows = compare_tukey_kramer(analysis, pair_estimates(analysis), 0.05)
    held, peak = tracemalloc.get_traced_memory()
    tracemalloc.stop()
    each = held / len(rows)
    print(
        f"  k = {k:3d}: {len(rows):6d} pairs, results {held / 2**20:6.1f} MiB ({each:.0f} bytes a pair), "
        f"peak {peak / 2**20:6.1f} MiB, beyond the results {(peak - held) / 2**20:5.1f} MiB"
    )


def show_complete_analysis() -> None:
    """Print the time of `evaluate` on six levels of eight values."""
    study = study_of(COMPLETE)
    observations = observations_of(study, levels_of(6, 8))
    first, median, _ = timed(lambda: evaluate(study, observations), 25)
    print(f"complete analysis of 6 x 8 values: first call {first:.2f} ms, median {median:.2f} ms")


def main() -> None:
    """Print the three parts."""
    # Imports and tables that both sides make once are not the subject.
    ours(levels_of(3, 4))
    theirs(levels_of(3, 4))
    compare(30, 8)
    print("memory of all pairs")
    for k in (50, 100, 200):
        show_memory(k)
    show_complete_analysis()


if __name__ == "__main__":
    main()
