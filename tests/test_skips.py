"""A test that does not run is never overlooked: named at the end, and a failure in continuous integration."""

import os
import shutil
import subprocess
import sys

import pytest

BODY = """
import pytest

def test_that_runs():
    pass

@pytest.mark.skip(reason="left out by hand")
def test_left_out():
    pass

@pytest.mark.needs("qpdf")
def test_with_a_program():
    pass
"""
WHOLE_FILE = 'import pytest\n\npytest.importorskip("surely_not_a_module")\n'


@pytest.fixture
def small_suite(checkout, tmp_path):
    """A suite under the project's own conftest: one test runs, one is skipped by hand, one needs qpdf."""
    shutil.copy(checkout / "tests" / "conftest.py", tmp_path)
    shutil.copytree(checkout / "tests" / "pdfa", tmp_path / "pdfa", ignore=shutil.ignore_patterns("test_*"))
    (tmp_path / "test_small.py").write_text(BODY)
    (tmp_path / "pytest.ini").write_text("[pytest]\npythonpath = .\nmarkers = needs: programs\n")
    return tmp_path


def run_suite(
    folder, *options, path: str | None = None, **environment: str
) -> subprocess.CompletedProcess[str]:
    inherited = {name: value for name, value in os.environ.items() if name != "CI"}
    return subprocess.run(
        [sys.executable, "-m", "pytest", "-p", "no:cacheprovider", "--color=no", *options, folder],
        cwd=folder,
        env=inherited | ({} if path is None else {"PATH": path}) | environment,
        capture_output=True,
        text=True,
        check=False,
    )


IN_ONE_PROCESS, IN_TWO = (), ("--numprocesses=2", "--benchmark-disable")


@pytest.mark.parametrize("options", [IN_ONE_PROCESS, IN_TWO])
def test_a_skipped_test_is_named_with_its_reason(small_suite, options):
    outcome = run_suite(small_suite, *options)
    assert outcome.returncode == 0
    assert "NOT RUN" in outcome.stdout
    assert "test_small.py::test_left_out: left out by hand" in outcome.stdout


def test_a_missing_program_is_named(small_suite):
    outcome = run_suite(small_suite, path="/nowhere")
    assert outcome.returncode == 0
    assert "2 NOT RUN" in outcome.stdout
    assert "test_small.py::test_with_a_program: this machine lacks the program qpdf" in outcome.stdout


@pytest.mark.parametrize("options", [IN_ONE_PROCESS, IN_TWO])
def test_in_continuous_integration_a_skipped_test_fails(small_suite, options):
    outcome = run_suite(small_suite, *options, path="/nowhere", CI="true")
    assert outcome.returncode == 1
    assert "Not run: left out by hand. In continuous integration every test has to run." in outcome.stdout
    assert "1 passed, 2 errors" in outcome.stdout


@pytest.mark.parametrize("options", [IN_ONE_PROCESS, IN_TWO])
def test_in_continuous_integration_a_skipped_file_fails(small_suite, options):
    (small_suite / "test_small.py").write_text(WHOLE_FILE)
    outcome = run_suite(small_suite, *options, CI="true")
    assert outcome.returncode != 0
    assert "Not run: could not import 'surely_not_a_module'" in outcome.stdout


def test_a_mark_with_an_unknown_program_is_an_error(small_suite):
    test = small_suite / "test_small.py"
    test.write_text(BODY.replace('needs("qpdf")', 'needs("qdpf")'))
    outcome = run_suite(small_suite)
    assert outcome.returncode != 0
    assert "names a tool that tests/conftest.py does not know" in outcome.stdout
