"""Changing a plan that is registered: named field by field, with reason, timing and what it changes."""

import json

import pytest

from support.fixed_plans import (
    PLANNED,
    REASON,
    amend,
    amended,
    bench_without_data,
    measure,
    preregister,
)

HOLM = PLANNED.replace("adjust: tukey-kramer", "adjust: holm")
TITLED = PLANNED.replace("Sulfate by", "Sulphate by")


@pytest.fixture(scope="module")
def life(tmp_path_factory):
    """A plan registered, amended before the data, measured, run, amended after the data, run again."""
    bench = bench_without_data(tmp_path_factory.mktemp("life") / "w")
    protocols = [preregister(bench), amend(bench, TITLED, "the customer spells it so, letter of 3 March")]
    measure(bench)
    runs = [bench.run()]
    protocols.append(amend(bench, HOLM.replace("Sulfate by", "Sulphate by")))
    runs.append(bench.run())
    return bench, protocols, runs


def record(folio, name):
    return json.loads((folio / "data" / name).read_bytes())


def registration(run):
    return record(run, "context/registration.json")


def test_protocols_are_numbered_and_each_names_the_one_it_amends(life):
    _, protocols, _ = life
    records = [record(folio, "protocol.json") for folio in protocols]
    assert [one["protocol"] for one in records] == ["protocol-0001", "protocol-0002", "protocol-0003"]
    assert [one["amends"] for one in records] == [None, 1, 2]
    assert records[2]["reason"] == REASON


@pytest.mark.requirement("PLAN-10", "TRAIL-8")
def test_an_amendment_names_every_field_with_both_values(life):
    bench, protocols, _ = life
    key = "comparisons.all pairs of methods.adjust"
    expected = [{"key": key, "old": "tukey-kramer", "new": "holm"}]
    assert record(protocols[2], "protocol.json")["differences"] == expected
    entries = [entry for entry in bench.entries() if entry["action"] == "protocol-allotted"]
    assert entries[2]["details"]["differences"] == expected
    assert entries[2]["reason"] == REASON


@pytest.mark.requirement("PLAN-10")
def test_each_amendment_is_before_or_after_the_data_by_the_order_of_the_trail(life):
    _, protocols, runs = life
    timings = [record(folio, "protocol.json")["timing"] for folio in protocols]
    assert timings == ["before data first seen", "before data first seen", "after data first seen"]
    assert [one["timing"] for one in registration(runs[1])["protocols"]] == timings


def test_only_what_was_changed_after_the_data_becomes_exploratory(life):
    _, _, runs = life
    marks = [
        [
            family["registered"]
            for family in record(run, "findings.json")["responses"]["sulfate"]["comparisons"]
        ]
        for run in runs
    ]
    assert marks == [[True], [False]]
    said = [record(run, "run.json")["pre_registration"] for run in runs]
    assert [one["amendments_after_data"] for one in said] == [0, 1]
    assert [one["protocol"] for one in said] == ["protocol-0002", "protocol-0003"]


def test_the_result_under_the_earlier_plan_is_the_one_the_earlier_run_had(life):
    _, _, runs = life
    beside = record(runs[1], "context/protocols/protocol-0002/findings.json")
    before = record(runs[0], "findings.json")
    families = before["responses"]["sulfate"]["comparisons"]
    assert beside["responses"]["sulfate"]["comparisons"] == [
        {**family, "registered": False} for family in families
    ]
    assert beside["responses"]["sulfate"]["anova"] == before["responses"]["sulfate"]["anova"]
    assert (
        record(runs[1], "run.json")["pre_registration"]["earlier_results"][0]["protocol"] == "protocol-0002"
    )
    assert record(runs[0], "run.json")["pre_registration"]["earlier_results"] == []


def test_everything_can_be_verified(life):
    bench, _, _ = life
    answer = bench("verify")
    assert answer.code == 0, answer.out


@pytest.mark.requirement("TRAIL-8")
@pytest.mark.parametrize(
    ("reason", "said"),
    [
        ("", "is missing"),
        ("   ", "is missing"),
        ("late", "only 4 characters long"),
        ("updated the plan again", "made of words that would fit any change"),
        (REASON, "the very text of an earlier reason"),
    ],
)
def test_a_reason_that_says_nothing_is_refused(life, reason, said):
    bench, _, _ = life
    kept = bench.study.read_bytes()
    before = len(bench.entries())
    bench.write(bench.study, amended())
    try:
        answer = bench("amend", bench.study, "--reason", reason)
    finally:
        bench.write(bench.study, kept)
    assert answer.code == 2
    assert said in answer.err
    assert "alpha\n    was  0.05\n    is   0.01" in answer.out
    assert len(bench.entries()) == before


def test_without_a_reason_and_nobody_to_ask_nothing_is_entered(life):
    bench, _, _ = life
    kept = bench.study.read_bytes()
    bench.write(bench.study, amended())
    try:
        answer = bench("amend", bench.study)
    finally:
        bench.write(bench.study, kept)
    assert answer.code == 2
    assert "The reason for the amendment is missing" in answer.err


def test_there_is_nothing_to_amend_where_nothing_differs(life):
    bench, _, _ = life
    answer = bench("amend", bench.study, "--reason", "kit A is no longer sold either, see letter of 5 March")
    assert answer.code == 2
    assert "nothing differs in meaning" in answer.err


def test_there_is_nothing_to_amend_where_nothing_is_registered(tmp_path):
    bench = bench_without_data(tmp_path / "w")
    answer = bench("amend", bench.study, "--reason", REASON)
    assert answer.code == 2
    assert "preregister" in answer.err


def test_an_earlier_plan_that_gives_no_result_on_these_data_is_told_with_its_reason(tmp_path):
    two = PLANNED.replace(", chromatographic]", "]")
    bench = bench_without_data(tmp_path / "w", two)
    preregister(bench)
    measure(bench)
    assert bench("run", bench.study).code == 2
    amend(bench, PLANNED)
    run = bench.run()
    (earlier,) = record(run, "run.json")["pre_registration"]["earlier_results"]
    assert earlier["findings_sha256"] is None
    assert "chromatographic" in earlier["reason"]
    assert not (run / "data/context/protocols/protocol-0001/findings.json").exists()
