"""What was not done as planned: found by dates, trail and clock, or entered by a person; none is left out."""

import json
from datetime import UTC, datetime, timedelta

import pytest

from assayfolio.evaluation.dates import date_deviations
from assayfolio.evidence.entries import TrailEntry
from assayfolio.workflow.departures import departures
from assayfolio.workflow.deviation import deviations_record, entered_deviations
from support.fixed_plans import PLANNED
from support.studies import observations_of, study_of
from support.workspaces import Bench

TEXTS = {
    "what": "oven 3 stood open for ten minutes",
    "effect": "none seen on the control",
    "decision": "values kept, notebook 14 page 3",
}


def options(**texts):
    return [part for name, text in {**TEXTS, **texts}.items() for part in (f"--{name}", text)]


@pytest.fixture(scope="module")
def bench(tmp_path_factory):
    """A workspace in which a deviation was entered, and then the study run."""
    bench = Bench(tmp_path_factory.mktemp("deviation") / "w", PLANNED)
    answer = bench("deviation", bench.study, *options(when="2031-03-04"))
    assert answer.code == 0, answer.err
    bench.run()
    return bench


@pytest.mark.requirement("PLAN-11")
def test_an_entered_deviation_stands_in_the_trail_with_person_and_time(bench):
    (entry,) = [entry for entry in bench.entries() if entry["action"] == "deviation-recorded"]
    assert entry["subject"] == "TST-1"
    assert {key: entry["details"][key] for key in TEXTS} == TEXTS
    assert entry["details"]["when"] == "2031-03-04"
    assert entry["actor"]
    assert entry["reason"] == TEXTS["what"]


@pytest.mark.requirement("PLAN-11")
def test_every_run_after_it_reports_it(bench):
    findings = json.loads((bench.runs / "TST-1/run-0001/data/findings.json").read_bytes())
    (deviation,) = findings["deviations"]
    assert deviation["what"] == TEXTS["what"]
    for words in (TEXTS["effect"], TEXTS["decision"], "2031-03-04", "entered by"):
        assert words in deviation["reason"]
    kept = json.loads((bench.runs / "TST-1/run-0001/data/context/deviations.json").read_bytes())
    assert [one["what"] for one in kept["recorded"]] == [TEXTS["what"]]


@pytest.mark.parametrize(
    "texts",
    [
        {"what": ""},
        {"what": "error"},
        {"what": "measurement error"},
        {"effect": ""},
        {"effect": "no"},
        {"decision": " . "},
        {"what": "x y z " * 100},
    ],
)
def test_a_deviation_that_says_nothing_is_refused(bench, texts):
    before = len(bench.entries())
    answer = bench("deviation", bench.study, *options(**texts))
    assert answer.code == 2
    (name,) = texts
    assert f"--{name}:" in answer.err
    assert len(bench.entries()) == before


def test_only_deviations_of_the_study_are_listed():
    listed = [
        entry(1, "deviation-recorded", "TST-1", **TEXTS, when=None),
        entry(2, "deviation-recorded", "TST-2"),
    ]
    recorded = entered_deviations(deviations_record(listed, "TST-1"))
    assert [one.what for one in recorded] == [TEXTS["what"]]


START = datetime(2031, 3, 4, 9, tzinfo=UTC)


def entry(seq, action="noted", subject="TST-1", minutes=None, **details):
    """An entry of the trail, one minute after the one before unless `minutes` says otherwise."""
    moment = START + timedelta(minutes=seq if minutes is None else minutes)
    time = moment.strftime("%Y-%m-%dT%H:%M:%S.%fZ")
    return TrailEntry(seq, time, "somebody", action, subject, None, details, "0" * 64)


def received(seq, digest, path="configs/data/values.csv", **more):
    return entry(seq, "received", path=path, size=9, sha256=digest * 64, study="TST-1", **more)


def allotted(seq, number, **inputs):
    return entry(
        seq,
        "allotted",
        f"TST-1/run-{number:04d}",
        number=number,
        inputs={path: digest * 64 for path, digest in inputs.items()},
        data=list(inputs),
    )


def found(entries, **data):
    record = {"study": "TST-1", "protocols": []}
    digests = {path: digest * 64 for path, digest in data.items()}
    return [one["what"] for one in departures(entries, record, digests, None)]


def test_data_that_came_after_a_run_on_other_data_are_late():
    entries = [received(1, "a", "one.csv"), allotted(2, 1, **{"one.csv": "a"}), received(3, "b", "two.csv")]
    (what,) = found(entries, **{"one.csv": "a", "two.csv": "b"})
    assert what.startswith("two.csv first seen 2031-03-04 09:03 UTC, after TST-1/run-0001")
    assert found(entries, **{"one.csv": "a"}) == []


def test_data_that_changed_under_their_name_are_named():
    entries = [received(1, "a"), received(2, "b")]
    (what,) = found(entries, **{"configs/data/values.csv": "b"})
    assert "was changed after it was first seen: it had other bytes on 2031-03-04 09:01 UTC" in what
    assert found(entries, **{"configs/data/values.csv": "a"}) == []


def test_a_clock_that_ran_backwards_is_named():
    (what,) = found([entry(1, minutes=60), entry(2, minutes=0)])
    assert what == "the computer's clock was set back by 60 min between entries 1 and 2"


@pytest.mark.parametrize(("minutes", "way"), [(-30, "back"), (600, "forward")])
def test_a_clock_that_was_moved_shows_against_the_counter_since_start_up(minutes, way):
    first = {"boot": "b", "monotonic_us": 0}
    second = {"boot": "b", "monotonic_us": 60_000_000}
    entries = [entry(1, minutes=0, at=first), entry(2, minutes=1 + minutes, at=second)]
    (what,) = found(entries)
    assert f"was set {way} by" in what
    kept = [entry(1, minutes=0, at=first), entry(2, minutes=1, at=second)]
    assert found(kept) == []
    restarted = [entry(1, minutes=0, at=first), entry(2, minutes=600, at={**second, "boot": "c"})]
    assert found(restarted) == []


def test_what_the_clock_did_before_the_study_is_no_deviation_of_it():
    entries = [entry(1, subject="OTHER", minutes=60), entry(2, subject="OTHER", minutes=0), entry(3)]
    assert found(entries) == []


DATED = """\
study: TST-1
title: A test of dates
data: {file: data/values.csv, response: content, factor: lot, unit: mg/kg}
alpha: 0.05
measurement: {measured-at: WHEN}
"""
REGISTERED, RUN = "2031-03-04T10:00:00.000000Z", "2031-03-20T10:00:00.000000Z"


def dated(when, registered=REGISTERED):
    study = study_of("", DATED.replace("WHEN", when))
    observations = observations_of(study, {"a": ["1", "2"], "b": ["3", "4"]})
    return [one.what for one in date_deviations(study, observations, registered, RUN)]


@pytest.mark.parametrize("when", ["2031-03-05", "2031-03-04T10:00:01Z", "2031-03-20", "2031-03-04"])
def test_a_date_between_registration_and_run_is_in_order(when):
    assert dated(when) == []


@pytest.mark.parametrize("when", ["2031-03-01", "2031-03-04T09:59:59Z", "2031-03-04T11:30:00+02:00"])
def test_a_measurement_before_the_registration_is_named(when):
    (what,) = dated(when)
    assert what == f"measured before the plan was registered on 2031-03-04: {when}"
    assert dated(when, None) == []


@pytest.mark.parametrize("when", ["2031-03-23", "2031-03-20T10:00:01Z"])
def test_a_measurement_after_the_run_is_named(when):
    (what,) = dated(when)
    assert what == f"measured after the run that reports it began, on 2031-03-20: {when}"


def test_a_date_that_cannot_be_compared_is_named():
    (what,) = dated("early in March")
    assert what == "measured-at: 'early in March' cannot be compared with the dates of plan and run"


def test_the_lines_of_the_data_that_show_it_are_given():
    study = study_of("", DATED.replace("WHEN", "{column: day}"))
    text = "lot,content,day\na,1,2031-03-05\na,2,2031-03-01\nb,3,2031-03-02\nb,4,2031-03-06\n"
    from assayfolio.observations.reading import read_all_observations

    observations = read_all_observations([("v.csv", text.encode())], study.data, study.measurement)
    (deviation,) = date_deviations(study, observations, REGISTERED, RUN)
    assert deviation.lines == (3, 4)
    assert deviation.what.endswith("2031-03-01 to 2031-03-02")


def test_exclusions_that_come_after_a_result_are_named(tmp_path):
    study = PLANNED.replace("  factor:", "  exclusions: data/left-out.yaml\n  factor:", 1)
    bench = Bench(tmp_path / "w", study)
    left_out = bench.data.parent / "left-out.yaml"
    left_out.write_text("exclusions: []\n")
    bench.run()
    assert deviations_of(bench, 1) == []
    left_out.write_text("# looked at again\nexclusions: []\n")
    bench.run()
    (what,) = deviations_of(bench, 2)
    assert what == "the exclusions are others than those that TST-1/run-0001 was computed with"
    bench.study.write_text(PLANNED)
    bench.run()
    (what,) = deviations_of(bench, 3)
    assert what == "nothing is excluded any more, after TST-1/run-0001 had been computed with exclusions"


def deviations_of(bench, number):
    findings = json.loads((bench.runs / f"TST-1/run-{number:04d}/data/findings.json").read_bytes())
    return [one["what"] for one in findings["deviations"]]
