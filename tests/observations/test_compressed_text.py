"""Text compressed with gzip: the same as the text itself, inflated within bounds."""

import gzip
import zlib

import pytest

from assayfolio.errors import DataError
from assayfolio.observations.compressed import FREE_BYTES, MOST_RATIO, inflated
from assayfolio.observations.decoding import MAX_BYTES
from assayfolio.observations.reading import read_observations
from assayfolio.study.plan import DataPlan

PLAN = DataPlan("d.csv.gz", ("y",), "g")
TEXT = b"g,y\na,1.10\nb,1.20\n"


def refused(content: bytes, file: str = "d.csv.gz") -> str:
    """What was found wrong with `content`."""
    with pytest.raises(DataError) as caught:
        read_observations(content, PLAN, file)
    (fault,) = caught.value.faults
    assert str(fault.place) == file
    assert fault.advice
    return fault.found


@pytest.mark.parametrize("level", [0, 1, 9])
def test_a_compressed_text_is_read_as_the_text(level: int) -> None:
    content = gzip.compress(TEXT, level)
    observations = read_observations(content, PLAN, "d.csv.gz")
    assert observations.rows == read_observations(TEXT, PLAN, "d.csv").rows
    assert observations.files[0].form == "gzip text"
    assert observations.files[0].size == len(content)


def test_the_name_decides_what_a_file_is_and_its_bytes_have_to_agree() -> None:
    assert "not a file compressed with gzip" in refused(TEXT)
    assert "a file compressed with gzip" in refused(gzip.compress(TEXT), "d.csv")


@pytest.mark.requirement("SOURCE-3")
@pytest.mark.parametrize("cut", [3, 12, 20, -1])
def test_a_cut_file_is_refused(cut: int) -> None:
    assert refused(gzip.compress(TEXT)[:cut]) == "the compressed file was cut short"


def test_a_damaged_file_is_refused() -> None:
    content = bytearray(gzip.compress(TEXT))
    content[-8] ^= 1
    assert "damaged (incorrect data check)" in refused(bytes(content))
    content = bytearray(gzip.compress(TEXT))
    content[3] = 0xE0
    assert "damaged (unknown header flags set)" in refused(bytes(content))


@pytest.mark.parametrize(
    "behind", [b"\x00", b"more", gzip.compress(b"c,1.30\n")], ids=["nul", "text", "part"]
)
def test_bytes_behind_the_end_are_refused_since_readers_differ_in_what_they_make_of_them(
    behind: bytes,
) -> None:
    assert (
        refused(gzip.compress(TEXT) + behind)
        == f"{len(behind):,} bytes behind the end of the compressed text"
    )


def test_a_file_that_inflates_beyond_the_ratio_is_refused() -> None:
    content = gzip.compress(b"g,y\n" + b"a,1.0\n" * 10_000_000)
    assert (
        refused(content)
        == f"it inflates to more than {MOST_RATIO} times its size, which recorded values do not"
    )


def test_a_small_file_may_inflate_as_far_as_it_likes() -> None:
    text = b"g,y\n" + b"a,1\n" * ((FREE_BYTES - 4) // 4)
    assert inflated(gzip.compress(text), "d.csv.gz") == text


def test_a_file_that_inflates_beyond_the_longest_text_is_refused() -> None:
    stored = zlib.compressobj(0, wbits=31)
    content = stored.compress(b"x" * (MAX_BYTES + 1)) + stored.flush()
    assert refused(content) == f"it inflates to more than {MAX_BYTES:,} bytes"


def test_a_text_that_is_compressed_twice_is_refused() -> None:
    assert "a file compressed with gzip, not a text file" in refused(gzip.compress(gzip.compress(TEXT)))
