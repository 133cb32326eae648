"""From received to analysed: the counts of every level add up, whatever the data and the policies."""

from dataclasses import replace
from fractions import Fraction

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from assayfolio.errors import MachineError
from assayfolio.exact import Decimal10
from assayfolio.observations.flow import count_flow
from assayfolio.observations.values import CountFlow, Observation, Observations, SetAside
from assayfolio.study.plan import DataPlan
from support.received import excluded, read, study_with

ROW = Observation(2, "a", Decimal10(1, 0), "1")


def test_a_study_with_everything_adds_up():
    lines = [
        "lot,content,sample",
        *("a,1.0,s1", "a,1.2,s1", "a,<0.5,s2", "a,,s2", "a,>9,s3", "a,1.4,s4"),
        *("b,2.0,t1", "b,2.2,t2", "b,lost,t3"),
    ]
    more = "replicate-unit: sample, missing: omit, below-limit: omit, above-limit: omit"
    (found,) = read(study_with(more), lines, excluded((7, "1.4"), (10, "lost")))
    assert found.flow == (
        CountFlow("a", received=6, missing=1, below_limit=1, above_limit=1, excluded=1, merged=1, analysed=1),
        CountFlow("b", received=3, missing=0, below_limit=0, above_limit=0, excluded=1, merged=0, analysed=2),
    )


class TestTheCheck:
    """A value that was lost or made on the way is an internal fault, never silent."""

    @pytest.mark.requirement("REPORT-6")
    @pytest.mark.parametrize("received", [0, 2])
    def test_counts_that_do_not_add_up_stop_the_run(self, received):
        with pytest.raises(MachineError, match="the counts of level 'a' do not add up"):
            count_flow([("a", received)], (), (ROW,))

    def test_a_value_that_is_both_analysed_and_set_aside_stops_the_run(self):
        aside = SetAside(0, 2, "a", "1", "excluded", Decimal10(1, 0))
        with pytest.raises(MachineError, match="do not add up"):
            count_flow([("a", 1)], (aside,), (ROW,))

    def test_a_value_of_a_level_that_was_not_received_stops_the_run(self):
        with pytest.raises(MachineError, match="levels that were not received: b"):
            count_flow([("a", 1)], (), (ROW, replace(ROW, level="b")))


cells = st.sampled_from(["1.0", "2.50", "0.031", "<0.05", "<0.2", ">20", "", "n.d.", "ND", "lost"])
rows = st.tuples(st.sampled_from("ab"), cells, st.sampled_from("pqr"))


def plans() -> st.SearchStrategy[DataPlan]:
    return st.builds(
        DataPlan,
        st.just("values.csv"),
        st.just(("content",)),
        st.just("lot"),
        missing=st.just("omit"),
        missing_codes=st.just(("n.d.",)),
        below_limit=st.sampled_from(["omit", "half-limit", "limit"]),
        limit_codes=st.just((("ND", Fraction(1, 10)),)),
        above_limit=st.sampled_from(["omit", "limit"]),
        replicate_unit=st.sampled_from([None, "sample"]),
    )


def everywhere(found: Observations) -> list[tuple[int, str]]:
    """Line and text of every value, wherever it went."""
    singles = [one for row in found.rows for one in (row.repeats or (row,))]
    return sorted(
        [(row.line, row.text) for row in singles] + [(one.line, one.text) for one in found.set_aside]
    )


@settings(max_examples=200)
@given(plans(), st.lists(rows, min_size=1, max_size=14), st.data())
def test_every_received_value_is_in_exactly_one_place(plan, received, data):
    lines = ["lot,content,sample", *(f"{level},{text},{level}{unit}" for level, text, unit in received)]
    named = [(at, text) for at, (_, text, _) in enumerate(received, start=2) if text]
    must_go = [(line, text) for line, text in named if text == "lost"]
    may_go = [one for one in named if one not in must_go]
    chosen = data.draw(st.lists(st.sampled_from(may_go), unique=True) if may_go else st.just([]))
    (found,) = read(replace(study_with(), data=plan), lines, excluded(*must_go, *chosen))
    assert everywhere(found) == [(at, text) for at, (_, text, _) in enumerate(received, start=2)]
    for counts in found.flow:
        left_out = counts.missing + counts.below_limit + counts.above_limit + counts.excluded
        assert counts.received == sum(level == counts.level for level, _, _ in received)
        assert counts.received - left_out - counts.merged == counts.analysed
        assert counts.analysed == sum(row.level == counts.level for row in found.rows)
    assert sum(counts.excluded for counts in found.flow) == len(must_go) + len(chosen)


@settings(max_examples=100)
@given(plans(), st.lists(rows.filter(lambda row: row[1] != "lost"), min_size=1, max_size=14), st.data())
def test_with_nothing_excluded_is_what_the_same_data_give_without_exclusions(plan, received, data):
    lines = ["lot,content,sample", *(f"{level},{text},{level}{unit}" for level, text, unit in received)]
    named = [(at, text) for at, (_, text, _) in enumerate(received, start=2) if text]
    chosen = data.draw(st.lists(st.sampled_from(named), unique=True) if named else st.just([]))
    study = replace(study_with(), data=plan)
    (found,), (plain,) = read(study, lines, excluded(*chosen)), read(study, lines)
    assert found.with_excluded == plain.rows
