"""README and DEVELOPERS say what the program does, and the checkout has the agreed layout."""

import re
from pathlib import Path

import pytest

from assayfolio.cli.root import cli
from assayfolio.errors import ExitCode
from assayfolio.study.availability import AVAILABLE_FOR_PAIRS
from assayfolio.study.reading import read_study
from assayfolio.workflow.steps import Step

ROOT = Path(__file__).resolve().parents[1]
README = (ROOT / "README.md").read_text("utf-8")
DEVELOPERS = (ROOT / "DEVELOPERS.md").read_text("utf-8")
TOP_LEVEL = {
    "README.md",
    "DEVELOPERS.md",
    "LICENSE",
    "pyproject.toml",
    "pipeline",
    "templates",
    "configs",
    "tests",
    "runs",
}
GENERATED = {"build"}


def test_the_first_screen_gives_exactly_two_commands():
    first_block = re.search(r"```sh\n(.*?)```", README, re.DOTALL)[1]
    commands = [line.split("#")[0].strip() for line in first_block.splitlines()]
    assert commands == ["sh pipeline/start.sh run configs/whey-moisture.yaml", "sh tests/start.sh"]
    assert (ROOT / "configs/whey-moisture.yaml").is_file()


def test_every_command_in_the_readme_exists():
    named = set(re.findall(r"start\.sh (\w+)", README))
    assert named
    assert named <= set(cli.commands)


def test_the_exit_codes_in_the_readme_are_those_of_the_program():
    rows = re.findall(r"^\| (\d) \| ", README, re.MULTILINE)
    assert [int(code) for code in rows] == [int(code) for code in ExitCode]


def test_the_example_in_the_readme_is_a_study_definition():
    example = re.search(r"```yaml\n(.*?)```", README, re.DOTALL)[1]
    study = read_study(example.encode("utf-8"), "README.md")
    assert len(study.comparisons) == 3


@pytest.mark.parametrize("method", AVAILABLE_FOR_PAIRS)
def test_every_adjustment_that_is_available_is_in_the_readme(method):
    words = {"none": "no adjustment", "sidak": "Sidak", "tukey-kramer": "Tukey-Kramer"}
    assert words.get(method, method).lower() in README.lower()


@pytest.mark.parametrize("step", list(Step))
def test_developers_md_numbers_the_steps_as_the_trail_does(step):
    assert f"| {int(step)} {step.name.lower().replace('_', '-')} |" in DEVELOPERS


def test_the_top_level_holds_the_agreed_names_and_nothing_else():
    names = {path.name for path in ROOT.iterdir() if not path.name.startswith(".")}
    assert names - GENERATED == TOP_LEVEL


def test_what_runs_leave_is_not_kept_under_version_control():
    ignored = (ROOT / ".gitignore").read_text("utf-8").splitlines()
    assert "/runs/*" in ignored
    assert "!/runs/README.md" in ignored
