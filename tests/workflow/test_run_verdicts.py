"""How a run ends: criteria and the exit code, the lines on the terminal, the second route."""

import json
from dataclasses import replace

import pytest

from assayfolio.workflow import run as workflow_run
from support.workspaces import STUDY, Bench

PARTS = """\
precision: {estimate: true}
equivalence:
  - {name: near gravimetric, against: gravimetric, margin: 5, adjust: holm}
criteria:
  - {quantity: repeatability-rsd, at-most: 2}
"""
STRICT = "  - {quantity: level-sd, level: gravimetric, at-most: 0.1}\n"


def study_with(parts: str) -> str:
    at = STUDY.index("sign-off")
    return f"{STUDY[:at]}{parts}{STUDY[at:]}"


@pytest.fixture(scope="module")
def met(tmp_path_factory):
    bench = Bench(tmp_path_factory.mktemp("met") / "w", study_with(PARTS))
    return bench, bench("run", bench.study)


@pytest.fixture(scope="module")
def missed(tmp_path_factory):
    bench = Bench(tmp_path_factory.mktemp("missed") / "w", study_with(PARTS + STRICT))
    return bench, bench("run", bench.study)


def test_a_run_whose_criteria_are_all_met_ends_with_code_0(met):
    _, answer = met
    assert answer.code == 0
    assert "sulfate: repeatability-rsd 0.9" in answer.out
    assert "planned at most 2 %: criterion met" in answer.out


def test_a_run_that_misses_a_criterion_ends_with_code_1_and_is_complete_all_the_same(missed):
    bench, answer = missed
    assert answer.code == 1
    assert "level-sd of gravimetric 0.450925 mg/L, planned at most 0.1 mg/L: criterion not met" in answer.out
    assert "A criterion that was set in advance is not met. The run is complete and sealed" in answer.out
    record = json.loads((bench.runs / "TST-1/run-0001/data/run.json").read_bytes())
    assert record["outcome"] == "completed"
    assert bench("verify").code == 0


def test_programs_are_told_of_the_criteria_too(missed):
    bench, _ = missed
    answer = bench("run", bench.study, "--json")
    assert answer.code == answer.document["exit_code"] == 1
    assert answer.document["outcome"] == "completed"
    verdicts = answer.document["verdicts"]["sulfate"]
    assert [one["verdict"] for one in verdicts["criteria"]] == ["criterion met", "criterion not met"]
    assert [one["name"] for one in verdicts["equivalence"]] == ["near gravimetric"]


def test_a_criterion_that_cannot_be_assessed_counts_as_not_met(tmp_path):
    parts = "criteria: [{quantity: level-sd, level: gravimetric, at-most: 1}]\n"
    data = "method,sulfate\ngravimetric,48.2\nturbidimetric,47.1\nturbidimetric,47.5\nchromatographic,48.61\n"
    bench = Bench(tmp_path / "w", study_with(parts), data)
    answer = bench("run", bench.study)
    assert answer.code == 1
    assert "level-sd of gravimetric, planned at most 1 mg/L: not assessable" in answer.out
    assert "Not reported: criterion: level-sd of gravimetric - gravimetric has one value" in answer.out


def test_equivalence_and_precision_have_a_line_each(met):
    _, answer = met
    assert "sulfate: near gravimetric: equivalence shown in 2 of 2" in answer.out
    assert "sulfate: precision, standard deviations: repeatability 0.4" in answer.out


def test_the_record_says_how_many_digits_the_two_routes_agree_in(met):
    bench, _ = met
    record = json.loads((bench.runs / "TST-1/run-0001/data/run.json").read_bytes())
    agreements = {one["quantity"]: one for one in record["second_route"]["sulfate"]["agreements"]}
    assert {"means", "SS between", "SS within", "F", "tails of the overall tests"} <= set(agreements)
    assert {"adjusted tails: all pairs of methods", "t tails: near gravimetric"} <= set(agreements)
    assert all(one["holds"] and one["digits"] >= 10 for one in agreements.values())
    assert "second_route" not in json.loads((bench.runs / "TST-1/run-0001/data/findings.json").read_bytes())


@pytest.mark.requirement("NUMBERS-2")
def test_a_disagreement_of_the_two_routes_fails_the_run_and_says_where(tmp_path, monkeypatch):
    real = workflow_run.evaluate

    def wrong(*arguments):
        findings = real(*arguments)
        (response,) = findings.responses
        anova = replace(response.anova, p=response.anova.p * (1 + 1e-6))
        return replace(findings, responses=(replace(response, anova=anova),))

    monkeypatch.setattr(workflow_run, "evaluate", wrong)
    bench = Bench(tmp_path / "w")
    answer = bench("run", bench.study)
    assert answer.code == 3
    assert "sulfate, tails of the overall tests (F): 6.0 digits" in answer.err
    folio = bench.runs / "TST-1/run-0001"
    record = json.loads((folio / "data/run.json").read_bytes())
    assert record["outcome"] == "failed"
    assert "second route" in record["reason"]
    found = {one["quantity"]: one["holds"] for one in record["second_route"]["sulfate"]["agreements"]}
    assert found["tails of the overall tests"] is False
    assert not (folio / "data/findings.json").exists()
    assert bench("verify").code == 0


def test_several_responses_are_read_and_told_apart(tmp_path):
    study = STUDY.replace("response: sulfate", "response: [sulfate, chloride]")
    data = "method,sulfate,chloride\n" + "".join(
        f"{level},{48 + at / 7 + k:.2f},{12 + (at * 5 % 7) / 9:.3f}\n"
        for k, level in enumerate(("gravimetric", "turbidimetric", "chromatographic"))
        for at in range(4)
    )
    bench = Bench(tmp_path / "w", study, data)
    answer = bench("run", bench.study)
    assert answer.code == 0
    assert "12 values of each of 2 responses at 3 levels" in answer.err
    assert "sulfate: means of 3 levels" in answer.out
    assert "chloride: means of 3 levels" in answer.out
