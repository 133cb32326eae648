# A script for a terminal.
# ruff: noqa: T201
"""Ten million rows of CSV, two columns, 20 text levels: this package and pandas with SciPy side by side.

    python tests/benchmarks/rows_times.py [ROWS]

Each side reads the same file and computes F. Three figures are printed, with what is wanted of them: the
ratio of the times, in turns in one process (at most 0.5); the ratio of the peaks of memory, each side in a
process of its own (at most 0.25); whether sums, sums of squares and F are those of a simple reference, which
adds up Python's integers line by line (exactly). Then the time a row from 10^4 rows on.
"""

import statistics
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from fractions import Fraction
from functools import partial
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))

from assayfolio.exact import to_double
from assayfolio.observations.long_text import LongFile
from assayfolio.observations.streaming import stream_observations
from assayfolio.observations.totals import Totals
from assayfolio.statistics.oneway import OneWay, one_way
from assayfolio.study.plan import DataPlan

ROWS = 10_000_000
LEVELS = 20
PLACES = 3
MOST_TIME, MOST_MEMORY = 0.5, 0.25
TURNS = 3
PLAN = DataPlan("rows.csv", ("content",), "lot")

Sums = dict[str, tuple[int, Fraction, Fraction]]


def write_rows(path: Path, rows: int) -> None:
    """Invented contents of 20 lots, to three decimal places."""
    import numpy as np

    drawn = np.random.default_rng(20_261_201)
    names = np.array([f"lot {chr(65 + at)}{at:02d}" for at in range(LEVELS)])
    with path.open("w", encoding="utf-8") as file:
        file.write("lot,content\n")
        for start in range(0, rows, 500_000):
            size = min(500_000, rows - start)
            levels = drawn.integers(0, LEVELS, size)
            values = drawn.normal(50, 1.5, size) + levels / 1000
            file.writelines(
                f"{level},{value:.{PLACES}f}\n"
                for level, value in zip(names[levels].tolist(), values.tolist(), strict=True)
            )


def ours(path: Path) -> tuple[Totals, OneWay]:
    """Totals and analysis of variance by this package; the file is hashed on the way."""
    (observed,) = stream_observations([LongFile(path.name, lambda: path.open("rb"))], PLAN)
    assert observed.totals is not None
    return observed.totals, one_way([(level.level, level.sums) for level in observed.totals.levels])


def theirs(path: Path) -> float:
    """F by pandas and SciPy."""
    import pandas as pd
    from scipy import stats

    frame = pd.read_csv(path)
    return float(stats.f_oneway(*(values.to_numpy() for _, values in frame.groupby("lot")["content"]))[0])


def by_hand(path: Path) -> Sums:
    """Count, sum and sum of squares of each level, line by line in Python's integers."""
    sums: dict[str, list[int]] = {}
    with path.open(encoding="utf-8") as file:
        next(file)
        for line in file:
            level, _, text = line.rstrip("\n").partition(",")
            number = int(text.replace(".", ""))
            own = sums.setdefault(level, [0, 0, 0])
            own[0] += 1
            own[1] += number
            own[2] += number * number
    unit = Fraction(1, 10**PLACES)
    return {level: (n, total * unit, squares * unit**2) for level, (n, total, squares) in sums.items()}


def f_of(sums: Sums) -> Fraction:
    """The variance ratio, from the textbook's formulas in fractions."""
    count = sum(n for n, _, _ in sums.values())
    grand = sum((total for _, total, _ in sums.values()), Fraction(0))
    explained = sum((total**2 / n for n, total, _ in sums.values()), Fraction(0))
    squares = sum((square for _, _, square in sums.values()), Fraction(0))
    between = (explained - grand**2 / count) / (len(sums) - 1)
    return between / ((squares - explained) / (count - len(sums)))


def seconds(call: Callable[[], object]) -> tuple[float, float]:
    """How long a call takes, and how much time of all processors."""
    start, spent = time.perf_counter(), time.process_time()
    call()
    return time.perf_counter() - start, time.process_time() - spent


def peak_megabytes(side: str, path: Path) -> float:
    """The largest memory of a new process in which one side does its work."""
    done = subprocess.run([sys.executable, __file__, side, path], capture_output=True, text=True, check=True)
    return float(done.stdout)


def print_peak(side: str, path: Path) -> None:
    """Do one side's work, and print the peak of this process's memory in megabytes."""
    {"ours": ours, "theirs": theirs}[side](path)
    lines = Path("/proc/self/status").read_text().splitlines()
    print(next(int(line.split()[1]) for line in lines if line.startswith("VmHWM")) / 1000)


def show_times(path: Path) -> None:
    """Print the times of both sides, which take turns, and their ratio."""
    own, other = [], []
    for _ in range(TURNS):
        own.append(seconds(lambda: ours(path)))
        other.append(seconds(lambda: theirs(path)))
    for at, what in enumerate(("time", "processor time")):
        mine, pandas = (statistics.median(times[at] for times in side) for side in (own, other))
        wanted = f"  (wanted: {MOST_TIME} at most)" if at == 0 else "  (this side works in three threads)"
        print(f"{what:20s} {mine:8.2f} s  against {pandas:8.2f} s   ratio {mine / pandas:.2f}{wanted}")


def show_memory(path: Path) -> None:
    """Print the peaks of both sides and their ratio."""
    mine, pandas = (peak_megabytes(side, path) for side in ("ours", "theirs"))
    print(f"peak of the process  {mine:8.0f} MB against {pandas:8.0f} MB", end="")
    print(f"  ratio {mine / pandas:.2f}  (wanted: {MOST_MEMORY} at most)")


def show_exactness(path: Path) -> None:
    """Print whether this package's sums and F are those of the reference, and how far the other F is off."""
    totals, analysis = ours(path)
    reference = by_hand(path)
    found = {
        level.level: (level.sums.n, level.sums.sum, level.sums.sum_of_squares) for level in totals.levels
    }
    f = f_of(reference)
    print(f"sums of {len(found)} levels    {'exact' if found == reference else 'NOT EXACT'}")
    print(f"F                    {'exact' if analysis.f == f else 'NOT EXACT'}: {to_double(f)!r}", end="")
    print(f"; the other side is off by {abs(Fraction(theirs(path)) / f - 1).__float__():.1e} of it")


def show_time_a_row(path: Path, rows: int) -> None:
    """Print the time a row for more and more rows."""
    size = 10_000
    while size <= rows:
        part = path.with_name(f"{size}.csv")
        with path.open("rb") as source, part.open("wb") as target:
            target.writelines(line for line, _ in zip(source, range(size + 1), strict=False))
        turns = max(1, min(9, 3_000_000 // size))
        spent = statistics.median(seconds(partial(ours, part))[0] for _ in range(turns))
        print(f"{size:12,} rows    {1e9 * spent / size:8.0f} ns a row")
        part.unlink()
        size *= 10


def main(rows: int) -> None:
    """Print the figures."""
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "rows.csv"
        write_rows(path, rows)
        print(f"{rows:,} rows, {LEVELS} levels, {path.stat().st_size / 1e6:.0f} MB of CSV")
        show_memory(path)
        show_times(path)
        show_exactness(path)
        show_time_a_row(path, rows)


if __name__ == "__main__":
    if len(sys.argv) == 3:
        print_peak(sys.argv[1], Path(sys.argv[2]))
    else:
        main(int(float(sys.argv[1])) if len(sys.argv) == 2 else ROWS)
