"""preregister, amend and deviation as a person meets them."""

import click.testing
import pytest

from assayfolio.cli.root import cli
from support.fixed_plans import PLANNED, REASON, amended, bench_without_data
from support.workspaces import command


@pytest.mark.parametrize("name", ["preregister", "amend", "deviation"])
def test_each_command_explains_itself(name):
    answer = command(name, "--help")
    assert answer.code == 0
    assert f"assayfolio {name} configs/" in answer.out


def test_registering_and_amending_say_what_was_entered_and_what_comes_next(tmp_path):
    bench = bench_without_data(tmp_path / "w")
    answer = bench("preregister", bench.study)
    assert answer.code == 0, answer.err
    for words in (
        "TST-1/protocol-0001 registered 20",
        "Before any data of this study were seen.",
        "runs/TST-1/protocol-0001/data/protocol.pdf",
        "Next, with the data in their place: assayfolio run",
    ):
        assert words in answer.out
    bench.write(bench.study, amended())
    answer = bench("amend", bench.study, "--reason", REASON)
    assert answer.code == 0, answer.err
    shown, _, entered = answer.out.partition("TST-1/protocol-0002 registered")
    assert "Amends TST-1/protocol-0001" in shown
    assert "  alpha\n    was  0.05\n    is   0.01\n" in shown
    assert entered


def test_the_reason_is_asked_for_after_the_change_was_shown(tmp_path, monkeypatch):
    bench = bench_without_data(tmp_path / "w")
    assert bench("preregister", bench.study).code == 0
    bench.write(bench.study, amended())
    monkeypatch.setattr("assayfolio.cli.protocols.is_attended", lambda: True)
    runner = click.testing.CliRunner()
    arguments = ["amend", str(bench.study), "--workspace", str(bench.root)]
    result = runner.invoke(cli, arguments, input=f"{REASON}\n", standalone_mode=False)
    assert result.exception is None
    assert result.output.index("is   0.01") < result.output.index("Reason:")
    assert bench.entries()[-1]["reason"] == REASON


def test_a_deviation_without_texts_and_nobody_to_ask_is_not_entered(tmp_path):
    bench = bench_without_data(tmp_path / "w", PLANNED)
    answer = bench("deviation", bench.study)
    assert answer.code == 2
    for name in ("--what", "--effect", "--decision"):
        assert name in answer.err
    assert not [entry for entry in bench.entries() if entry["action"] == "deviation-recorded"]


def test_refusals_are_one_json_document_for_programs(tmp_path):
    bench = bench_without_data(tmp_path / "w")
    answer = bench("amend", bench.study, "--reason", REASON, "--json")
    assert answer.code == 2
    assert answer.document["exit_code"] == 2
    assert "No plan of TST-1 is registered" in answer.document["error"]
