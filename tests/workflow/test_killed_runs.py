"""A run killed at any moment: the trail stays whole, verification explains the state, the next run works."""

import os
import re
import signal
import subprocess
import sys
from pathlib import Path

import pytest

from assayfolio.evidence.trail import read_trail
from support.workspaces import Bench

MOMENTS = 24
CHILD = Path(__file__).parents[1] / "support" / "killed_child.py"


def run_child(bench, moment):
    return subprocess.run(
        [sys.executable, CHILD, str(moment), "run", bench.study, "--workspace", bench.root],
        capture_output=True,
        text=True,
        check=False,
        env=os.environ,
    )


@pytest.fixture(scope="module")
def changes(tmp_path_factory):
    """How many changes to the disk a whole run makes."""
    ended = run_child(Bench(tmp_path_factory.mktemp("whole") / "w"), 0)
    assert ended.returncode == 0, ended.stderr
    return int(re.search(r"changes (\d+)", ended.stderr)[1])


@pytest.mark.requirement("TRAIL-1")
@pytest.mark.slow
@pytest.mark.parametrize("part", range(MOMENTS))
def test_a_run_killed_at_any_moment_is_explained_and_the_next_one_works(part, changes, tmp_path):
    moment = 1 + round(part * (changes - 1) / (MOMENTS - 1))
    bench = Bench(tmp_path / "w")
    killed = run_child(bench, moment)
    assert killed.returncode == -signal.SIGKILL

    reading = read_trail(bench.runs)
    assert not reading.faults
    allotted = any(entry.action == "allotted" for entry in reading.entries)
    sealed = any(entry.action == "sealed" for entry in reading.entries)
    before = {path: path.read_bytes() for path in bench.runs.rglob("*") if path.is_file()}

    verified = bench("verify")
    in_place = (bench.runs / "TST-1/run-0001").exists()
    assert "Traceback" not in verified.err
    if allotted and not in_place:
        assert verified.code == 1
        assert "run-0001" in verified.out
        assert "interrupted" in verified.out
    assert {path: path.read_bytes() for path in bench.runs.rglob("*") if path.is_file()} == before

    folio = bench.run()
    assert folio.name == ("run-0002" if allotted else "run-0001")
    actions = [(entry["action"], entry["subject"]) for entry in bench.entries()]
    assert (("interrupted", "TST-1/run-0001") in actions) == (allotted and not sealed)
    assert (("rename-completed", "TST-1/run-0001") in actions) == (sealed and not in_place)
    if sealed:
        assert (bench.runs / "TST-1/run-0001/data/report.pdf").exists()
    after = bench("verify")
    assert after.code == 0, after.out
