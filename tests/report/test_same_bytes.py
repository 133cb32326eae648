"""The same input gives the same bytes in another process, folder, locale, time zone and hash seed."""

import hashlib
import os
import subprocess
import sys
from pathlib import Path

import pytest

PROGRAM = """
import hashlib, sys
sys.path.insert(0, sys.argv[1])
{before}
from report.cases import CASES
from assayfolio.report.render import render_report
{other}
rendered = render_report(CASES[sys.argv[2]]())
print(hashlib.sha256(rendered.pdf).hexdigest())
print(hashlib.sha256(b"".join(svg for _, svg in rendered.figures)).hexdigest())
"""

ELSEWHERE = {
    "another hash seed": ({"PYTHONHASHSEED": "12345"}, "", ""),
    "another locale and time zone": ({"LC_ALL": "C", "TZ": "Pacific/Apia"}, "", ""),
    "no home and no cache": ({"HOME": "/nonexistent", "XDG_CACHE_HOME": "/nonexistent"}, "", ""),
    "the renderer loaded before, with the fonts of the machine": (
        {},
        "import warnings; warnings.simplefilter('ignore'); import weasyprint",
        "",
    ),
    "another report before it": ({}, "", "render_report(CASES['single values']())"),
    "a date set for builds": ({"SOURCE_DATE_EPOCH": "1"}, "", ""),
}


@pytest.mark.requirement("NUMBERS-4")
@pytest.mark.parametrize("where", ELSEWHERE)
def test_a_report_is_the_same_bytes_with(where, rendered, tmp_path):
    changes, before, other = ELSEWHERE[where]
    ended = subprocess.run(
        [
            sys.executable,
            "-c",
            PROGRAM.format(before=before, other=other),
            Path(__file__).parents[1],
            "balanced",
        ],
        env={**os.environ, **changes},
        cwd=tmp_path,
        capture_output=True,
        text=True,
        check=False,
    )
    assert ended.returncode == 0, ended.stderr
    here = rendered("balanced")
    assert ended.stdout.split() == [
        hashlib.sha256(here.pdf).hexdigest(),
        hashlib.sha256(b"".join(svg for _, svg in here.figures)).hexdigest(),
    ]
    assert ended.stderr == ""


def test_rendering_leaves_the_environment_and_the_folder_as_they_were(rendered, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    monkeypatch.setenv("FONTCONFIG_FILE", "/some/where.conf")
    from assayfolio.report import pdf

    pdf._styles.cache_clear()
    from assayfolio.report.render import render_report
    from report.cases import CASES

    assert render_report(CASES["balanced"]()).pdf == rendered("balanced").pdf
    assert os.environ["FONTCONFIG_FILE"] == "/some/where.conf"
    assert list(tmp_path.iterdir()) == []
