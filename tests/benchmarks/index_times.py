"""How long the register of runs takes: built from 50,000 runs, then brought up to date for one new run.

    python tests/benchmarks/index_times.py [RUNS] [--browser]

The 50,000 runs stand in the audit trail; their folios are invented, looking at them costs nothing. The new
runs are real ones, with real folios, and each update is a process of its own, from its start to its end. With
--browser the first page is opened in Chromium, too, searched and sorted.
"""

import os
import subprocess
import sys
import tempfile
import time
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))

from assayfolio.workflow.index import rebuild_register
from assayfolio.workflow.workspace import Workspace
from support.many_runs import look_at_invented, run_rows, write_trail
from support.workspaces import Bench

RUNS = 50_000
NEW_RUNS = 3


def say(text: str) -> None:
    sys.stdout.write(text + "\n")
    sys.stdout.flush()


def times_of(*arguments: str, cwd: Path) -> tuple[float, float]:
    """Seconds by the clock and of processor time that a command takes as a process of its own."""
    used = os.times()
    begun = time.perf_counter()
    subprocess.run([sys.executable, "-m", "assayfolio", *arguments], cwd=cwd, check=True, capture_output=True)
    spent, now = time.perf_counter() - begun, os.times()
    cpu = now.children_user + now.children_system - used.children_user - used.children_system
    return spent, cpu


def told(times: tuple[float, float]) -> str:
    return f"{times[0]:6.2f} s ({times[1]:5.2f} s of a processor)"


def measure(root: Path, runs: int, browser: bool) -> None:
    bench = Bench(root / "laboratory")
    write_trail(bench.runs, run_rows(runs))
    size = (bench.runs / "audit-trail.jsonl").stat().st_size / 1e6
    say(f"{runs} runs, an audit trail of {size:.0f} MB")
    begun, cpu = time.perf_counter(), time.process_time()
    outcome = rebuild_register(Workspace(bench.root), look=look_at_invented)
    spent = time.perf_counter() - begun, time.process_time() - cpu
    say(f"built from everything, folios invented: {told(spent)}, {outcome.written} files")
    for _ in range(NEW_RUNS):
        run = times_of("run", "configs/study.yaml", cwd=bench.root)
        update = times_of("index", cwd=bench.root)
        idle = times_of("index", cwd=bench.root)
        say(f"register after a new run: {told(update)}; with nothing new: {told(idle)}; the run: {told(run)}")
    say(f"the interpreter and --help alone: {told(times_of('--help', cwd=bench.root))}")
    if browser:
        measure_in_browser(bench.runs / "index.html")


def measure_in_browser(page_file: Path) -> None:
    from playwright.sync_api import expect, sync_playwright

    with sync_playwright() as play:
        chromium = play.chromium.launch(executable_path="/usr/bin/chromium")
        page = chromium.new_page()
        count = page.locator("#count")
        begun = time.perf_counter()
        page.goto(page_file.as_uri())
        expect(page.locator("#filter")).to_be_visible()
        say(f"opened: {time.perf_counter() - begun:6.2f} s")
        for what, words in (
            ("first search, reads all", "run-0007"),
            ("second search", "iris draft 2030-03"),
        ):
            begun = time.perf_counter()
            page.fill("#f-text", words)
            page.keyboard.press("End")
            expect(count).to_contain_text("match", timeout=60_000)
            say(f"{what}: {time.perf_counter() - begun:6.2f} s, {page.inner_text('#count')}")
            page.click("#f-clear")
            expect(count).not_to_contain_text("match")
        begun = time.perf_counter()
        page.click("th[data-sort=run] button")
        expect(page.locator("#list tbody tr:first-child th a")).to_have_text("MLK-001 run-0001")
        say(f"all sorted by study and run: {time.perf_counter() - begun:6.2f} s")
        chromium.close()


def main() -> None:
    counts = [int(one) for one in sys.argv[1:] if one.isdecimal()]
    with tempfile.TemporaryDirectory() as folder:
        measure(Path(folder), counts[0] if counts else RUNS, "--browser" in sys.argv)


if __name__ == "__main__":
    main()
