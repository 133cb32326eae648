# A script for a terminal.
# ruff: noqa: T201
"""How long each hostile file takes to be refused, and how much memory: at most 5 s and 1 GB are wanted.

    python tests/benchmarks/hostile_times.py

Each file is made in a process of its own, which then reads it. The memory is the peak of that process while
it reads, above what it had before; the file itself is not part of it.
"""

import resource
import subprocess
import sys
import time
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))

from assayfolio.errors import DataError
from assayfolio.observations.reading import read_observations
from observations.test_hostile_files import ALL, Hostile

MOST_SECONDS = 5.0
MOST_MEGABYTES = 1000.0


def measured(hostile: Hostile) -> None:
    """Print the seconds and megabytes that one file takes."""
    import openpyxl.styles.numbers  # loading it is no part of what a file costs

    content = hostile.make()
    del openpyxl
    Path("/proc/self/clear_refs").write_text("5")  # the peak starts anew
    before = peak()
    start = time.perf_counter()
    try:
        read_observations(content, hostile.plan, hostile.file)
        refused = False
    except DataError:
        refused = True
    print(time.perf_counter() - start, peak() - before, refused)


def peak() -> float:
    """The peak of this process's memory in MB."""
    lines = Path("/proc/self/status").read_text().splitlines()
    return next(int(line.split()[1]) for line in lines if line.startswith("VmHWM")) / 1000


def main() -> None:
    """Measure every file and print those that take longest, then what is beyond the bounds."""
    beyond = []
    for number, hostile in enumerate(ALL):
        done = subprocess.run(
            [sys.executable, __file__, str(number)], capture_output=True, text=True, check=True
        )
        seconds, megabytes, refused = done.stdout.split()
        line = f"{float(seconds):7.2f} s {float(megabytes):8.1f} MB  {hostile.name}"
        print(line)
        if float(seconds) > MOST_SECONDS or float(megabytes) > MOST_MEGABYTES or refused != "True":
            beyond.append(line)
    children = resource.getrusage(resource.RUSAGE_CHILDREN).ru_utime
    print(f"{len(ALL)} files, {children:.0f} s of processor time, {len(beyond)} beyond the bounds")
    print("\n".join(beyond))


if __name__ == "__main__":
    if len(sys.argv) == 2:
        measured(ALL[int(sys.argv[1])])
    else:
        main()
