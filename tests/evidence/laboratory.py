"""An invented laboratory for the tests of evidence: a clock that ticks, runs that leave sealed folios.

A run here goes through the same entries as a real one, with short invented files in place of results.
"""

import itertools
import os
import signal
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field
from pathlib import Path

from assayfolio.canonical import canonical_bytes, sha256_hex
from assayfolio.evidence.folio import folio_lock, leftover_record, reopen_staged, stage_folio
from assayfolio.evidence.history import (
    next_number,
    run_histories,
    run_name,
    run_subject,
    runs_not_closed,
    trail_extract,
)
from assayfolio.evidence.locks import is_locked
from assayfolio.evidence.protocols import protocol_name, protocol_subject, registered_plans
from assayfolio.evidence.register import inputs_details, read_register, received_details
from assayfolio.evidence.trail import TrailWriter, open_trail
from assayfolio.evidence.verification import verify_workspace

STUDY = b"study: IRON-7\ntitle: Iron in river water\n"
DATA = b"method,iron\nA,1.25\nA,1.50\nB,1.75\nB,1.60\n"


@dataclass
class Clock:
    """Times that are one second apart, so that no test depends on the hour."""

    ticks: Iterator[int] = field(default_factory=itertools.count)

    def __call__(self) -> str:
        tick = next(self.ticks)
        return f"2026-03-02T{tick // 3600 % 24:02d}:{tick // 60 % 60:02d}:{tick % 60:02d}.000000Z"


@dataclass
class Laboratory:
    """A workspace's `runs` folder and the person who works in it."""

    runs: Path
    clock: Clock = field(default_factory=Clock)
    stamp: Callable = field(default=lambda _last: {})
    witnesses: tuple = ()

    def trail(self, wait: float = 0.0):
        return open_trail(self.runs, "m.berg", self.clock, wait, self.stamp, lambda _entries: self.witnesses)

    def verify(self):
        return verify_workspace(self.runs, None, lambda _entries: self.witnesses)

    def found(self) -> None:
        with self.trail() as writer:
            writer.append("founded", "workspace", "invented laboratory")

    def run(self, study: str = "IRON-7", failing: bool = False) -> Path:
        """One run from allotment to its name; a failing one has no report."""
        folder = self.runs / study
        inputs = {
            "iron.yaml": ("data/study.yaml", STUDY),
            "iron data.csv": ("data/inputs/iron data.csv", DATA),
        }
        with self.trail() as writer:
            head = writer.head
            number = next_number(writer.entries, study)
            subject, name = run_subject(study, number), run_name(number)
            lock = folio_lock(folder, name)
            lock.__enter__()
            digests = {path: sha256_hex(content) for path, (_, content) in inputs.items()}
            if sha256_hex(DATA) not in read_register(writer.entries).digests:
                details = received_details("iron data.csv", len(DATA), sha256_hex(DATA), study)
                writer.append("received", study, None, {"step": 1, **details})
            details = inputs_details(digests, "iron.yaml", None, ["iron data.csv"])
            entries = [writer.append("allotted", subject, None, {"step": 1, "number": number, **details})]
            execution = read_register(writer.entries).executions(subject).number
            plans = registered_plans(writer.entries, study)
        try:
            payload, results = self._results(subject, failing, entries)
            record = {
                "study": study,
                "number": number,
                "run": name,
                "outcome": "failed" if failing else "completed",
                "inputs": [
                    {
                        "role": "study definition" if place.endswith("yaml") else "raw data",
                        "path": path,
                        "folio_path": place,
                        "size": len(content),
                        "sha256": sha256_hex(content),
                    }
                    for path, (place, content) in inputs.items()
                ],
                "trail_head_at_start": {"seq": head.seq, "sha256": head.sha256},
                "executions": {"number": execution},
                "pre_registration": {"protocol": plans[-1].name, "registered": plans[0].time}
                if plans
                else None,
                **results,
            }
            payload |= dict(inputs.values())
            payload["data/run.json"] = canonical_bytes(record)
            with self.trail() as writer:
                entries.append(writer.append("staged", subject, None, {"step": 5}))
            payload["data/trail.jsonl"] = trail_extract(entries)
            staged = stage_folio(folder, name, payload, [("Source-Organization", "Invented laboratory")])
            with self.trail() as writer:
                writer.append(
                    "sealed", subject, None, {"step": 6, "seal": staged.seal, "outcome": record["outcome"]}
                )
            return staged.publish()
        finally:
            lock.__exit__(None, None, None)

    def _results(self, subject: str, failing: bool, entries: list) -> tuple[dict, dict]:
        with self.trail() as writer:
            entries.append(writer.append("self-checked", subject, None, {"step": 2}))
        findings, report = canonical_bytes({"format": "invented", "f": 9.25}), b"%PDF-1.7 invented report"
        with self.trail() as writer:
            details = {"step": 3, "findings": sha256_hex(findings)}
            entries.append(writer.append("computed", subject, None, details))
            if failing:
                entries.append(writer.append("failed", subject, "a font was missing", {"step": 4}))
            else:
                details = {"step": 4, "report": sha256_hex(report)}
                entries.append(writer.append("rendered", subject, None, details))
        payload = {"data/findings.json": findings, "data/context/lab.yaml": b"name: Invented laboratory\n"}
        results = {"findings_sha256": sha256_hex(findings), "report_sha256": None}
        if not failing:
            payload |= {"data/report.pdf": report, "data/figures/dots.svg": b"<svg/>\n"}
            results["report_sha256"] = sha256_hex(report)
        return payload, results

    def register(self, number: int = 1, study: str = "IRON-7", reason: str | None = None) -> Path:
        """Fix a plan as the protocol of this number; return its folio."""
        plan, paper = canonical_bytes({"alpha": "1/20", "protocol": number}), b"%PDF-1.7 invented protocol"
        definition = STUDY + b"# %d\n" % number
        subject, name = protocol_subject(study, number), protocol_name(number)
        facts = {
            "plan": sha256_hex(plan),
            "study_definition": sha256_hex(definition),
            "amends": number - 1 or None,
            "timing": "before data first seen",
        }
        with self.trail() as writer:
            entries = [writer.append("protocol-allotted", subject, reason, {"number": number, **facts})]
            entries.append(writer.append("protocol-staged", subject, None, {"files": 5}))
        record = {
            "study": study,
            "number": number,
            "protocol": name,
            "reason": reason,
            "report_sha256": sha256_hex(paper),
            "inputs": [{"folio_path": "data/study.yaml", "sha256": sha256_hex(definition)}],
            **facts,
        }
        payload = {
            "data/study.yaml": definition,
            "data/plan.json": plan,
            "data/protocol.pdf": paper,
            "data/protocol.json": canonical_bytes(record),
            "data/trail.jsonl": trail_extract(entries),
        }
        with folio_lock(self.runs / study, name):
            staged = stage_folio(self.runs / study, name, payload, [("Source-Organization", "Invented")])
            with self.trail() as writer:
                writer.append("registered", subject, reason, {"seal": staged.seal, **facts})
            return staged.publish()

    def settle(self) -> None:
        """What the next command does about runs that were killed: complete the rename, or say so."""
        with self.trail() as writer:
            self._complete_renames(writer)
            for run in runs_not_closed(writer.entries):
                folder = self.runs / run.study
                if not is_locked(folder, run.name):
                    found = leftover_record(folder, run.name)
                    writer.append("interrupted", run.subject, "the process ended early", {"step": 1, **found})

    def _complete_renames(self, writer: TrailWriter) -> None:
        for run in run_histories(writer.entries):
            folder = self.runs / run.study
            staged = reopen_staged(folder, run.name)
            missing = not (folder / run.name).exists() and not is_locked(folder, run.name)
            if run.sealed and staged and missing:
                assert staged.seal == run.sealed.details["seal"]
                writer.append("rename-completed", run.subject, None, {"step": 6, "seal": staged.seal})
                staged.publish()


MOMENTS = ("open", "write", "fsync", "replace", "rename", "mkdir", "ftruncate", "unlink")


@contextmanager
def patched_system(before: Callable[[str, tuple], None]) -> Iterator[None]:
    """Call `before(name, arguments)` ahead of each system call by which files change."""
    kept = {name: getattr(os, name) for name in MOMENTS}

    def wrap(name: str) -> Callable:
        def call(*arguments, **named):
            before(name, arguments)
            return kept[name](*arguments, **named)

        return call

    for name in MOMENTS:
        setattr(os, name, wrap(name))
    try:
        yield
    finally:
        for name, function in kept.items():
            setattr(os, name, function)


def killed_at(moment: int, tear: bool, work: Callable[[], None]) -> bool:
    """Do `work` in a child process that is killed (signal 9) just before its `moment`-th system call.

    With `tear`, a write at that moment first brings half of its bytes to the disk. Returns whether the
    child was killed; False means that it came to its end before that moment.
    """
    child = os.fork()
    if child == 0:
        write = os.write
        count = itertools.count(1)

        def before(name: str, arguments: tuple) -> None:
            if next(count) == moment:
                if tear and name == "write":
                    content = bytes(arguments[1])
                    write(arguments[0], content[: len(content) // 2])
                os.kill(os.getpid(), signal.SIGKILL)

        try:
            with patched_system(before):
                work()
        except BaseException:  # noqa: BLE001 - the parent must see a failing child, not a second pytest
            os._exit(7)
        os._exit(0)
    _, status = os.waitpid(child, 0)
    if os.WIFSIGNALED(status):
        return True
    assert os.WEXITSTATUS(status) == 0, "the child failed by itself"
    return False
