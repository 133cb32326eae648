"""The command that says what a plan can show, before there are data."""

import json

import pytest

from support.workspaces import STUDY, Bench, command

PLAN = "levels: [gravimetric, turbidimetric, chromatographic]"
PLANNED = STUDY.replace(PLAN, PLAN + "\n  replicates: 6") + (
    "power: {difference: 0.8, sigma: 0.4, target: 0.9}\n"
)


@pytest.fixture
def bench(tmp_path):
    bench = Bench(tmp_path / "w")
    bench.study.write_text(PLANNED, "utf-8")
    return bench


def test_the_table_names_every_test_and_the_figure_stands_beside_the_study(bench):
    answer = command("power", str(bench.study))
    assert answer.code == 0, answer.err
    figure = bench.study.with_name(f"{bench.study.stem}-power.svg")
    assert figure.read_bytes().startswith(b"<svg ")
    assert str(figure) in answer.out
    assert "all pairs of methods (Tukey-Kramer)" in answer.out
    assert "overall: do the means differ? (F test)" in answer.out


def test_power_needs_no_data_and_leaves_no_trace_but_its_figure(bench):
    (bench.study.parent / "data/values.csv").unlink()
    before = {path for path in bench.root.rglob("*") if path.is_file()}
    assert command("power", str(bench.study)).code == 0
    after = {path for path in bench.root.rglob("*") if path.is_file()}
    assert {path.name for path in after - before} == {f"{bench.study.stem}-power.svg"}


def test_the_figure_goes_where_it_is_asked_for_with_the_same_bytes_each_time(bench, tmp_path):
    first, second = tmp_path / "a.svg", tmp_path / "b.svg"
    for path in (first, second):
        assert command("power", str(bench.study), "--figure", str(path)).code == 0
    assert first.read_bytes() == second.read_bytes()


def test_programs_get_the_same_figures_as_people(bench):
    document = json.loads(command("power", str(bench.study), "--json").out)
    planned = document["planned_power"]
    assert planned["replicates"] == [6, 6, 6]
    assert all(0 < row["power"] <= 1 for row in planned["rows"])
    table = command("power", str(bench.study)).out
    assert f"{planned['rows'][0]['power']:.4f}" in table


def test_a_plan_that_lacks_what_power_needs_is_refused_with_every_place(bench):
    bench.study.write_text(STUDY, "utf-8")
    answer = command("power", str(bench.study))
    assert answer.code == 2
    assert "`power` is missing" in answer.err
    assert "`data.replicates` is missing" in answer.err
    assert not bench.study.with_name(f"{bench.study.stem}-power.svg").exists()


def test_a_figure_that_cannot_be_written_ends_with_3_and_says_where(bench, tmp_path):
    answer = command("power", str(bench.study), "--figure", str(tmp_path / "nowhere/p.svg"))
    assert answer.code == 3
    assert "nowhere/p.svg" in answer.err
