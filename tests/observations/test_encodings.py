"""A text is in the encoding that the plan declares; any other is refused with the likely one named."""

from dataclasses import replace

import pytest

from assayfolio.errors import DataError
from assayfolio.observations.reading import read_observations
from assayfolio.observations.values import Observations
from assayfolio.study.plan import DataPlan, Encoding

PLAN = DataPlan("d.csv", ("y",), "g")
TEXT = "g,y,note\nkit-µ,1.10,50 €\nkit-é,1.20,naïve\n"
LATIN = TEXT.replace("50 €", "50")


def read(content: bytes, encoding: Encoding) -> Observations:
    """The observations of `content` under a declared encoding."""
    return read_observations(content, replace(PLAN, encoding=encoding), "d.csv")


def refused(content: bytes, encoding: Encoding) -> tuple[str, str, str]:
    """Place, finding and advice of the one fault of `content`."""
    with pytest.raises(DataError) as caught:
        read(content, encoding)
    (fault,) = caught.value.faults
    return str(fault.place), fault.found, fault.advice


@pytest.mark.parametrize(
    ("encoding", "codec", "text"),
    [
        ("utf-8", "utf-8", TEXT),
        ("utf-8", "utf-8-sig", TEXT),
        ("utf-16", "utf-16", TEXT),
        ("windows-1252", "cp1252", TEXT),
        ("iso-8859-1", "latin-1", LATIN),
        ("iso-8859-15", "iso8859-15", TEXT),
    ],
)
def test_a_declared_encoding_gives_the_same_labels_and_values(
    encoding: Encoding, codec: str, text: str
) -> None:
    read_so = read(text.encode(codec), encoding)
    meant = read(text.encode(), "utf-8")
    assert read_so.rows == meant.rows
    assert read_so.levels == ("kit-µ", "kit-é")
    assert read_so.files[0].encoding == encoding


def test_both_byte_orders_of_utf_16_are_told_by_their_mark() -> None:
    little, big = b"\xff\xfe" + TEXT.encode("utf-16-le"), b"\xfe\xff" + TEXT.encode("utf-16-be")
    assert read(little, "utf-16").rows == read(big, "utf-16").rows
    assert read(big, "utf-16").files[0].byte_order_mark


@pytest.mark.parametrize("encoding", ["windows-1252", "iso-8859-1", "iso-8859-15"])
def test_plain_ascii_is_the_same_in_every_one_byte_encoding(encoding: Encoding) -> None:
    content = b"g,y\na,1\nb,2\n"
    assert read(content, encoding).rows == read(content, "utf-8").rows


def test_utf_8_that_is_declared_as_something_else_is_refused_before_its_letters_turn_into_others() -> None:
    place, found, advice = refused(TEXT.encode(), "windows-1252")
    assert place == "d.csv:2:5"
    assert found == "the file is UTF-8 throughout: `µ` would be `Âµ` in windows-1252"
    assert "state utf-8" in advice


def test_utf_8_with_its_mark_is_refused_where_another_encoding_is_declared() -> None:
    assert refused(TEXT.encode("utf-8-sig"), "iso-8859-1")[1] == "the file is encoded in UTF-8"
    assert refused(TEXT.encode("utf-8-sig"), "utf-16")[1] == "the file is encoded in UTF-8"


def test_utf_16_is_refused_where_it_is_not_declared_and_the_declaration_is_told() -> None:
    for encoding in ("utf-8", "windows-1252"):
        place, found, advice = refused(TEXT.encode("utf-16"), encoding)  # type: ignore[arg-type]
        assert (place, found) == ("d.csv:1:1", "the file is encoded in UTF-16")
        assert "in the study's data" in advice or "state in its data" in advice


def test_utf_16_without_its_mark_is_refused_since_its_byte_order_would_be_a_guess() -> None:
    assert "no byte order mark" in refused(TEXT.encode("utf-16-le"), "utf-16")[1]


def test_a_cut_utf_16_file_is_refused_at_its_end() -> None:
    place, found, _ = refused("g,y\na,1".encode("utf-16")[:-1], "utf-16")
    assert (place, found) == ("d.csv:2:3", "bytes that are no UTF-16 (from number 15 of the file)")


def test_half_a_surrogate_pair_is_refused_where_it_stands() -> None:
    content = b"\xff\xfe" + "g,y\na".encode("utf-16-le") + b"\x00\xd8" + ",1\n".encode("utf-16-le")
    assert refused(content, "utf-16")[0] == "d.csv:2:2"


def test_a_nul_character_in_utf_16_is_refused_where_it_stands() -> None:
    assert refused("g,y\na,\x001\n".encode("utf-16"), "utf-16")[:2] == ("d.csv:2:3", "a NUL character")


@pytest.mark.requirement("SOURCE-4")
def test_windows_1252_is_named_where_utf_8_was_expected_with_the_letter_it_would_give() -> None:
    place, found, advice = refused(TEXT.encode("cp1252"), "utf-8")
    assert place == "d.csv:2:5"
    assert "byte 0xB5" in found
    assert "`µ` in Windows-1252, which `encoding: windows-1252` declares" in advice


def test_a_byte_that_windows_1252_does_not_have_is_refused() -> None:
    assert refused(b"g,y\na\x81,1\n", "windows-1252")[:2] == (
        "d.csv:2:2",
        "byte 0x81 (number 6 of the file) is not windows-1252",
    )


@pytest.mark.parametrize("encoding", ["iso-8859-1", "iso-8859-15"])
def test_a_control_character_of_an_iso_encoding_is_likely_windows_1252(encoding: Encoding) -> None:
    place, found, advice = refused(b"g,y\nb\xe9\x80,1\n", encoding)
    assert place == "d.csv:2:3"
    assert found == f"byte 0x80 is a control character in {encoding}"
    assert "`€` in windows-1252" in advice
