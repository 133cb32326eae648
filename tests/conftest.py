"""What all tests share: outside programs that some need, and the rule that no skipped test goes unnoticed."""

import os
import shutil
from collections.abc import Iterator
from importlib import resources
from pathlib import Path

import pytest
from hypothesis import HealthCheck, settings

from pdfa import verapdf

IN_CI = os.environ.get("CI", "").lower() == "true"
CHECKOUT = Path(__file__).resolve().parents[1]
PROGRAMS = (
    "qpdf",
    "pdfinfo",
    "pdffonts",
    "pdftoppm",
    "pdftotext",
    "pdfdetach",
    "pdfsig",
    "sha256sum",
    "openssl",
    "softhsm2-util",
    "chromium",
)

# How long an example takes is the machine's affair. Continuous integration takes the same examples each time.
settings.register_profile(
    "assayfolio",
    deadline=None,
    derandomize=IN_CI,
    print_blob=True,
    suppress_health_check=[HealthCheck.too_slow],
)
settings.load_profile("assayfolio")


def lacking(tool: str) -> str:
    """What this machine lacks for a tool named in a `needs` mark; empty if nothing."""
    if tool == "verapdf":
        return verapdf.lacking()
    if tool not in PROGRAMS:
        raise pytest.UsageError(
            f"The mark needs({tool!r}) names a tool that tests/conftest.py does not know."
        )
    return "" if shutil.which(tool) else f"the program {tool}"


def pytest_runtest_setup(item: pytest.Item) -> None:
    """Do not start a test whose outside programs are missing."""
    for mark in item.iter_markers("needs"):
        for tool in mark.args:
            if missing := lacking(tool):
                pytest.skip(f"this machine lacks {missing}")


def _words(longrepr: object) -> str:
    """The reason that a skip was given."""
    reason = longrepr[2] if isinstance(longrepr, tuple) else str(longrepr)
    return str(reason).removeprefix("Skipped: ")


def _fail_in_ci(report: pytest.TestReport | pytest.CollectReport) -> None:
    """In continuous integration, turn a skip into a failure."""
    if IN_CI and report.outcome == "skipped" and not hasattr(report, "wasxfail"):
        report.outcome = "failed"
        reason = _words(report.longrepr)
        report.longrepr = f"Not run: {reason}. In continuous integration every test has to run."


@pytest.hookimpl(wrapper=True)
def pytest_runtest_makereport() -> Iterator[None]:
    report = yield
    _fail_in_ci(report)
    return report


@pytest.hookimpl(wrapper=True)
def pytest_make_collect_report() -> Iterator[None]:
    report = yield
    _fail_in_ci(report)
    return report


def pytest_terminal_summary(terminalreporter: pytest.TerminalReporter) -> None:
    """Name every test or file that did not run, last of all before the closing line."""
    skipped = terminalreporter.stats.get("skipped", [])
    not_run = sorted({f"{report.nodeid}: {_words(report.longrepr)}" for report in skipped})
    if not not_run:
        return
    terminalreporter.section(f"{len(not_run)} NOT RUN", sep="!", red=True, bold=True)
    for line in not_run:
        terminalreporter.line(line, red=True)
    terminalreporter.line("Continuous integration counts each of these as a failure.")


@pytest.fixture(scope="session")
def checkout() -> Path:
    """The folder of this checkout."""
    return CHECKOUT


@pytest.fixture(scope="session")
def fonts_folder() -> Path:
    """The fonts as the package under test carries them."""
    return Path(str(resources.files("assayfolio") / "fonts"))
