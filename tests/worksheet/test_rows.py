"""The planned order: what it holds, what it depends on, and when none can be drawn."""

import hashlib
import json
from collections import Counter

import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.errors import StudyError
from assayfolio.worksheet.order import shuffled, words
from assayfolio.worksheet.rows import MOST_ROWS, check_worksheet, order_digest, planned_rows
from worksheet.studies import BLOCKED, PLAIN, study_of

SEEDS = st.integers(0, 2**53 - 1)


def test_the_order_of_a_study_is_fixed_for_good():
    rows = planned_rows(study_of())
    by_level = [(level, replicate) for level in ("north", "south", "tower") for replicate in range(1, 5)]
    fixed = [by_level[at] for at in [7, 6, 0, 11, 2, 5, 4, 1, 3, 10, 8, 9]]
    assert [(row.level, row.replicate) for row in rows] == fixed
    listed = [[row.position, None, row.level, row.replicate, row.item] for row in rows]
    stated = {"algorithm": "assayfolio-order/1", "rows": listed, "seed": "20261201", "study": "WHP-204"}
    digest = hashlib.sha256(json.dumps(stated, separators=(",", ":")).encode()).hexdigest()
    assert order_digest(study_of(), rows) == digest
    assert digest == "c327830730c831ab3fd58d01d0c3568f59675dbccfca93ee634a765abc7126bf"


def test_only_study_seed_and_what_is_measured_decide_the_order():
    rows = planned_rows(study_of())
    assert planned_rows(study_of(PLAIN.replace("Moisture of", "Water in"))) == rows
    assert planned_rows(study_of(PLAIN.replace("alpha: 0.05", "alpha: 0.01"))) == rows
    for old, new in (("WHP-204", "WHP-205"), ("20261201", "20261202"), ("tower", "spray")):
        assert [(row.level, row.replicate) for row in planned_rows(study_of(PLAIN.replace(old, new)))] != [
            (row.level, row.replicate) for row in rows
        ]


@given(seed=SEEDS, counts=st.tuples(st.integers(1, 9), st.integers(1, 9), st.integers(1, 9)))
def test_every_level_is_measured_as_often_as_planned(seed, counts):
    north, south, tower = counts
    text = PLAIN.replace("20261201", str(seed)).replace(
        "replicates: 4", f"replicates: {{north: {north}, south: {south}, tower: {tower}}}"
    )
    rows = planned_rows(study_of(text))
    assert [row.position for row in rows] == list(range(1, sum(counts) + 1))
    assert Counter(row.level for row in rows) == {"north": north, "south": south, "tower": tower}
    for level, count in zip(("north", "south", "tower"), counts, strict=True):
        assert sorted(row.replicate for row in rows if row.level == level) == list(range(1, count + 1))


@given(seed=SEEDS, blocks=st.sampled_from([["am", "pm"], ["mon", "tue", "wed"], list("abcdef")]))
def test_every_block_has_an_equal_share_of_every_level_in_the_order_of_the_plan(seed, blocks):
    text = BLOCKED.replace("20261201", str(seed)).replace("[monday, tuesday]", f"[{', '.join(blocks)}]")
    text = text.replace("replicates: 4", "replicates: {north: 6, south: 12, tower: 6}")
    rows = planned_rows(study_of(text))
    assert [row.block for row in rows] == sorted((row.block for row in rows), key=blocks.index)
    for block in blocks:
        share = Counter(row.level for row in rows if row.block == block)
        assert share == {"north": 6 // len(blocks), "south": 12 // len(blocks), "tower": 6 // len(blocks)}


def test_blocks_are_shuffled_one_after_the_other_from_one_stream():
    stream = words("WHP-204", 20261201)
    levels = ("north", "south", "tower")
    expected = [
        placed
        for replicates in ((1, 2), (3, 4))
        for placed in shuffled([(level, each) for level in levels for each in replicates], stream)
    ]
    assert [(row.level, row.replicate) for row in planned_rows(study_of(BLOCKED))] == expected


def test_labels_are_unique_and_follow_the_position_alone():
    rows = planned_rows(study_of())
    assert [row.item for row in rows] == [f"WP-{position:02d}" for position in range(1, 13)]
    with_sign = planned_rows(study_of(PLAIN.replace("item: WP", 'item: "WP/"')))
    assert with_sign[0].item == "WP/01"
    assert {row.item for row in planned_rows(study_of(PLAIN.replace(", item: WP", "")))} == {None}


def test_the_digest_changes_with_the_order_and_with_where_it_came_from():
    texts = [
        PLAIN,
        BLOCKED,
        PLAIN.replace("WHP-204", "W"),
        PLAIN.replace("1201", "1202"),
        PLAIN.replace("WP", "X"),
    ]
    digests = {order_digest(study, planned_rows(study)) for study in map(study_of, texts)}
    assert len(digests) == len(texts)


def test_a_study_without_a_worksheet_is_told_everything_that_is_missing():
    text = PLAIN.replace("worksheet: {seed: 20261201, item: WP}\n", "")
    text = text.replace("  levels: [north, south, tower]\n", "").replace("  replicates: 4\n", "")
    with pytest.raises(StudyError) as refused:
        check_worksheet(study_of(text))
    told = str(refused.value)
    assert all(f"`{key}` is missing" in told for key in ("worksheet", "data.levels", "data.replicates"))
    assert {fault.place.file for fault in refused.value.faults} == {"study.yaml"}


def test_a_sheet_that_nobody_could_fill_in_is_refused():
    with pytest.raises(StudyError, match=f"more than the {MOST_ROWS:,}"):
        planned_rows(study_of(PLAIN.replace("replicates: 4", "replicates: 5000")))
