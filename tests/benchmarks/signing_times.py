# A script for a terminal.
# ruff: noqa: T201
"""How long a signature takes, and the check of a report with three of them, in milliseconds.

    python tests/benchmarks/signing_times.py [REPETITIONS]

Opening a key is slow on purpose; it stands apart. The check of three signatures should stay below 1500 ms.
"""

import statistics
import sys
import time
from collections.abc import Callable
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))

from assayfolio.evidence.signing.identities import open_identity, sealed_identity
from evidence.signing.office import office, signed_by, signed_report, unsigned_report

PASSPHRASE = "a passphrase for the bench"


def timed(what: str, action: Callable[[], object], repetitions: int) -> None:
    """Print median and greatest wall time, and the median of the processor's time."""
    action()
    walls, processors = [], []
    for _ in range(repetitions):
        wall, processor = time.perf_counter(), time.process_time()
        action()
        walls.append((time.perf_counter() - wall) * 1000)
        processors.append((time.process_time() - processor) * 1000)
    middle, busy = statistics.median(walls), statistics.median(processors)
    print(f"{what:42}{middle:9.0f}{max(walls):9.0f}{busy:9.0f}")


def main(repetitions: int) -> None:
    """Print the table."""
    sealed = sealed_identity(office().people["author"], PASSPHRASE)
    pdf, signed = unsigned_report(), signed_report()
    print(f"report of {len(pdf):,} bytes, {len(signed.report.pdf):,} with three signatures\n")
    print(f"{'milliseconds':42}{'median':>9}{'most':>9}{'cpu':>9}")
    timed(
        "sealing a key under a passphrase", lambda: sealed_identity(office().people["author"], PASSPHRASE), 3
    )
    timed("opening a key with its passphrase", lambda: open_identity(sealed, PASSPHRASE), repetitions)
    timed("first signature", lambda: signed_by(pdf, "author"), repetitions)
    timed("third signature", lambda: signed_by(signed.kept[1], "approver"), repetitions)
    timed("checking a report with three signatures", signed.findings, repetitions)


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 10)
