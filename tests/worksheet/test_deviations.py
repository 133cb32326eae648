"""What was measured, against the worksheet: every departure is named, and nothing else."""

from dataclasses import replace

from hypothesis import given
from hypothesis import strategies as st

from assayfolio.observations.values import SetAside
from assayfolio.worksheet.deviations import study_deviations, worksheet_deviations
from assayfolio.worksheet.rows import planned_rows
from worksheet.studies import BLOCKED, PLAIN, data_of, seen, study_of

STUDY = study_of(BLOCKED)
ROWS = planned_rows(STUDY)
UNLABELLED = study_of(PLAIN.replace(", item: WP", ""))
UNLABELLED_ROWS = planned_rows(UNLABELLED)
FIRST, OTHER = next((a, b) for a in ROWS for b in ROWS[a.position :] if a.level != b.level)


def found(rows, study=STUDY, planned=ROWS, **data):
    return [
        (deviation.what, deviation.detail)
        for deviation in worksheet_deviations(study, planned, data_of(rows, **data))
    ]


def as_planned(planned=ROWS):
    return {row.position: seen(row) for row in planned}


def test_a_worksheet_that_was_kept_has_no_deviation():
    assert found(as_planned().values()) == []
    assert study_deviations(STUDY, data_of(list(as_planned().values()))) == ()


def test_a_study_without_a_worksheet_has_none_either():
    study = replace(STUDY, worksheet=None)
    assert study_deviations(study, data_of([])) == ()


@given(st.permutations(list(as_planned().values())))
def test_the_order_of_the_lines_in_the_file_is_no_matter(rows):
    assert found(rows) == []


def test_two_rows_measured_in_each_others_place_are_named_with_their_lines():
    rows = as_planned()
    one, other = rows[FIRST.position], rows[OTHER.position]
    rows[FIRST.position] = replace(one, order=other.order)
    rows[OTHER.position] = replace(other, order=one.order)
    (deviation,) = worksheet_deviations(STUDY, ROWS, data_of(list(rows.values())))
    assert deviation.what == "rows exchanged"
    assert deviation.detail == (
        f"positions {FIRST.position} and {OTHER.position}: "
        f"{FIRST.level} ({FIRST.item}) and {OTHER.level} ({OTHER.item}) exchanged"
    )
    assert deviation.lines == (other.line, one.line)


def test_exchanged_levels_are_named_where_no_labels_are_recorded():
    rows = as_planned(UNLABELLED_ROWS)
    one, other = next(
        (a, b) for a in rows.values() for b in rows.values() if (a.level, b.level) == ("north", "tower")
    )
    rows[one.order], rows[other.order] = replace(one, level="tower"), replace(other, level="north")
    first, second = sorted((one, other), key=lambda row: row.order)
    assert found(rows.values(), UNLABELLED, UNLABELLED_ROWS) == [
        (
            "rows exchanged",
            f"positions {first.order} and {second.order}: {first.level} and {second.level} exchanged",
        )
    ]


def test_levels_exchanged_under_their_labels_are_told_apart_from_rows_exchanged():
    rows = as_planned()
    rows[FIRST.position] = seen(FIRST, level=OTHER.level)
    rows[OTHER.position] = seen(OTHER, level=FIRST.level)
    ((what, detail),) = found(rows.values())
    assert what == "rows exchanged"
    assert detail.endswith(f"{FIRST.level} and {OTHER.level} exchanged, the labels as planned")


def test_exchanged_labels_of_one_level_are_named():
    one, other = [row for row in ROWS if row.level == "south"][:2]
    rows = as_planned()
    rows[one.position] = seen(one, extras=(other.item, one.block))
    rows[other.position] = seen(other, extras=(one.item, other.block))
    ((what, detail),) = found(rows.values())
    assert what == "rows exchanged"
    assert detail.startswith(f"positions {one.position} and {other.position}: ")
    assert detail.endswith(f" {one.item} and {other.item} exchanged, both of south")


def test_three_rows_in_a_circle_are_told_one_by_one():
    one, two, three = (
        next(row for row in ROWS if row.level == level) for level in ("north", "south", "tower")
    )
    rows = as_planned()
    for place, measured in ((one, two), (two, three), (three, one)):
        rows[place.position] = seen(place, level=measured.level, extras=(measured.item, place.block))
    deviations = found(rows.values())
    assert {what for what, _ in deviations} == {"another level"}
    assert (
        "another level",
        f"position {one.position}: south ({two.item}), where north ({one.item}) was planned",
    ) in deviations
    assert len(deviations) == 3


def test_a_label_that_is_not_the_planned_one_is_named():
    rows = as_planned()
    rows[FIRST.position] = seen(FIRST, extras=("WP-99", FIRST.block))
    ((what, detail),) = found(rows.values())
    assert what == "another label"
    assert detail == (
        f"position {FIRST.position}: the label WP-99, where {FIRST.item} was planned, both of {FIRST.level}"
    )
    rows[FIRST.position] = seen(FIRST, extras=("", FIRST.block))
    ((_, detail),) = found(rows.values())
    assert "no label" in detail


def test_a_missing_row_is_named_and_its_level_is_short_of_a_value():
    rows = as_planned()
    del rows[FIRST.position]
    assert found(rows.values()) == [
        ("missing row", f"position {FIRST.position}: no row for {FIRST.level} ({FIRST.item})"),
        ("number of values", f"{FIRST.level}: 4 values planned, 3 received"),
    ]


def test_a_row_beyond_the_worksheet_is_named():
    extra = seen(ROWS[0], line=50, order=13, level="tower", extras=("WP-13", "tuesday"))
    assert found([*as_planned().values(), extra]) == [
        ("additional row", "position 13: tower (WP-13), a row beyond the worksheet"),
        ("number of values", "tower: 4 values planned, 5 received"),
    ]


def test_a_position_that_stands_twice_is_filled_once():
    again = seen(FIRST, line=50)
    assert [what for what, _ in found([*as_planned().values(), again])] == [
        "additional row",
        "number of values",
    ]


def test_a_row_that_was_received_without_a_value_is_not_missing():
    rows = as_planned()
    line = rows.pop(FIRST.position).line
    aside = SetAside(0, line, FIRST.level, "", "missing")
    assert found(rows.values(), set_aside=[aside]) == []


def test_an_excluded_row_was_measured_all_the_same():
    rows = list(as_planned().values())
    observed = data_of(rows)[0]
    assert worksheet_deviations(STUDY, ROWS, (replace(observed, rows=tuple(rows[1:])),)) == ()


def test_a_row_with_one_response_missing_is_a_row():
    rows = list(as_planned().values())
    whole = data_of(rows)[0]
    short = replace(whole, response="ash", rows=tuple(rows[1:]), with_excluded=tuple(rows[1:]))
    assert worksheet_deviations(STUDY, ROWS, (short, whole)) == ()


def test_rows_of_another_block_are_told_together():
    rows = as_planned()
    for row in (ROWS[0], ROWS[1], ROWS[2], ROWS[4]):
        rows[row.position] = seen(row, extras=(row.item, "friday"))
    assert found(rows.values()) == [
        ("another block", "recorded in another block than the planned one: positions 1 to 3, 5")
    ]


def test_what_the_data_do_not_record_is_said_to_be_incomparable():
    bare = [seen(row, extras=()) for row in ROWS]
    told = found(bare, columns=())
    assert [what for what, _ in told] == ["not comparable", "not comparable"]
    assert "no column item" in told[0][1]
    assert "no column day" in told[1][1]


def test_without_a_column_of_the_order_only_numbers_are_compared():
    study = study_of(PLAIN.replace("  order: position\n", ""))
    rows = [seen(row, order=None) for row in planned_rows(study)][:-1]
    told = found(rows, study, planned_rows(study))
    assert [what for what, _ in told] == ["not comparable", "number of values"]
    assert "no column position" in told[0][1]


def test_an_order_that_the_study_does_not_name_is_read_from_the_column_of_the_sheet():
    study = study_of(PLAIN.replace("  order: position\n", ""))
    planned = planned_rows(study)
    rows = [seen(row, order=None, extras=(row.item, str(row.position))) for row in planned]
    assert found(rows, study, planned, columns=("item", "position")) == []
    rows[0] = replace(rows[0], extras=("WP-01", "first"))
    told = found(rows, study, planned, columns=("item", "position"))
    assert [what for what, _ in told] == ["not comparable"]
    assert "no whole number" in told[0][1]


def test_guarded_labels_of_a_text_file_are_the_planned_ones():
    study = study_of(PLAIN.replace("item: WP", 'item: "-W"'))
    planned = planned_rows(study)
    rows = [seen(row, extras=(f"'{row.item}",)) for row in planned]
    assert found(rows, study, planned, columns=("item",)) == []


def repeats_of(row, orders):
    repeats = tuple(seen(row, line=100 + order, order=order) for order in orders)
    return replace(repeats[0], order=min(orders), repeats=repeats)


def test_repeats_are_one_row_and_compared_in_the_order_of_their_first():
    study = study_of(PLAIN.replace("order: position", "order: position\n  replicate-unit: item"))
    planned = planned_rows(study)
    rows = [repeats_of(row, (3 * row.position, 3 * row.position + 1)) for row in planned]
    assert found(rows, study, planned) == []
    short = found(rows[:4] + rows[5:], study, planned)
    assert [what for what, _ in short] == ["missing row", "number of values"]
    assert planned[4].item in short[0][1]
    rows[0], rows[1] = repeats_of(planned[0], (6, 7)), repeats_of(planned[1], (3, 4))
    ((what, detail),) = found(rows, study, planned)
    assert what == "rows exchanged"
    assert detail.startswith("positions 1 and 2: ")


def test_with_several_files_the_words_say_which():
    rows = as_planned()
    rows[FIRST.position] = seen(FIRST, extras=("WP-99", FIRST.block), file=1)
    ((_, detail),) = found(rows.values(), files=("run-1.csv", "run-2.csv"))
    assert detail.endswith(f"(run-2.csv line {FIRST.position + 1})")


@given(st.permutations(range(12)))
def test_every_row_out_of_its_place_is_named_once(places):
    rows = [replace(seen(row), order=places[at] + 1) for at, row in enumerate(ROWS)]
    moved = {row.order for at, row in enumerate(rows) if places[at] != at}
    deviations = [
        one for one in worksheet_deviations(STUDY, ROWS, data_of(rows)) if one.what != "another block"
    ]
    lines = [line for deviation in deviations for line in deviation.lines]
    assert sorted(lines) == sorted(row.line for row in rows if row.order in moved)
