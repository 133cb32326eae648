"""`assayfolio void` as a person and a program meet it."""

import pytest

from support.workspaces import Bench

REASON = "The balance was out of tolerance on 4 March"


@pytest.fixture(scope="module")
def bench(tmp_path_factory):
    bench = Bench(tmp_path_factory.mktemp("void") / "w")
    bench.run()
    return bench


@pytest.mark.parametrize("missing", ["--reason", "--investigation"])
def test_reason_and_investigation_are_compulsory(bench, missing):
    given = {"--reason": REASON, "--investigation": "INV-7"}
    del given[missing]
    answer = bench("void", "TST-1/run-0001", *[word for pair in given.items() for word in pair])
    assert answer.code == 2
    assert missing in answer.err


def test_says_what_is_void_and_where_that_is_kept(bench):
    answer = bench("void", bench.runs / "TST-1/run-0001", "--reason", REASON, "--investigation", "INV-7")
    assert answer.code == 0
    assert f"TST-1/run-0001 is void: {REASON}" in answer.out
    assert "investigation  INV-7" in answer.out
    assert "_laboratory/void-0001" in answer.out
    seal = bench.entries()[-1]["details"]["seal"]
    assert seal in answer.out


def test_what_was_refused_is_in_the_trail(bench):
    answer = bench("void", "TST-1/run-0001", "--reason", REASON, "--investigation", "INV-8", "--json")
    assert answer.code == 2
    assert answer.document["exit_code"] == 2
    entry = bench.entries()[-1]
    assert (entry["action"], entry["details"]["command"]) == ("attempt-refused", "void")
    assert "void already" in entry["reason"]
