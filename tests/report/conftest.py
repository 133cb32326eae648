"""Reports on the samples, each rendered once for all tests that look at it."""

import subprocess
from collections.abc import Callable
from functools import cache
from pathlib import Path

import pytest

from assayfolio.report.render import RenderedReport, render_report
from report.cases import CASES


@cache
def _rendered(case: str) -> RenderedReport:
    return render_report(CASES[case]())


@pytest.fixture(scope="session")
def rendered() -> Callable[[str], RenderedReport]:
    """The report on a sample, by its name."""
    return _rendered


@pytest.fixture(scope="session")
def report_file(tmp_path_factory: pytest.TempPathFactory) -> Callable[[str], Path]:
    """The report on a sample as a file, by its name."""
    folder = tmp_path_factory.mktemp("reports")

    def written(case: str) -> Path:
        path = folder / f"{case.replace(' ', '-')}.pdf"
        if not path.exists():
            path.write_bytes(_rendered(case).pdf)
        return path

    return written


@pytest.fixture(scope="session")
def pages_of(report_file: Callable[[str], Path]) -> Callable[[str], list[str]]:
    """The text of each page of the report on a sample, blanks and line ends as single spaces."""

    @cache
    def texts(case: str) -> list[str]:
        ended = subprocess.run(
            ["pdftotext", "-enc", "UTF-8", report_file(case), "-"],
            capture_output=True,
            check=True,
        )
        pages = ended.stdout.decode().split("\f")
        return [" ".join(page.split()) for page in pages if page.strip()]

    return texts
