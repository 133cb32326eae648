"""A long text, taken in stretches without keeping its rows, gives what reading row by row gives."""

import csv
import gzip
import io
from collections.abc import Sequence

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


def refusal_by_rows(content: bytes, plan: DataPlan, facts: Sequence[MeasurementFact] = ()) -> DataError:
    with pytest.raises(DataError) as refused:
        read_all_observations([(plan.file, content)], plan, facts)
    return refused.value


def refusal_by_stretches(content: bytes, plan: DataPlan, facts: Sequence[MeasurementFact] = ()) -> DataError:
    with pytest.raises(DataError) as refused:
        streamed(content, plan, facts)
    return refused.value


def agree(content: bytes, plan: DataPlan, facts: Sequence[MeasurementFact] = (), block: int = SMALL_BLOCK) -> None:
    """Both ways of reading come to the same observations, to the last digit, or to the same refusal."""
    try:
        by_rows = read_all_observations([(plan.file, content)], plan, facts)
    except DataError as error:
        refused = refusal_by_stretches(content, plan, facts)
        assert (str(refused), refused.hidden) == (str(error), error.hidden)
        return
    for one, other in zip(by_rows, streamed(content, plan, facts, block), strict=True):
        assert_same(one, other)


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
    rows: Sequence[Sequence[str]], separator: str = ",", line_end: str = "\n", quoting: int = csv.QUOTE_MINIMAL
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
@settings(max_examples=300, deadline=None)
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
    "", " ", "n/a", "NaN", "<0.05", "1,5", "1 000", "1e61", "1e", "--1", "0x10", "1.2.3", "9" * 39, '"', '""',
    'a"b', '"a"b', "-999", "\n", "\n\n", " \n", ",", ",,", "\x00", "\r", "\x1c", "\u2003", "'=A", "\u00b5", '"x\ny"',
)  # fmt: skip


@given(data=st.data())
@settings(max_examples=600, deadline=None)
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
