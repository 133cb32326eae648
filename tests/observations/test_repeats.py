"""Repeats of one replicate are averaged exactly, as planned, and are not replicates."""

from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.errors import DataError
from assayfolio.exact import Decimal10
from assayfolio.observations.repeats import averaged
from assayfolio.observations.values import Observation
from support.received import excluded, read, read_one, study_with

UNIT = "replicate-unit: sample"
LINES = [
    "lot,content,sample,note",
    "a,0.1,s1,x",
    "a,0.1,s1,x",
    "b,0.5,s3,",
    "a,0.2,s1,x",
    "a,0.3,s2,x",
    "a,0.4,s2,y",
    "b,0.6,s4,",
]


def faults_of(more: str, lines: list[str]) -> list[str]:
    with pytest.raises(DataError) as caught:
        read(study_with(more), lines)
    return [str(fault) for fault in caught.value.faults]


def test_repeats_become_one_value_in_the_order_of_first_appearance():
    found = read_one(UNIT, LINES)
    assert [(row.line, row.level, row.value.fraction, row.kind) for row in found.rows] == [
        (2, "a", Fraction(4, 30), "mean of repeats"),
        (4, "b", Fraction(1, 2), "measured"),
        (6, "a", Fraction(7, 20), "mean of repeats"),
        (8, "b", Fraction(3, 5), "measured"),
    ]


def test_the_mean_shows_what_it_is_the_mean_of():
    mean = read_one(UNIT, LINES).rows[0]
    assert mean.text == "0.1; 0.1; 0.2"
    assert [(row.line, row.text, row.value) for row in mean.repeats] == [
        (2, "0.1", Decimal10(1, -1)),
        (3, "0.1", Decimal10(1, -1)),
        (5, "0.2", Decimal10(2, -1)),
    ]
    assert mean.value.places == 1


def test_the_mean_carries_what_all_its_repeats_share():
    first, _, second, _ = read_one(UNIT, LINES).rows
    assert (first.extras, second.extras) == (("s1", "x"), ("s2", ""))


def test_the_mean_stands_at_the_earliest_place_of_the_measuring_order():
    lines = ["lot,content,sample,at", "a,1,s1,7", "a,2,s1,3", "b,3,s2,5", "b,4,s3,6"]
    assert [row.order for row in read_one(f"{UNIT}, order: at", lines).rows] == [3, 5, 6]


def test_planned_replicates_are_counted_and_not_repeats():
    found = read_one(f"{UNIT}, replicates: 2", LINES)
    assert [counts.analysed for counts in found.flow] == [2, 2]
    (a, b) = faults_of(f"{UNIT}, replicates: 3", LINES)
    assert "level `a`: found 2 replicates, planned 3" in a
    assert "level `b`: found 2 replicates, planned 3" in b


def test_one_replicate_under_two_levels_is_refused():
    lines = ["lot,content,sample", "a,1,s1", "a,2,s2", "b,3,s1", "b,4,s3"]
    (fault,) = faults_of(UNIT, lines)
    assert fault.startswith("values.csv:4:5: column `sample` holds `s1` under level `b`")
    assert "line 2 has it under `a`" in fault


def test_a_blank_replicate_is_refused_and_numbers_of_replicates_are_not_told_then():
    lines = ["lot,content,sample", "a,1,s1", "a,2,", "b,3,s3", "b,4,s4"]
    (fault,) = faults_of(f"{UNIT}, replicates: 2", lines)
    assert fault.startswith("values.csv:3:5: column `sample` is blank")


class TestSomeRepeatsLost:
    LINES = ("lot,content,sample", "a,1.0,s1", "a,,s1", "a,<0.4,s1", "a,3.0,s2", "b,4,s3", "b,5,s4", "b,,s5")

    def test_a_missing_repeat_is_left_out_of_the_mean_and_set_aside(self):
        found = read_one(f"{UNIT}, missing: omit, below-limit: limit", list(self.LINES))
        assert found.rows[0].text == "1.0; <0.4"
        assert found.rows[0].value.fraction == Fraction(7, 10)
        assert [(one.line, one.cause) for one in found.set_aside] == [(3, "missing"), (8, "missing")]

    def test_a_replaced_repeat_enters_the_mean_as_replaced(self):
        found = read_one(f"{UNIT}, missing: omit, below-limit: half-limit", list(self.LINES))
        assert found.rows[0].value.fraction == Fraction(6, 10)
        assert [row.kind for row in found.rows[0].repeats] == ["measured", "below limit"]

    def test_a_replicate_with_one_value_left_is_that_value(self):
        found = read_one(f"{UNIT}, missing: omit, below-limit: omit", list(self.LINES))
        assert (found.rows[0].kind, found.rows[0].text, found.rows[0].repeats) == ("measured", "1.0", ())

    def test_a_replicate_with_no_value_left_is_gone(self):
        found = read_one(f"{UNIT}, missing: omit, below-limit: omit", list(self.LINES))
        assert [row.line for row in found.rows if row.level == "b"] == [6, 7]

    def test_an_excluded_repeat_leaves_the_mean_and_stays_in_the_analysis_without_exclusions(self):
        more = f"{UNIT}, missing: omit, below-limit: limit"
        found = read_one(more, list(self.LINES), excluded((4, "<0.4")))
        assert found.rows[0].value.fraction == 1
        assert found.with_excluded[0].value.fraction == Fraction(7, 10)


values = st.builds(Decimal10, st.integers(-(10**9), 10**9), st.integers(-6, 3))


@given(st.lists(st.tuples(st.sampled_from("pqrs"), values), min_size=1, max_size=12))
def test_the_sum_of_the_means_by_their_sizes_is_the_sum_of_the_values(pairs):
    rows = [Observation(at, "a", value, str(at)) for at, (_, value) in enumerate(pairs, start=2)]
    means = averaged(rows, [unit for unit, _ in pairs])
    assert len(means) == len({unit for unit, _ in pairs})
    total = sum((mean.value.fraction * max(1, len(mean.repeats)) for mean in means), Fraction(0))
    assert total == sum((value.fraction for _, value in pairs), Fraction(0))
    assert sorted(row.line for mean in means for row in (mean.repeats or (mean,))) == list(
        range(2, len(pairs) + 2)
    )
    assert [mean.line for mean in means] == sorted(mean.line for mean in means)
