"""The record beside the PDF: one spelling, nothing missing, nothing more."""

import json
from dataclasses import replace
from datetime import UTC, datetime, timedelta, timezone

import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.canonical import canonical_bytes
from assayfolio.evidence.signing.records import FileFacts, SignOffRecord, read_record, record_bytes
from assayfolio.evidence.signing.statement import Statement

PLAIN = SignOffRecord(
    number=1,
    statement=Statement(
        "author",
        "author",
        "Ada Meadow",
        "I performed this analysis as planned",
        datetime(2026, 12, 1, 10, 5, 7, tzinfo=timezone(timedelta(hours=1))),
        "5e" * 32,
    ),
    certificate="1a" * 32,
    level="B-B",
    unsigned=FileFacts(100, "2b" * 32),
    pdf=FileFacts(200, "3c" * 32),
)

digests = st.text("0123456789abcdef", min_size=64, max_size=64)
words = st.text("abcdefgÄÖ中ß,;.-'\" "[:7] + "ÄÖß,;.-'\"", min_size=1, max_size=30)
offsets = st.integers(-14 * 60, 14 * 60).map(lambda minutes: timezone(timedelta(minutes=minutes)))
times = st.datetimes(datetime(1980, 1, 1), datetime(2090, 1, 1), timezones=offsets).map(  # noqa: DTZ001
    lambda time: time.replace(microsecond=0)
)
files = st.builds(FileFacts, st.integers(0, 2**40), digests)


@given(
    st.integers(1, 9999),
    words,
    words,
    times,
    digests,
    digests,
    st.sampled_from(["B-B", "B-T", "B-LT"]),
    files,
    files,
)
def test_a_record_is_read_as_it_was_written(
    number, person, meaning, time, seal, certificate, level, unsigned, pdf
):
    stated = Statement("reviewer-2", "reviewer", person, meaning, time, seal)
    record = SignOffRecord(number, stated, certificate, level, unsigned, pdf)
    read = read_record(record.name, record_bytes(record))
    assert read == record
    assert read.statement.time.utcoffset() == time.utcoffset()


def test_a_record_is_canonical_and_named_by_number_and_field():
    content = record_bytes(PLAIN)
    assert PLAIN.name == "1-author.json"
    assert content == canonical_bytes(json.loads(content))
    assert json.loads(content)["time"] == "2026-12-01T10:05:07+01:00"


def test_utc_is_written_as_an_offset_too():
    stated = replace(PLAIN.statement, time=datetime(2026, 12, 1, 9, 5, 7, tzinfo=UTC))
    assert b"09:05:07+00:00" in record_bytes(replace(PLAIN, statement=stated))


WRONG = [
    ({"format": "assayfolio-sign-off/2"}, "keys"),
    ({"more": 1}, "keys"),
    ({"number": "1"}, "whole number"),
    ({"number": True}, "whole number"),
    ({"number": 2}, "2-author.json"),
    ({"person": 7}, "person is no text"),
    ({"person": ""}, "empty"),
    ({"role": "approver"}, "not one for the role"),
    ({"time": "2026-12-01T10:05:07"}, "RFC 3339"),
    ({"time": "2026-12-01T10:05:07Z"}, "RFC 3339"),
    ({"time": "2026-13-01T10:05:07+01:00"}, "month"),
    ({"seal": "5E" * 32}, "seal"),
    ({"certificate": "1a"}, "SHA-256"),
    ({"level": "B-LTA"}, "level"),
    ({"pdf": {"bytes": -1, "sha256": "3c" * 32}}, "length"),
    ({"pdf": {"bytes": 1, "sha256": "3c"}}, "digest"),
    ({"unsigned": {"bytes": 1}}, "bytes and sha256"),
    ({"unsigned": None}, "bytes and sha256"),
]


@pytest.mark.parametrize(("changes", "words"), WRONG)
def test_a_record_of_another_make_is_refused_with_the_reason(changes, words):
    content = canonical_bytes(json.loads(record_bytes(PLAIN)) | changes)
    with pytest.raises(ValueError, match=words):
        read_record("1-author.json", content)


@pytest.mark.parametrize("key", sorted(json.loads(record_bytes(PLAIN))))
def test_no_key_may_be_missing(key):
    value = json.loads(record_bytes(PLAIN))
    del value[key]
    with pytest.raises(ValueError, match="keys"):
        read_record("1-author.json", canonical_bytes(value))


@pytest.mark.parametrize("content", [b"", b"[]", b"{}", b"\xff", b'{"format":1}'])
def test_what_is_no_record_is_refused(content):
    with pytest.raises(ValueError):
        read_record("1-author.json", content)


@given(st.binary(max_size=200))
def test_no_bytes_bring_the_reader_down(content):
    with pytest.raises(ValueError):
        read_record("1-author.json", content)
