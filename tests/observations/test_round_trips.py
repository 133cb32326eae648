"""Whatever decimals a laboratory writes, in whichever form of CSV, the same exact numbers are read."""

import csv
import io
from fractions import Fraction

import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from assayfolio.errors import DataError
from assayfolio.exact import MAX_DIGITS, MAX_EXPONENT, Decimal10, ExactSums
from assayfolio.observations.reading import read_observations
from assayfolio.observations.values import Observations
from assayfolio.study.plan import DataPlan

Typed = tuple[str, Decimal10]

LEVELS = ("lot 1", 'lot "2"', "lot, 3", "lot; 4", "\u00b5-5")
SEPARATORS = {",": "comma", ";": "semicolon", "\t": "tab"}


@st.composite
def typed_decimals(draw: st.DrawFn) -> Typed:
    """A decimal as text with a point, and the value it stands for, built from its digits."""
    digits = draw(st.text("0123456789", min_size=1, max_size=MAX_DIGITS))
    places = draw(st.integers(0, len(digits)))
    power = draw(st.none() | st.integers(places - MAX_EXPONENT, MAX_EXPONENT))
    sign = draw(st.sampled_from(["", "+", "-"]))
    cut = len(digits) - places
    text = sign + digits[:cut] + ("." + digits[cut:] if places else "")
    if power is not None:
        text += draw(st.sampled_from("eE")) + str(power)
    mantissa = -int(digits) if sign == "-" else int(digits)
    return text, Decimal10(mantissa, (power or 0) - places)


tables = st.lists(st.tuples(st.sampled_from(LEVELS), typed_decimals()), min_size=1, max_size=12)


def written(rows: list[tuple[str, str, str]], separator: str, line_end: str, quoting: int) -> str:
    """`rows` as the standard library writes them."""
    sink = io.StringIO(newline="")
    # The literal types of the typeshed for `quoting` are wider than an int that was drawn.
    writer = csv.writer(sink, delimiter=separator, lineterminator=line_end, quoting=quoting)  # type: ignore[arg-type]
    writer.writerow(("who, or what", "lot", "assay"))
    writer.writerows(rows)
    return sink.getvalue()


@pytest.mark.requirement("SOURCE-4")
@given(
    table=tables,
    separator=st.sampled_from(list(SEPARATORS)),
    decimal_mark=st.sampled_from(["point", "comma"]),
    line_end=st.sampled_from(["\n", "\r\n"]),
    byte_order_mark=st.booleans(),
    quote_all=st.booleans(),
    note=st.text(st.characters(exclude_characters="\r\0", exclude_categories=["Cs"]), max_size=20),
)
def test_every_way_of_writing_the_same_decimals_gives_the_same_exact_values(
    table: list[tuple[str, Typed]],
    separator: str,
    decimal_mark: str,
    line_end: str,
    byte_order_mark: bool,
    quote_all: bool,
    note: str,
) -> None:
    commas = decimal_mark == "comma"
    plan = DataPlan("d.csv", ("assay",), "lot", decimal_mark="comma" if commas else "point", levels=None)
    quoting = csv.QUOTE_ALL if quote_all or (commas and separator == ",") else csv.QUOTE_MINIMAL
    rows = [(note, level, text.replace(".", ",") if commas else text) for level, (text, _) in table]
    content = written(rows, separator, line_end, quoting).encode("utf-8-sig" if byte_order_mark else "utf-8")

    observations = read_observations(content, plan, "d.csv")

    assert [(row.level, row.text, row.value) for row in observations.rows] == [
        (level, text, value) for (_, level, text), (_, (_, value)) in zip(rows, table, strict=True)
    ]
    assert all(row.extras == (note,) for row in observations.rows)
    assert observations.files[0].separator == SEPARATORS[separator]
    assert observations.files[0].byte_order_mark == byte_order_mark
    for level in observations.levels:
        meant = [value.fraction for at, (_, value) in table if at == level]
        sums = ExactSums.of(observations.values_of(level))
        assert (sums.n, sums.sum) == (len(meant), sum(meant, Fraction(0)))
        assert sums.sum_of_squares == sum((value * value for value in meant), Fraction(0))


def outcome(content: bytes) -> Observations | DataError:
    """What becomes of `content`: observations, or the words of a refusal; any other error passes through."""
    try:
        return read_observations(content, DataPlan("d.csv", ("y",), "g", replicates=1), "d.csv")
    except DataError as error:
        return error


def is_explained(error: DataError) -> bool:
    """Whether every fault says what was found and what to do, in words that a terminal can show."""
    told = all(fault.found and fault.advice for fault in error.faults)
    return bool(error.faults) and told and all(line.isprintable() for line in str(error).split("\n"))


@given(content=st.binary(max_size=400))
@example(content=b"\xef\xbb\xbf\xc2\xa0")
@example(content="\u2028".encode())
@example(content=b"g,y\n\x85,1\n")
@example(content=b"g,y\n\x0c\n")
@example(content=b"g,y\r")
def test_any_bytes_are_read_or_refused_in_words(content: bytes) -> None:
    result = outcome(content)
    assert isinstance(result, Observations) or is_explained(result)


pieces = st.sampled_from(
    [
        '"',
        '""',
        ",",
        ";",
        "\t",
        "\n",
        "\r\n",
        "\r",
        "a",
        "b",
        "1.5",
        "-2e3",
        "x",
        " ",
        "\0",
        "\u00e9",
        "<3",
        "nan",
        "1,5",
    ]
)


@given(text=st.lists(pieces, max_size=60).map("".join), separator=st.sampled_from(list(SEPARATORS)))
@example(text='a,1\n"b",2', separator=",")
def test_any_arrangement_of_marks_and_separators_is_read_or_refused_in_words(
    text: str, separator: str
) -> None:
    result = outcome(f"g{separator}y\n{text}".encode())
    if isinstance(result, DataError):
        assert is_explained(result)
        return
    # What is read agrees with the standard library's reader, which takes every text.
    read = [row for row in csv.reader(io.StringIO(f"{text}", newline=""), delimiter=separator) if any(row)]
    assert [[row.level, row.text] for row in result.rows] == [
        [level, value.strip(" \t")] for level, value in read
    ]
