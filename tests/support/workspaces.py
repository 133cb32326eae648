"""Workspaces for tests, and the command line as a person meets it."""

import contextlib
import io
import json
import os
import subprocess
import sys
from dataclasses import dataclass
from pathlib import Path

from assayfolio.cli.outcome import run_command
from assayfolio.cli.root import cli

STUDY = """\
study: TST-1
title: Sulfate by three methods
data:
  file: data/values.csv
  response: sulfate
  factor: method
  unit: mg/L
  levels: [gravimetric, turbidimetric, chromatographic]
alpha: 0.05
comparisons:
  - name: all pairs of methods
    pairs: all
    adjust: tukey-kramer
checks: {equal-variances: brown-forsythe, normality: shapiro-wilk}
sign-off:
  - {role: author, meaning: I performed this analysis as planned}
"""

DATA = """\
method,sulfate
gravimetric,48.2
turbidimetric,47.1
chromatographic,48.6
turbidimetric,47.9
gravimetric,48.7
chromatographic,48.1
chromatographic,48.9
gravimetric,47.8
turbidimetric,46.8
"""


@dataclass(frozen=True)
class Answer:
    """What a command answered."""

    code: int
    out: str
    err: str

    @property
    def document(self):
        """Standard output as JSON."""
        return json.loads(self.out)


class Bench:
    """A workspace with one study in it."""

    def __init__(self, root: Path, study: str | bytes = STUDY, data: str | bytes | None = DATA) -> None:
        self.root = root
        self.study = root / "configs" / "study.yaml"
        self.data = root / "configs" / "data" / "values.csv"
        self.runs = root / "runs"
        self.data.parent.mkdir(parents=True)
        (root / "configs" / "lab.yaml").write_text("laboratory: Invented laboratory\nwait-seconds: 1\n")
        self.write(self.study, study)
        if data is not None:
            self.write(self.data, data)

    @staticmethod
    def write(path: Path, content: str | bytes) -> None:
        path.write_bytes(content if isinstance(content, bytes) else content.encode("utf-8"))

    def __call__(self, *arguments: str | Path) -> Answer:
        """Run a command on this workspace, in this process."""
        return command(*arguments, "--workspace", self.root)

    def run(self) -> Path:
        """Run the study; return its folio."""
        answer = self("run", self.study, "--json")
        assert answer.code == 0, answer.err
        return self.root / answer.document["folio"]

    def entries(self) -> list[dict]:
        """The entries of the trail."""
        trail = self.runs / "audit-trail.jsonl"
        return [json.loads(line) for line in trail.read_text("utf-8").splitlines()] if trail.exists() else []

    def files_in_runs(self) -> set[str]:
        """Every file below runs/, locks left out."""
        return {
            path.relative_to(self.runs).as_posix()
            for path in self.runs.rglob("*")
            if path.is_file() and not path.name.endswith(".lock")
        }


def command(*arguments: str | Path) -> Answer:
    """Run the command line in this process."""
    out, err = io.StringIO(), io.StringIO()
    with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err):
        code = run_command(cli, [os.fspath(argument) for argument in arguments])
    return Answer(code, out.getvalue(), err.getvalue())


def process(
    *arguments: str | Path, cwd: Path | None = None, env: dict[str, str] | None = None
) -> subprocess.CompletedProcess[str]:
    """Run the command line in a process of its own."""
    return subprocess.run(
        [sys.executable, "-m", "assayfolio", *map(os.fspath, arguments)],
        cwd=cwd,
        env={**os.environ, **(env or {})},
        capture_output=True,
        text=True,
        check=False,
    )
