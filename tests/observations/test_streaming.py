"""A long text, taken in stretches without keeping its rows, gives what reading row by row gives.

`ASSAYFOLIO_FUZZ_EXAMPLES=20000` makes a longer search of the tests that draw their texts.
"""

import csv
import gzip
import io
import os
from collections.abc import Callable, Sequence
from dataclasses import replace
from fractions import Fraction

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from assayfolio.errors import DataError
from assayfolio.exact import ExactSums
from assayfolio.observations.long_text import LongFile
from assayfolio.observations.reading import read_all_observations
from assayfolio.observations.streaming import kept_from_streaming, stream_observations
from assayfolio.observations.values import Observations
from assayfolio.statistics.oneway import one_way
from assayfolio.statistics.resolution import resolution
from assayfolio.study.plan import DataPlan, MeasurementFact

EXAMPLES = int(os.environ.get("ASSAYFOLIO_FUZZ_EXAMPLES", "150"))

LEVELS = ("lot 1", 'lot "2"', "lot, 3", "lot; 4", "µ-5")
SEPARATORS = (",", ";", "\t")

PLAN = DataPlan("d.csv", ("assay",), "lot")
SMALL_BLOCK = 48

numbers = st.one_of(
    st.decimals(-10_000, 10_000, places=2).map(str),
    st.integers(-(10**20), 10**20).map(str),
    st.from_regex(r"[+-]?[0-9]{1,20}\.[0-9]{0,18}\Z", fullmatch=True),
    st.from_regex(r"[+-]?[0-9]{0,6}\.[0-9]{1,6}[eE][+-]?[0-5]?[0-9]\Z", fullmatch=True),
    st.from_regex(r"[ \t]{0,2}-?[0-9]{1,4}\.[0-9]{2}[ \t]{0,2}\Z", fullmatch=True),
)


def streamed(
    content: bytes, plan: DataPlan = PLAN, facts: Sequence[MeasurementFact] = (), block: int = SMALL_BLOCK
) -> tuple[Observations, ...]:
    return stream_observations([LongFile(plan.file, lambda: io.BytesIO(content), block)], plan, facts)


Outcome = tuple[Observations, ...] | str


def outcome(read: Callable[[], tuple[Observations, ...]]) -> Outcome:
    """What comes of reading: the observations, or the whole refusal."""
    try:
        return read()
    except DataError as error:
        return f"{error} (hidden: {error.hidden})"


def agree(
    content: bytes, plan: DataPlan, facts: Sequence[MeasurementFact] = (), block: int = SMALL_BLOCK
) -> Outcome:
    """Both ways of reading come to the same observations, to the last digit, or to the same refusal."""
    by_rows = outcome(lambda: read_all_observations([(plan.file, content)], plan, facts))
    by_stretches = outcome(lambda: streamed(content, plan, facts, block))
    if isinstance(by_rows, str) or isinstance(by_stretches, str):
        assert by_stretches == by_rows
    else:
        for one, other in zip(by_rows, by_stretches, strict=True):
            assert_same(one, other)
    return by_stretches


def assert_same(by_rows: Observations, by_stretches: Observations) -> None:
    totals = by_stretches.totals
    assert totals is not None
    assert by_stretches.rows == ()
    assert by_stretches.levels == by_rows.levels
    assert by_stretches.files == by_rows.files
    assert by_stretches.flow == by_rows.flow
    assert by_stretches.extra_columns == by_rows.extra_columns
    assert (by_stretches.n, by_stretches.places) == (by_rows.n, by_rows.places)
    groups = [(level, by_rows.values_of(level)) for level in by_rows.levels]
    filled = [(level, values) for level, values in groups if values]
    assert [(level.level, level.sums) for level in totals.levels] == [
        (level, ExactSums.of(values)) for level, values in filled
    ]
    assert [(level.lowest, level.highest) for level in totals.levels] == [
        (min(value.fraction for value in values), max(value.fraction for value in values))
        for _, values in filled
    ]
    assert [sum(counts) for _, counts in totals.density.counts] == [len(values) for _, values in groups]
    if len(filled) > 1 and by_rows.n > len(filled):
        analysis = one_way([(level, ExactSums.of(values)) for level, values in filled])
        assert totals.step == resolution(filled, analysis).step


def written(
    rows: Sequence[Sequence[str]],
    separator: str = ",",
    line_end: str = "\n",
    quoting: int = csv.QUOTE_MINIMAL,
) -> str:
    sink = io.StringIO(newline="")
    # The literal types of the typeshed for `quoting` are wider than an int that was drawn.
    writer = csv.writer(sink, delimiter=separator, lineterminator=line_end, quoting=quoting)  # type: ignore[arg-type]
    writer.writerows(rows)
    return sink.getvalue()


@given(
    rows=st.lists(st.tuples(st.sampled_from(LEVELS), numbers), min_size=1, max_size=40),
    separator=st.sampled_from(SEPARATORS),
    commas=st.booleans(),
    line_end=st.sampled_from(["\n", "\r\n"]),
    mark=st.booleans(),
    quote_all=st.booleans(),
    note=st.text(st.characters(exclude_characters="\r\0", exclude_categories=["Cs"]), max_size=6),
    end=st.sampled_from(["", "\n", "\r\n \n\t\n"]),
    packed=st.booleans(),
)
@settings(max_examples=EXAMPLES, deadline=None)
def test_the_same_exact_sums_come_of_stretches_and_of_rows(
    rows: list[tuple[str, str]],
    separator: str,
    commas: bool,
    line_end: str,
    mark: bool,
    quote_all: bool,
    note: str,
    end: str,
    packed: bool,
) -> None:
    name = "d.csv.gz" if packed else "d.csv"
    plan = DataPlan(name, ("assay",), "lot", decimal_mark="comma" if commas else "point")
    quoting = csv.QUOTE_ALL if quote_all or (commas and separator == ",") else csv.QUOTE_MINIMAL
    table = [(note, level, text.replace(".", ",") if commas else text) for level, text in rows]
    text = written([("who, or what", "lot", "assay"), *table], separator, line_end, quoting)
    content = (text.rstrip("\r\n") + end).encode("utf-8-sig" if mark else "utf-8")
    agree(gzip.compress(content, mtime=0) if packed else content, plan)


ODDITIES = (
    *("", " ", "n/a", "NaN", "<0.05", "1,5", "1 000", "1e61", "1e", "--1", "0x10", "1.2.3", "9" * 39, "-999"),
    *('"', '""', 'a"b', '"a"b', '"x\ny"', "\n", "\n\n", " \n", ",", ",,", "'=A"),
    *("\x00", "\r", "\x1c", "\u2003", "\u00b5"),
)


@given(data=st.data())
@settings(max_examples=2 * EXAMPLES, deadline=None)
def test_whatever_is_wrong_with_a_text_is_told_in_the_same_words(data: st.DataObject) -> None:
    rows = data.draw(
        st.lists(
            st.tuples(st.sampled_from(["A", "B", "C", "'=D"]), numbers, st.sampled_from(["x", ""])),
            min_size=2,
            max_size=30,
        )
    )
    text = written([("lot", "assay", "note"), *rows])
    for _ in range(data.draw(st.integers(1, 4))):
        at = data.draw(st.integers(0, len(text)))
        text = text[:at] + data.draw(st.sampled_from(ODDITIES)) + text[at:]
    content = text.encode()
    if data.draw(st.integers(0, 9)) == 0:
        at = data.draw(st.integers(0, len(content)))
        content = content[:at] + b"\xb5" + content[at:]
    plan = DataPlan(
        "d.csv",
        ("assay",),
        "lot",
        levels=data.draw(st.sampled_from([None, ("A", "B", "C")])),
        replicates=data.draw(st.sampled_from([None, 3])),
        missing=data.draw(st.sampled_from(["refuse", "omit"])),
        missing_codes=data.draw(st.sampled_from([(), ("n/a", "-999")])),
    )
    facts = data.draw(st.sampled_from([(), (MeasurementFact("item", None, "note"),)]))
    agree(content, plan, facts, data.draw(st.sampled_from([16, 48, 1 << 20])))


def rows_of(levels: Sequence[str], count: int) -> list[tuple[str, str]]:
    return [(levels[at % len(levels)], f"{(at * 7919) % 1000 / 10:.1f}") for at in range(count)]


def content_of(rows: Sequence[Sequence[str]]) -> bytes:
    return written([("lot", "assay"), *rows]).encode()


def test_several_responses_stand_in_the_same_rows() -> None:
    rows = [(level, value, f"-{value}e2", "note") for level, value in rows_of("AB", 40)]
    content = written([("lot", "assay", "ash", "remark"), *rows]).encode()
    found = agree(content, DataPlan("d.csv", ("ash", "assay"), "lot"))
    assert [one.response for one in found if isinstance(one, Observations)] == ["ash", "assay"]


def test_rows_above_the_header_are_kept_in_the_record() -> None:
    content = b'instrument,7\n"operator, shift",2\n\n' + content_of(rows_of("AB", 40))
    (found,) = streamed(content, DataPlan("d.csv", ("assay",), "lot", header_row=4))
    assert found.files[0].metadata == (("instrument", "7"), ("operator, shift", "2"), ())
    agree(content, DataPlan("d.csv", ("assay",), "lot", header_row=4))


def test_several_files_are_summed_together() -> None:
    names, contents = ("a.csv", "b.csv"), (content_of(rows_of("AB", 30)), content_of(rows_of("BC", 20)))
    plan = DataPlan("a.csv", ("assay",), "lot", files=names)
    by_rows = read_all_observations(list(zip(names, contents, strict=True)), plan)
    by_stretches = stream_observations(
        [
            LongFile("a.csv", lambda: io.BytesIO(contents[0]), SMALL_BLOCK),
            LongFile("b.csv", lambda: io.BytesIO(contents[1]), SMALL_BLOCK),
        ],
        plan,
    )
    assert_same(by_rows[0], by_stretches[0])


@pytest.mark.parametrize("planned", [9, 10, 11])
def test_the_planned_number_of_rows_is_held_against_every_level(planned: int) -> None:
    plan = DataPlan("d.csv", ("assay",), "lot", replicates=planned)
    found = agree(content_of(rows_of(["A", "µ, B"], 20)), plan)
    assert isinstance(found, str) == (planned != 10)


@pytest.mark.parametrize("guard", ["'", ""])
def test_a_guard_is_taken_off_a_label_where_every_such_label_has_one(guard: str) -> None:
    found = agree(content_of(rows_of(["'=A", f"{guard}+B", "C"], 30)), PLAN)
    assert not isinstance(found, str)
    assert found[0].levels == (("=A", "+B", "C") if guard else ("'=A", "+B", "C"))


def test_a_comma_that_may_separate_is_refused() -> None:
    plan = DataPlan("d.csv", ("assay",), "lot", decimal_mark="comma")
    rows = "".join(f'{level},"{text.replace(".", ",")}"\n' for level, text in rows_of("AB", 20))
    sound = f"lot,assay\n{rows}".encode()
    assert not isinstance(agree(sound, plan), str)
    assert isinstance(agree(sound + b"A,15\n", plan), str)


def test_a_cell_on_several_lines_is_one_cell_wherever_a_stretch_ends() -> None:
    note = "first line\nsecond, line\n\nlast"
    rows = [(level, value, note) for level, value in rows_of("AB", 30)]
    agree(written([("lot", "assay", "note"), *rows], quoting=csv.QUOTE_ALL).encode(), PLAN)


FOUND_BY_SEARCH = (
    b'"x\ny"lot,assay,note\nA,0.00,x\nA,0.00,x\n',
    b'lot,assay,note\nA,0.00,"x\n"A,0.00,x\n',
    b"lot,assay,note\nA,1,x\nB,2,x\n\r",
    b"lot,assay,note\nA,1,x\nB,2,x\n\r\n \r \n\n\n",
    b'lot,assay,note\nC,1,2\nA,0.00,"x\n"A,0.00,x\nB,1,2\n',
)


@pytest.mark.parametrize("block", [7, 16, 48, 1 << 20])
@pytest.mark.parametrize("content", FOUND_BY_SEARCH)
def test_texts_that_were_once_taken_differently_by_stretches_are_refused_alike(
    content: bytes, block: int
) -> None:
    assert isinstance(agree(content, PLAN, (), block), str)


@pytest.mark.parametrize("block", [7, 48, 1 << 20])
def test_a_quotation_mark_that_is_never_closed_spoils_its_own_row_alone(block: int) -> None:
    before, after = content_of(rows_of("AB", 40)), b"".join(b"A,%d.5\n" % at for at in range(3000))
    found = agree(before + b'A,"1.5\n' + after, PLAN, (), block)
    assert isinstance(found, str)
    assert found.startswith("d.csv cannot be used: 1 fault\n  d.csv:42:3: the quotation mark")


@pytest.mark.parametrize("spoilt", ["cut", "more behind", "damaged", "bomb", "no gzip"])
def test_a_compressed_text_that_is_not_whole_is_refused(spoilt: str) -> None:
    packed = gzip.compress(content_of(rows_of("AB", 2000)), mtime=0)
    content = {
        "cut": packed[:-20],
        "more behind": packed + b"x",
        "damaged": packed[:200] + bytes([packed[200] ^ 255]) + packed[201:],
        "bomb": gzip.compress(b"lot,assay\n" + b"A,1.00                \n" * 800_000, mtime=0),
        "no gzip": content_of(rows_of("AB", 20)),
    }[spoilt]
    block = 1 << 20 if spoilt == "bomb" else SMALL_BLOCK  # 16 MB are read before it is known as one
    assert isinstance(agree(content, DataPlan("d.csv.gz", ("assay",), "lot"), (), block), str)


def test_a_file_that_changes_while_it_is_read_is_refused() -> None:
    contents = iter(
        [content_of(rows_of("AB", 20)), content_of(rows_of("AB", 21)), content_of(rows_of("AB", 22))]
    )
    file = LongFile("d.csv", lambda: io.BytesIO(next(contents)), sha256="0" * 64)
    with pytest.raises(DataError, match="changed while it was read"):
        stream_observations([file], PLAN)


def test_reading_stops_after_a_thousand_faults() -> None:
    content = content_of([("A", "n/a")] * 30_000)
    with pytest.raises(DataError) as refused:
        streamed(content, PLAN, block=1 << 16)
    assert refused.value.headline == "d.csv cannot be used: 1000 faults or more"
    assert "the same 999 times more" in refused.value.faults[0].found


def test_more_than_five_thousand_levels_are_refused_at_the_first_too_many() -> None:
    content = written([("assay", "lot"), *[("1.0", f"L{at}") for at in range(5_001)]]).encode()
    words = agree(content, PLAN, (), 1 << 16)
    assert isinstance(words, str)
    assert "d.csv:5002:5: column `lot` holds more than 5,000 levels" in words


@pytest.mark.parametrize(
    ("change", "key"),
    [
        ({"layout": "wide"}, "layout: wide"),
        ({"encoding": "utf-16"}, "encoding: utf-16"),
        ({"order": "no"}, "order"),
        ({"unit_column": "unit"}, "unit-column"),
        ({"replicate_unit": "vial"}, "replicate-unit"),
        ({"exclusions": "x.yaml"}, "exclusions"),
        ({"below_limit": "omit"}, "below-limit: omit"),
        ({"above_limit": "limit"}, "above-limit: limit"),
    ],
)
def test_a_plan_that_needs_the_single_rows_is_named(change: dict[str, str], key: str) -> None:
    assert kept_from_streaming(PLAN) is None
    assert kept_from_streaming(replace(PLAN, **change)) == key  # type: ignore[arg-type]  # drawn from a table


def test_the_classes_of_a_histogram_hold_the_values_between_their_edges() -> None:
    rows = rows_of("AB", 500)
    (found,) = streamed(content_of(rows))
    assert found.totals is not None
    density = found.totals.density
    for level, counts in density.counts:
        values = [Fraction(text) for own, text in rows if own == level]
        edges = zip(density.edges, density.edges[1:], strict=False)
        assert counts == tuple(sum(low <= value < high for value in values) for low, high in edges)
