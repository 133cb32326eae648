# A script for a terminal.
# ruff: noqa: T201
"""How long each hostile input takes to be refused, and how much memory: at most 5 s and 1 GB are wanted.

    python tests/benchmarks/hostile_times.py

Each is made in a process of its own, which then runs the command line on it. The memory is the peak of that
process while it runs, above what it had before; the input itself is not part of it.
"""

import resource
import subprocess
import sys
import tempfile
import time
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))

from workflow.test_hostile_files_end_to_end import KINDS, Kind

MOST_SECONDS = 5.0
MOST_MEGABYTES = 1000.0


def measured(kind: Kind) -> None:
    """Print the seconds, also those of the processor, and the megabytes that one input takes; the code."""
    with tempfile.TemporaryDirectory() as folder:
        bench = kind.make(Path(folder) / "w")
        Path("/proc/self/clear_refs").write_text("5")  # the peak starts anew
        before, start, spent = peak(), time.perf_counter(), time.process_time()
        answer = bench("run", bench.study)
        print(time.perf_counter() - start, time.process_time() - spent, peak() - before, answer.code)


def peak() -> float:
    """The peak of this process's memory in MB."""
    lines = Path("/proc/self/status").read_text().splitlines()
    return next(int(line.split()[1]) for line in lines if line.startswith("VmHWM")) / 1000


def main() -> None:
    """Measure every input and print it, then what is beyond the bounds."""
    beyond = []
    for number, kind in enumerate(KINDS):
        done = subprocess.run(
            [sys.executable, __file__, str(number)], capture_output=True, text=True, check=True
        )
        seconds, spent, megabytes, code = map(float, done.stdout.split())
        line = (
            f"{seconds:6.2f} s ({spent:5.2f} s processor) {megabytes:7.1f} MB, exit {code:.0f}: {kind.name}"
        )
        print(line, flush=True)
        if seconds > MOST_SECONDS or megabytes > MOST_MEGABYTES or code != 2:
            beyond.append(line)
    children = resource.getrusage(resource.RUSAGE_CHILDREN).ru_utime
    print(f"{len(KINDS)} inputs, {children:.0f} s of processor time, {len(beyond)} beyond the bounds")
    print("\n".join(beyond))


if __name__ == "__main__":
    if len(sys.argv) == 2:
        measured(KINDS[int(sys.argv[1])])
    else:
        main()
