"""Studies whose plan is fixed before, after or beside their data, for tests."""

from pathlib import Path

from support.workspaces import DATA, STUDY, Bench

REASON = "kit B is no longer sold, see letter of 4 March"
PLANNED = STUDY.replace("  unit: mg/L\n", "  unit: mg/L\n  replicates: 3\n")
CHANGES = ("alpha: 0.05", "alpha: 0.01")


def amended(text: str = PLANNED) -> str:
    """The plan at another level."""
    return text.replace(*CHANGES)


def bench_without_data(root: Path, study: str = PLANNED) -> Bench:
    """A workspace with a study whose data have not been measured."""
    return Bench(root, study, None)


def measure(bench: Bench, data: str = DATA) -> None:
    """Put the data in their place."""
    bench.write(bench.data, data)


def preregister(bench: Bench) -> Path:
    """Register the plan; return the protocol's folio."""
    answer = bench("preregister", bench.study, "--json")
    assert answer.code == 0, answer.err
    return bench.root / answer.document["folio"]


def amend(bench: Bench, study: str, reason: str = REASON) -> Path:
    """Change the plan to `study` and amend it; return the protocol's folio."""
    bench.write(bench.study, study)
    answer = bench("amend", bench.study, "--reason", reason, "--json")
    assert answer.code == 0, answer.err
    return bench.root / answer.document["folio"]
