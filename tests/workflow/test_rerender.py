"""Rendering a report again from its folio alone gives the same bytes, wherever and however it is done."""

import os
import shutil
import subprocess
import sys

import pytest

from support.workspaces import STUDY, Bench

ELSEWHERE = {
    "as it is": {},
    "another locale": {"LC_ALL": "C"},
    "a random hash seed": {"PYTHONHASHSEED": "random"},
    "another time zone": {"TZ": "Pacific/Apia"},
    "all of these, without a home": {
        "LC_ALL": "C",
        "PYTHONHASHSEED": "random",
        "TZ": "America/New_York",
        "HOME": "/nonexistent",
        "OMP_NUM_THREADS": "1",
        "OPENBLAS_NUM_THREADS": "1",
    },
}


@pytest.fixture(scope="module")
def folio(tmp_path_factory):
    """A folio."""
    return Bench(tmp_path_factory.mktemp("bench") / "w", STUDY.replace("mg/L", "µg/L")).run()


def rerender(folio, output, **changes):
    return subprocess.run(
        [sys.executable, "-m", "assayfolio.cli.rerender", folio, output],
        env={**os.environ, **changes},
        cwd=output.parent,
        capture_output=True,
        text=True,
        check=False,
    )


@pytest.mark.slow
@pytest.mark.parametrize("where", ELSEWHERE)
def test_a_copied_folio_renders_to_the_same_bytes(where, folio, tmp_path):
    copy = tmp_path / "archive" / "copy of a folio"
    shutil.copytree(folio, copy)
    answer = rerender(copy, tmp_path / "again.pdf", **ELSEWHERE[where])
    assert answer.returncode == 0, answer.stderr
    assert (tmp_path / "again.pdf").read_bytes() == (folio / "data/report.pdf").read_bytes()


def test_altered_data_are_not_rendered(folio, tmp_path):
    copy = tmp_path / "copy"
    shutil.copytree(folio, copy)
    data = copy / "data/inputs/values.csv"
    data.chmod(0o644)
    data.write_text(data.read_text().replace("48.2", "48.3"))
    answer = rerender(copy, tmp_path / "again.pdf")
    assert answer.returncode == 1
    assert "data/inputs/values.csv" in answer.stderr
    assert not (tmp_path / "again.pdf").exists()


def test_an_altered_laboratory_is_not_rendered(folio, tmp_path):
    copy = tmp_path / "copy"
    shutil.copytree(folio, copy)
    settings = copy / "data/context/lab.yaml"
    settings.chmod(0o644)
    settings.write_text("laboratory: Another laboratory\n")
    answer = rerender(copy, tmp_path / "again.pdf")
    assert answer.returncode == 1
    assert "data/context/lab.yaml" in answer.stderr
    assert not (tmp_path / "again.pdf").exists()


def test_neither_the_folio_nor_a_file_that_is_there_is_written_over(folio, tmp_path):
    there = tmp_path / "there.pdf"
    there.write_text("mine")
    for output in (
        folio / "data/report.pdf",
        folio / "again.pdf",
        there,
        tmp_path / "no-such-folder/again.pdf",
    ):
        before = output.read_bytes() if output.exists() else None
        answer = subprocess.run(
            [sys.executable, "-m", "assayfolio.cli.rerender", folio, output],
            capture_output=True,
            text=True,
            check=False,
        )
        assert answer.returncode == 2
        assert "Traceback" not in answer.stderr
        assert (output.read_bytes() if output.exists() else None) == before


def test_a_folder_that_is_no_folio_is_refused_in_words(tmp_path):
    answer = rerender(tmp_path, tmp_path / "again.pdf")
    assert answer.returncode == 2
    assert "Traceback" not in answer.stderr
