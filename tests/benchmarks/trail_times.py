# A script for a terminal.
# ruff: noqa: T201
"""How long opening, appending to, reading and verifying the audit trail take, by the length of the trail.

    python tests/benchmarks/trail_times.py [ENTRIES ...]

An append should take the same time at every length: the last line says by how much the longest trail differs.
"open" is the first opening by a process, which judges the whole trail, "again" a later one, which compares
its bytes and judges what was added. "verify" is the whole verification, with a witness.
"""

import os
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path
from statistics import median

from assayfolio.canonical import canonical_bytes, sha256_hex
from assayfolio.evidence.trail import TrailWriter, open_trail, read_trail
from assayfolio.evidence.verification import verify_workspace
from assayfolio.evidence.witnesses import FileWitness

NOW = "2026-03-02T08:00:00.000000Z"
APPENDS = 100


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
            "details": {
                "step": 1,
                "inputs": {"configs/iron.yaml": "1" * 64, "configs/iron.csv": "2" * 64},
                "by": {"person": "M. Berg", "roles": ["author", "runner"]},
                "at": {
                    "boot": "ba69cd2d-ae7a-4570-bbdd-b608cf0afb33",
                    "local": "2026-03-02T09:00:00.000000+01:00",
                    "monotonic_us": 24441096440 + seq,
                    "synchronised": True,
                },
            },
            "previous": previous,
        }
        lines.append(canonical_bytes(entry))
        previous = sha256_hex(lines[-1])
    (runs / "audit-trail.jsonl").write_bytes(b"".join(line + b"\n" for line in lines))
    # Else the first append's fsync would have to write all of it.
    with (runs / "audit-trail.jsonl").open("rb") as trail:
        os.fsync(trail.fileno())
    (runs / "audit-trail.head").write_bytes(canonical_bytes({"seq": entries, "sha256": previous}) + b"\n")


def timed(work: Callable[[], object]) -> float:
    """The seconds that `work` takes."""
    start = time.perf_counter()
    work()
    return time.perf_counter() - start


def append(writer: TrailWriter) -> float:
    """The median of many appends, in milliseconds: an fsync of a shared disk now and then takes long."""
    return 1e3 * median(timed(lambda: writer.append("looked", "workspace")) for _ in range(APPENDS))


def main() -> None:
    lengths = [int(text) for text in sys.argv[1:]] or [100, 10_000, 100_000]
    print(f"{'entries':>8} {'read':>9} {'open':>9} {'again':>9} {'append':>9} {'verify':>9}")
    appends = []
    for length in lengths:
        with tempfile.TemporaryDirectory() as folder, tempfile.TemporaryDirectory() as elsewhere:
            runs, witness = Path(folder), FileWitness(Path(elsewhere) / "heads.jsonl")
            write_trail(runs, length)

            def open_and_append(runs: Path = runs, witness: FileWitness = witness) -> float:
                with open_trail(runs, "m.berg", lambda: NOW, 0.0, witnesses=lambda _: (witness,)) as writer:
                    return append(writer)

            def only_open(runs: Path = runs) -> None:
                with open_trail(runs, "m.berg", lambda: NOW, 0.0):
                    pass

            read = timed(lambda runs=runs: read_trail(runs))
            opened, again = timed(only_open), timed(only_open)
            appends.append(open_and_append())

            def verify(runs: Path = runs, witness: FileWitness = witness) -> None:
                assert not verify_workspace(runs, None, lambda _: (witness,)).with_outcome("failed")

            verified = timed(verify)
        print(
            f"{length:8} {read:8.3f}s {opened:8.3f}s {again:8.3f}s {appends[-1]:7.2f}ms {verified:8.3f}s",
            flush=True,
        )
    print(f"append, longest against shortest trail: {appends[-1] / appends[0]:.2f}")


if __name__ == "__main__":
    main()
