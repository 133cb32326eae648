"""README and DEVELOPERS say what the program does, and the checkout has the agreed layout."""

import re
from pathlib import Path

import pytest

from assayfolio.cli.root import cli
from assayfolio.errors import ExitCode, StudyError
from assayfolio.study import vocabulary
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
    named = set(re.findall(r"(?:start\.sh|^assayfolio) (\w+)", README, re.MULTILINE))
    assert named
    assert named <= set(cli.commands)


def test_the_exit_codes_in_the_readme_are_those_of_the_program():
    rows = re.findall(r"^\| (\d) \| ", README, re.MULTILINE)
    assert [int(code) for code in rows] == [int(code) for code in ExitCode]


def test_the_example_in_the_readme_is_a_study_definition():
    example = re.search(r"```yaml\n(.*?)```", README, re.DOTALL)[1]
    study = read_study(example.encode("utf-8"), "README.md")
    assert len(study.comparisons) == 3


OF_THE_LABORATORY = {
    name
    for name in vars(vocabulary)
    if name.startswith(("LABORATORY_", "PEOPLE_", "PERSON_", "SEPARATION_", "RETENTION_", "WITNESS_"))
    and name.endswith("_KEYS")
}
HEAD = "study: A\ntitle: t\nalpha: 0.05\n"
COLUMNS = "  file: a.csv\n  factor: f\n  levels: [wet, nir-1, nir-2]\n"


def test_the_other_keys_in_the_readme_are_those_of_a_study_definition():
    section = README.partition("The other keys, none of them compulsory:")[2]
    keys = re.search(r"```yaml\n(.*?)```", section, re.DOTALL)[1]
    text = HEAD + keys.replace("data:\n", f"data:\n{COLUMNS}", 1)
    study = read_study(text.encode("utf-8"), "README.md")
    assert len(study.equivalence) == 5


@pytest.mark.parametrize(
    "table", [name for name in vars(vocabulary) if name.endswith("_KEYS") and name not in OF_THE_LABORATORY]
)
def test_every_key_of_a_study_definition_is_in_the_readme(table):
    section = README.partition("## Study definition")[2].partition("\n## ")[0]
    unnamed = [key for key in vars(vocabulary)[table] if not re.search(rf"\b{key}\b", section)]
    assert set(unnamed) <= {"purpose"}


@pytest.mark.parametrize("table", sorted(OF_THE_LABORATORY))
def test_every_key_of_the_laboratorys_files_is_in_the_readme(table):
    section = README.partition("## People, roles and settings")[2].partition("\n## ")[0]
    unnamed = [key for key in vars(vocabulary)[table] if not re.search(rf"\b{key}\b", section)]
    assert set(unnamed) <= {"laboratory", "address", "note", "accent", "paper", "wait-seconds"}


SCORES = "scores: {wet: 0, nir-1: 1, nir-2: 2}"
FAMILIES = {
    "`pairs: all`": "pairs: all",
    "`against:` a level": "against: wet",
    "`contrasts:`, `trend: polynomial`": f"trend: polynomial, degree: 2, {SCORES}",
    "`weights:`, `trend: linear`": f"trend: linear, {SCORES}",
}


def methods_for(family, variances):
    """The words for `adjust` with which a study definition is accepted."""
    accepted = set()
    for method in vocabulary.ADJUSTMENTS:
        comparison = f"comparisons: [{{name: c, {family}, adjust: {method}}}]\n"
        text = f"{HEAD}data:\n  response: y\n{COLUMNS}design: {{variances: {variances}}}\n{comparison}"
        try:
            read_study(text.encode("utf-8"), "study.yaml")
        except StudyError:
            continue
        accepted.add(method)
    return accepted


@pytest.mark.parametrize("row", FAMILIES)
def test_the_methods_in_the_table_of_the_readme_are_those_that_are_accepted(row):
    cells = re.search(rf"^\| {re.escape(row)} \| (.*) \| (.*) \|$", README, re.MULTILINE).groups()
    pooled, separate = (set(cell.split(", ")) for cell in cells)
    assert pooled == methods_for(FAMILIES[row], "pooled")
    assert separate == methods_for(FAMILIES[row], "separate")


@pytest.mark.parametrize("requirement", vocabulary.REQUIREMENTS)
def test_everything_that_a_laboratory_can_require_is_in_the_readme(requirement):
    assert f"`{requirement}`" in README.partition("`require:` list")[2].partition("\n## ")[0]


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
