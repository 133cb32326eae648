"""The command line as a person meets it: help, versions, words for mistakes, exit codes."""

import json
import os
import subprocess
import sys

import pytest

from assayfolio.version import VERSION
from support.workspaces import Bench, command, process

COMMANDS = (
    *("workspace", "settings", "signer"),
    *("check", "power", "worksheet", "preregister", "amend", "run", "deviation", "void", "sign"),
    *("verify", "rerun", "archive", "trail", "trend", "index"),
)


def test_help_lists_the_commands_that_work_and_no_others():
    answer = command("--help")
    assert answer.code == 0
    listed = answer.out.split("Commands:")[1].split("Exit codes:")[0].split("\n")
    assert tuple(sorted(line.split()[0] for line in listed if line.strip())) == tuple(sorted(COMMANDS))
    assert not any(line.endswith("...") for line in listed), "a summary is cut off"


@pytest.mark.parametrize("name", COMMANDS)
def test_every_command_explains_itself_with_an_example(name):
    answer = command(name, "--help")
    assert answer.code == 0
    assert "Example" in answer.out
    assert f"assayfolio {name}" in answer.out


def test_the_version_is_told():
    assert command("--version").out == f"assayfolio {VERSION}\n"


def test_the_module_runs_like_the_command():
    ended = process("--version")
    assert (ended.returncode, ended.stdout) == (0, f"assayfolio {VERSION}\n")


@pytest.mark.parametrize("arguments", [("nonsense",), ("run",), ("run", "a", "b"), ("verify", "--no-such")])
def test_a_wrong_command_line_ends_with_2(arguments):
    answer = command(*arguments)
    assert answer.code == 2
    assert answer.err


def test_help_and_check_load_nothing_heavy(tmp_path):
    bench = Bench(tmp_path / "w")
    heavy = ("weasyprint", "pandas", "scipy", "pyarrow", "openpyxl", "jinja2")
    for arguments in (["--help"], ["check", str(bench.study)]):
        code = (
            "import sys; from assayfolio.cli.outcome import run_command; "
            "from assayfolio.cli.root import cli; "
            f"run_command(cli, {arguments!r}); "
            f"print('LOADED', [name for name in {heavy!r} if name in sys.modules])"
        )
        ended = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
        assert ended.stdout.strip().endswith("LOADED []")


def test_no_workspace_is_said_in_words(tmp_path):
    answer = command("run", tmp_path / "study.yaml")
    assert answer.code == 2
    assert "assayfolio workspace" in answer.err


def test_a_founded_workspace_runs_its_first_study(tmp_path):
    root = tmp_path / "lab"
    founded = command("workspace", root)
    assert founded.code == 0
    assert command("workspace", root).code == 2
    unnamed = command("run", root / "configs/first-study.yaml")
    assert unnamed.code == 2
    assert "put your laboratory's name there" in unnamed.err
    settings = root / "configs/lab.yaml"
    settings.write_text(settings.read_text().replace("Name of your laboratory", "Invented laboratory"))
    assert command("check", root / "configs/first-study.yaml").code == 0
    assert command("run", root / "configs/first-study.yaml").code == 0
    assert command("verify", "--workspace", root).code == 0


def test_a_workspace_is_not_founded_over_files_that_are_there(tmp_path):
    root = tmp_path / "lab"
    (root / "configs").mkdir(parents=True)
    (root / "configs/first-study.yaml").write_text("mine")
    answer = command("workspace", root)
    assert answer.code == 2
    assert (root / "configs/first-study.yaml").read_text() == "mine"
    assert not (root / "configs/lab.yaml").exists()


def test_check_says_whether_the_data_fit(tmp_path):
    bench = Bench(tmp_path / "w")
    assert "fits the plan" in bench("check", bench.study).out
    assert bench("check", bench.study, "--json").document["values_per_level"] == {
        "gravimetric": 3,
        "turbidimetric": 3,
        "chromatographic": 3,
    }
    assert not bench.runs.exists()


@pytest.mark.requirement("TRAIL-15")
def test_the_trail_is_shown_to_people_and_programs(tmp_path):
    bench = Bench(tmp_path / "w")
    bench.run()
    people, programs = bench("trail"), bench("trail", "--json")
    assert people.code == programs.code == 0
    for entry in bench.entries():
        assert entry["action"] in people.out
    assert programs.document["entries"] == bench.entries()
    head = json.loads((bench.runs / "audit-trail.head").read_text())
    assert programs.document["head"] == head


def test_verify_answers_programs_with_numbered_checks(tmp_path):
    bench = Bench(tmp_path / "w")
    folio = bench.run()
    whole = bench("verify", "--json")
    assert whole.code == 0
    assert {check["outcome"] for check in whole.document["checks"]} == {"passed"}
    report = folio / "data/report.pdf"
    report.chmod(0o644)
    content = bytearray(report.read_bytes())
    content[1000] ^= 1
    report.write_bytes(content)
    changed = bench("verify", folio)
    assert changed.code == 1
    assert "data/report.pdf" in changed.out


def test_a_folio_outside_any_workspace_is_verified_as_far_as_can_be(tmp_path):
    bench = Bench(tmp_path / "w")
    folio = bench.run()
    lonely = tmp_path / "elsewhere"
    folio.rename(lonely)
    answer = command("verify", lonely)
    assert answer.code == 5
    assert "not checkable" in answer.out


def test_control_characters_do_not_reach_the_terminal(tmp_path):
    answer = command("run", tmp_path / "a\x1b[31m.yaml")
    assert answer.code == 2
    assert "\x1b" not in answer.err


def test_a_program_gets_the_faults_as_json(tmp_path):
    bench = Bench(tmp_path / "w", data="method,sulfate\ngravimetric,x\n")
    for name in ("check", "run"):
        answer = bench(name, bench.study, "--json")
        assert answer.code == 2
        assert answer.document["exit_code"] == 2
        assert answer.document["faults"][0]["file"] == "configs/data/values.csv"
        assert answer.document["faults"][0]["line"] == 2


@pytest.mark.parametrize("unbuffered", ["", "1"])
def test_output_that_cannot_be_written_is_no_finding(unbuffered, tmp_path):
    bench = Bench(tmp_path / "w")
    bench.run()
    command_line = [sys.executable, "-m", "assayfolio", "verify", "--workspace", bench.root]
    with open("/dev/full", "w") as full:  # noqa: PTH123 - a device
        ended = subprocess.run(
            command_line,
            stdout=full,
            stderr=subprocess.PIPE,
            text=True,
            check=False,
            env={**os.environ, "PYTHONUNBUFFERED": unbuffered},
        )
    assert ended.returncode == 3
    assert "Traceback" not in ended.stderr


@pytest.mark.parametrize("unbuffered", ["", "1"])
def test_a_reader_that_goes_away_is_no_finding(unbuffered, tmp_path):
    bench = Bench(tmp_path / "w")
    bench.run()
    reader, writer = os.pipe()
    os.close(reader)
    command_line = [sys.executable, "-m", "assayfolio", "verify", "--workspace", bench.root]
    ended = subprocess.run(
        command_line,
        stdout=writer,
        stderr=subprocess.PIPE,
        text=True,
        check=False,
        env={**os.environ, "PYTHONUNBUFFERED": unbuffered},
    )
    os.close(writer)
    assert ended.returncode == 3
    assert "Traceback" not in ended.stderr


def test_a_misspelt_data_file_is_hinted_at(tmp_path):
    bench = Bench(tmp_path / "w", data=None)
    (bench.data.parent / "value.csv").write_text("")
    answer = bench("check", bench.study)
    assert answer.code == 0
    assert "value.csv" in answer.out


def test_among_many_checks_the_failed_ones_are_named_again_at_the_end(tmp_path):
    bench = Bench(tmp_path / "w")
    first = bench.run()
    bench.run()
    extra = first / "data/extra.txt"
    extra.write_text("x")
    answer = bench("verify")
    assert answer.code == 1
    *_, failed, counts = answer.out.splitlines()
    assert failed.startswith("Failed: 3.")
    assert "TST-1/run-0001" in failed
    assert ", 0 failed," not in counts
