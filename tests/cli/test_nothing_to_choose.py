"""The command line takes no choice that belongs in the plan, and no word on who is at work."""

import os
import pwd
from pathlib import Path

import click
import pytest

from assayfolio.cli.root import cli
from assayfolio.study import vocabulary
from support.workspaces import Bench

# What decides the analysis, and the commands that carry it out or prepare it.
DECISIONS = {
    *vocabulary.DESIGN_KEYS,
    *vocabulary.COMPARISON_KEYS,
    *vocabulary.EQUIVALENCE_KEYS,
    *vocabulary.SPREAD_KEYS,
    *vocabulary.OUTLIER_KEYS,
    *vocabulary.CHECK_KEYS,
    *vocabulary.PRECISION_KEYS,
    *vocabulary.POWER_KEYS,
    *vocabulary.CRITERION_KEYS,
    *vocabulary.DATA_KEYS,
    "alpha",
}
ANALYSING = {"run", "check", "power", "preregister", "amend", "worksheet"}
IDENTITY = {"user", "account", "actor", "person", "as-user", "login"}


def options() -> set[tuple[str, str]]:
    """Command and name of every option."""
    return {
        (name, option.lstrip("-"))
        for name, command in cli.commands.items()
        for parameter in command.params
        if isinstance(parameter, click.Option)
        for option in (*parameter.opts, *parameter.secondary_opts)
    }


@pytest.mark.requirement("PLAN-9")
def test_no_option_decides_what_the_plan_decides() -> None:
    assert {("run", "workspace"), ("run", "json")} <= options()
    chosen = [each for each in options() if each[0] in ANALYSING and each[1] in DECISIONS]
    assert chosen == []


@pytest.mark.requirement("PLAN-9")
def test_a_margin_on_the_command_line_is_refused(tmp_path: Path) -> None:
    bench = Bench(tmp_path / "w")
    for choice in ("--alpha=0.1", "--margin=2", "--adjust=none", "--exclude=3"):
        assert bench("run", bench.study, choice).code == 2
    assert bench.entries() == []


@pytest.mark.requirement("ACCESS-1")
def test_no_option_says_who_is_at_work() -> None:
    assert [each for each in options() if each[1] in IDENTITY] == []


@pytest.mark.requirement("ACCESS-1")
def test_variables_that_name_another_user_do_not_change_who_is_entered(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    for variable in ("USER", "LOGNAME", "USERNAME", "LNAME", "SUDO_USER"):
        monkeypatch.setenv(variable, "somebody-else")
    bench = Bench(tmp_path / "w")
    folio = bench.run()
    account = pwd.getpwuid(os.geteuid()).pw_name
    assert {entry["actor"] for entry in bench.entries()} == {account}
    assert "somebody-else" not in (folio / "data/run.json").read_text("utf-8")
