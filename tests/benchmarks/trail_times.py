# A script for a terminal.
# ruff: noqa: T201
"""How long opening, appending to and reading the audit trail take, by the length of the trail.

    python tests/benchmarks/trail_times.py [ENTRIES ...]

An append should take the same time at every length; opening and reading grow with it.
"""

import itertools
import os
import sys
import tempfile
import time
from pathlib import Path

from assayfolio.canonical import canonical_bytes, sha256_hex
from assayfolio.evidence.trail import open_trail, read_trail
from assayfolio.evidence.verification import verify_workspace

NOW = "2026-03-02T08:00:00.000000Z"


def write_trail(runs: Path, entries: int) -> None:
    """A trail of this length in one go: what appending would leave, without its many fsyncs."""
    previous, lines = "0" * 64, []
    for seq in range(1, entries + 1):
        entry = {
            "seq": seq,
            "time": NOW,
            "actor": "m.berg",
            "action": "refused",
            "subject": "IRON-7",
            "reason": "the data file has a blank in line 12",
            "details": {"step": 1, "inputs": {"configs/iron.yaml": "1" * 64, "configs/iron.csv": "2" * 64}},
            "previous": previous,
        }
        lines.append(canonical_bytes(entry))
        previous = sha256_hex(lines[-1])
    (runs / "audit-trail.jsonl").write_bytes(b"".join(line + b"\n" for line in lines))
    # Else the first append's fsync would have to write all of it.
    with (runs / "audit-trail.jsonl").open("rb") as trail:
        os.fsync(trail.fileno())
    (runs / "audit-trail.head").write_bytes(canonical_bytes({"seq": entries, "sha256": previous}) + b"\n")


def main() -> None:
    lengths = [int(text) for text in sys.argv[1:]] or [100, 10_000, 100_000]
    print(f"{'entries':>8} {'read':>9} {'open':>9} {'append':>9} {'verify':>9}")
    for length in lengths:
        with tempfile.TemporaryDirectory() as folder:
            runs = Path(folder)
            write_trail(runs, length)
            marks = [time.perf_counter()]
            read_trail(runs)
            marks.append(time.perf_counter())
            with open_trail(runs, "m.berg", lambda: NOW, 0.0) as writer:
                marks.append(time.perf_counter())
                for _ in range(20):
                    writer.append("looked", "workspace")
                marks.append(time.perf_counter())
            assert not verify_workspace(runs, None).with_outcome("failed")
            marks.append(time.perf_counter())
        read, opened, appended, verified = (after - before for before, after in itertools.pairwise(marks))
        print(f"{length:8} {read:8.3f}s {opened:8.3f}s {appended / 20 * 1e3:7.2f}ms {verified:8.3f}s")


if __name__ == "__main__":
    main()
