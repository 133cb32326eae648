# A script for a terminal.
# ruff: noqa: T201
"""How long sweeps take: `verify --all` beside `sha256sum` over the same files, `rerun --all` beside runs.

    python tests/benchmarks/sweep_times.py [FOLIOS] [RUNS]

FOLIOS (1,000) copies of one real folio under numbers and a trail of their own are verified; RUNS (6) real
runs are made in one warm process and then computed again on one process. The aim: verification within 1.5
times of sha256sum, a re-run no slower than a run.
"""

import contextlib
import io
import json
import os
import resource
import subprocess
import sys
import tempfile
import time
from pathlib import Path

from assayfolio.canonical import canonical_bytes, sha256_hex
from assayfolio.cli.outcome import run_command
from assayfolio.cli.root import cli
from assayfolio.evidence.verification import verify_workspace
from assayfolio.workflow.parallel import available_processors

STUDY = """\
study: TST-1
title: Sulfate by three methods
data: {file: values.csv, response: sulfate, factor: method, unit: mg/L}
alpha: 0.05
comparisons:
  - {name: all pairs of methods, pairs: all, adjust: tukey-kramer}
checks: {equal-variances: brown-forsythe, normality: shapiro-wilk}
"""
DATA = "method,sulfate\n" + "".join(
    f"{method},{value}\n"
    for method, values in {"a": "48.2 48.7 47.8", "b": "47.1 47.9 46.8", "c": "48.6 48.1 48.9"}.items()
    for value in values.split()
)


def command(*arguments: object) -> tuple[int, str]:
    """Run the command line in this process; its exit code and output."""
    out, err = io.StringIO(), io.StringIO()
    with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err):
        code = run_command(cli, [str(argument) for argument in arguments])
    return code, out.getvalue() + err.getvalue()


def found(root: Path) -> Path:
    """A workspace with one study; the path of the study."""
    (root / "configs").mkdir(parents=True)
    (root / "configs/lab.yaml").write_text("laboratory: Invented laboratory\n")
    (root / "configs/values.csv").write_text(DATA)
    study = root / "configs/study.yaml"
    study.write_text(STUDY)
    return study


def multiply(root: Path, count: int) -> None:
    """Copies of the one folio of a workspace under the numbers 2 to `count`, each sealed in the trail."""
    runs = root / "runs"
    lines = (runs / "audit-trail.jsonl").read_bytes().splitlines()
    entries = [json.loads(line) for line in lines]
    first = runs / "TST-1/run-0001"
    of_run = [entry for entry in entries if entry["subject"] == "TST-1/run-0001"]
    contents = {
        path.relative_to(first).as_posix(): path.read_bytes() for path in first.rglob("*") if path.is_file()
    }
    record = json.loads(contents["data/run.json"])
    for number in range(2, count + 1):
        name = f"run-{number:04d}"
        head = {"seq": len(lines), "sha256": sha256_hex(lines[-1])}
        own = []
        for entry in of_run:
            details = {key: value for key, value in entry["details"].items() if key != "at"}
            if entry["action"] == "allotted":
                details["number"] = number
            if entry["action"] == "sealed":
                changed = {
                    **record,
                    "number": number,
                    "run": name,
                    "trail_head_at_start": head,
                    "executions": {**record["executions"], "number": number},
                }
                details["seal"] = place(
                    runs / "TST-1" / name,
                    {
                        **contents,
                        "data/run.json": canonical_bytes(changed),
                        "data/trail.jsonl": b"".join(line + b"\n" for line in own),
                    },
                )
            made = {
                **entry,
                "subject": f"TST-1/{name}",
                "details": details,
                "seq": len(lines) + 1,
                "time": entries[-1]["time"],
            }
            own.append(canonical_bytes({**made, "previous": sha256_hex(lines[-1])}))
            lines.append(own[-1])
    (runs / "audit-trail.jsonl").write_bytes(b"".join(line + b"\n" for line in lines))
    (runs / "audit-trail.head").write_bytes(
        canonical_bytes({"seq": len(lines), "sha256": sha256_hex(lines[-1])}) + b"\n"
    )


def place(folder: Path, contents: dict[str, bytes]) -> str:
    """Write a folio with its manifests made anew; its seal."""
    payload = {path: content for path, content in contents.items() if path.startswith("data/")}
    manifest = "".join(f"{sha256_hex(payload[path])}  {path}\n" for path in sorted(payload)).encode()
    size = sum(map(len, payload.values()))
    info = b"".join(
        f"Payload-Oxum: {size}.{len(payload)}\n".encode()
        if line.startswith(b"Payload-Oxum")
        else line + b"\n"
        for line in contents["bag-info.txt"].splitlines()
    )
    tags = {"bag-info.txt": info, "bagit.txt": contents["bagit.txt"], "manifest-sha256.txt": manifest}
    seals = "".join(f"{sha256_hex(tags[name])}  {name}\n" for name in sorted(tags)).encode()
    for path, content in {**payload, **tags, "tagmanifest-sha256.txt": seals}.items():
        (folder / path).parent.mkdir(parents=True, exist_ok=True)
        (folder / path).write_bytes(content)
    return sha256_hex(seals)


def processor_seconds() -> float:
    """Processor time of this process and those that it started and that have ended."""
    spent = [resource.getrusage(who) for who in (resource.RUSAGE_SELF, resource.RUSAGE_CHILDREN)]
    return sum(one.ru_utime + one.ru_stime for one in spent)


def timed(words: str, deed) -> tuple[float, float]:
    """How long `deed` takes by the clock and in processor time, the fair one on a busy machine; printed."""
    start, before = time.perf_counter(), processor_seconds()
    deed()
    taken, spent = time.perf_counter() - start, processor_seconds() - before
    print(f"{words:<48} {taken:8.2f} s {spent:8.2f} s of processor")
    return taken, spent


def verification(folder: Path, count: int) -> None:
    """`verify` and `verify --all` beside sha256sum over the same files."""
    root = folder / "many"
    study = found(root)
    assert command("run", study, "--workspace", root)[0] == 0
    multiply(root, count)
    files = [path for path in (root / "runs/TST-1").rglob("*") if path.is_file()]
    listing = folder / "files"
    listing.write_bytes(b"\0".join(os.fsencode(path) for path in files))
    size = sum(path.stat().st_size for path in files) / 2**20
    print(f"{count:,} folios, {len(files):,} files, {size:.0f} MB, {available_processors()} processors")

    def hashed() -> None:
        with listing.open("rb") as names:
            subprocess.run(["xargs", "-0", "sha256sum"], stdin=names, stdout=subprocess.DEVNULL, check=True)

    failed = verify_workspace(root / "runs", None).with_outcome("failed")
    assert not failed, failed[:3]
    plain = timed("sha256sum", hashed)
    python = [sys.executable, "-m", "assayfolio", "verify", "--workspace", str(root)]
    one = timed("verify", lambda: subprocess.run(python, check=True, stdout=subprocess.DEVNULL))
    many = timed("verify --all", lambda: subprocess.run([*python, "--all"], check=True, capture_output=True))
    for words, at in (("clock", 0), ("processor", 1)):
        ratios = (one[at] / plain[at], many[at] / plain[at])
        print(f"by the {words}: verify {ratios[0]:.2f} times, verify --all {ratios[1]:.2f} times sha256sum")


def computing(folder: Path, count: int) -> None:
    """A warm run beside a warm re-run."""
    root = folder / "few"
    study = found(root)
    command("run", study, "--workspace", root)
    runs = timed(
        f"{count} runs, warm", lambda: [command("run", study, "--workspace", root) for _ in range(count)]
    )
    again = timed(
        f"rerun --all of {count + 1} on one process",
        lambda: print(command("rerun", "--all", "--jobs", 1, "--workspace", root)[1].splitlines()[0]),
    )
    each = (runs[1] / count, again[1] / (count + 1))
    print(f"processor time: a run {each[0]:.2f} s, a re-run {each[1]:.2f} s")


def main() -> None:
    given = [int(text) for text in sys.argv[1:]]
    folios, runs = (*given, *(1_000, 6)[len(given) :])
    with tempfile.TemporaryDirectory() as name:
        verification(Path(name), folios)
        computing(Path(name), runs)


if __name__ == "__main__":
    main()
