import re

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from assayfolio.canonical import sha256_hex
from assayfolio.errors import InputError
from assayfolio.evidence.manifest import (
    bag_info_bytes,
    collisions,
    decode_path,
    encode_path,
    manifest_bytes,
    name_fault,
    parse_manifest,
    parse_oxum,
)

A, B = sha256_hex(b"a"), sha256_hex(b"b")


def test_a_manifest_is_sorted_lines_of_digest_two_blanks_and_path():
    assert manifest_bytes({"data/b": B, "data/a": A}) == f"{A}  data/a\n{B}  data/b\n".encode()


def test_percent_sign_and_line_breaks_are_percent_encoded_and_nothing_else():
    assert encode_path("a%b\rc\nd é ü#?.csv") == "a%25b%0Dc%0Ad é ü#?.csv"


@given(st.text())
def test_every_path_survives_encoding(path):
    assert decode_path(encode_path(path)) == path
    assert not {"\r", "\n"} & set(encode_path(path))


@pytest.mark.parametrize("text", ["a%b", "100%", "a%2", "a%41"])
def test_a_percent_sign_that_encodes_nothing_is_refused(text):
    with pytest.raises(ValueError, match="neither"):
        decode_path(text)


@given(st.dictionaries(st.from_regex(r"data/[a-zé試 _.%-]{0,8}[a-z]", fullmatch=True), st.binary()))
def test_every_manifest_of_good_paths_reads_back(contents):
    assume(not collisions(contents) and not any(name_fault(path.replace("%", "_")) for path in contents))
    digests = {path: sha256_hex(content) for path, content in contents.items()}
    reading = parse_manifest(manifest_bytes(digests))
    assert reading.digests == digests
    assert reading.faults == (() if digests else ("it is empty",))


@pytest.mark.parametrize(
    ("content", "fault"),
    [
        (f"{A}  data/a", "line 1 has no line end"),
        (f"{A}  data/a\r\n", "line 1 ends with a carriage return"),
        (f"{A} data/a\n", "line 1 is not a SHA-256"),
        (f"{A} *data/a\n", "line 1 is not a SHA-256"),
        (f"{A.upper()}  data/a\n", "line 1 is not a SHA-256"),
        (f"{A[:-1]}  data/a\n", "line 1 is not a SHA-256"),
        (f"{A}  \n", "line 1 is not a SHA-256"),
        ("\n", "line 1 is not a SHA-256"),
        ("# note\n", "line 1 is not a SHA-256"),
        (f"\ufeff{A}  data/a\n", "line 1 is not a SHA-256"),
        (f"{A}  data/a\n{A}  data/a\n", "line 2 lists data/a a second time"),
        (f"{A}  data/a\n{B}  data/a\n", "line 2 lists data/a a second time"),
        (f"{A}  data/b\n{B}  data/a\n", "line 2 is out of order"),
        (f"{A}  ../a\n", 'unsafe path .*it has the part ".."'),
        (f"{A}  data/../../a\n", "unsafe path"),
        (f"{A}  /etc/hosts\n", "absolute"),
        (f"{A}  C:/hosts\n", "absolute"),
        (f"{A}  data\\a\n", r'it holds "\\"'),
        (f"{A}  data/a\x07\n", "unprintable character U.0007"),
        (f"{A}  data/a%zz\n", "unreadable path"),
        (f"{A}  data/A\n{B}  data/a\n", "differ only in case"),
        ("", "it is empty"),
    ],
)
def test_every_departure_from_the_form_is_a_fault(content, fault):
    faults = parse_manifest(content.encode()).faults
    assert any(re.search(fault, each) for each in faults), faults


def test_bytes_that_are_no_utf8_are_a_fault():
    assert parse_manifest(A.encode() + b"  data/\xff\n").faults == ("byte 72 is not UTF-8",)


def test_good_lines_count_although_others_are_faulty():
    reading = parse_manifest(f"{A}  data/a\nnonsense\n{B}  data/b\n".encode())
    assert reading.digests == {"data/a": A, "data/b": B}
    assert len(reading.faults) == 1


@pytest.mark.parametrize(
    "path",
    [
        "data/study.yaml",
        "data/inputs/Eisen (2) ü.csv",
        "data/inputs/試料.csv",
        "data/.hidden",
        "data/a b/c d.csv",
    ],
)
def test_ordinary_names_may_stand_in_a_folio(path):
    assert name_fault(path) is None


@pytest.mark.parametrize(
    ("path", "fault"),
    [
        ("/data/a", "absolute"),
        ("c:\\a", "absolute"),
        ("data/../a", '".."'),
        ("data/./a", '"."'),
        ("data//a", 'the part ""'),
        ("data/a/", 'the part ""'),
        ("data/a\\b", '"\\"'),
        ("data/50%.csv", '"%"'),
        ("data/a\nb", "U+000A"),
        ("data/a\x7fb", "U+007F"),
        ("data/a\x85b", "U+0085"),
        ("data/a\u2028b", "U+2028"),
        ("data/a\u202eb", "U+202E"),
        ("data/a\udcff", "U+DCFF"),
        ("data/ a", "blank"),
        ("data/a /b", "blank"),
        ("data/" + "é" * 128, "longer than 255 bytes"),
    ],
)
def test_names_that_some_tool_or_disk_reads_differently_are_refused(path, fault):
    assert fault in name_fault(path)


@pytest.mark.parametrize(
    ("paths", "words"),
    [
        (["data/Iron.csv", "data/iron.csv"], "differ only in case"),
        (["data/e\u0301.csv", "data/\u00e9.csv"], "differ only in case or in how letters are composed"),
        (["data/Maße.csv", "data/MASSE.csv"], "differ only in case"),
        (["data/A/x", "data/a/y"], "data/a and data/A differ"),
        (["data/a", "data/a/b"], "data/a is a file, and data/a/b needs a folder there"),
    ],
)
def test_names_that_cannot_lie_side_by_side_on_every_disk_are_found(paths, words):
    [found] = collisions(paths)
    assert words in found


def test_names_that_merely_resemble_each_other_do_not_collide():
    assert collisions(["data/a", "data/ab", "data/b/a", "data/b/ab", "data/a.b/c"]) == ()


def test_bag_info_keeps_the_labels_in_order_and_counts_the_payload():
    content = bag_info_bytes([("Source-Organization", "Labor\n Nord"), ("Bag-Group", "IRON-7")], [3, 0, 4])
    assert content == b"Source-Organization: Labor Nord\nBag-Group: IRON-7\nPayload-Oxum: 7.3\n"
    assert parse_oxum(content) == (7, 3)


@pytest.mark.parametrize(
    "tag",
    [("", "x"), ("A", ""), ("A", " \n "), ("A:B", "x"), ("A", "x\0"), ("A\n", "x"), ("payload-oxum", "1.1")],
)
def test_labels_that_cannot_stand_in_bag_info_are_refused(tag):
    with pytest.raises(InputError):
        bag_info_bytes([tag], [1])


@pytest.mark.parametrize(
    "content",
    [
        b"",
        b"Payload-Oxum: 7\n",
        b"Payload-Oxum: 7.3.1\n",
        b"Payload-Oxum: -7.3\n",
        b"Payload-Oxum: 07.3\n",
        b"Payload-Oxum: 7.3\nPayload-Oxum: 7.3\n",
        b"Payload-Oxum: \xff\n",
    ],
)
def test_a_payload_size_that_cannot_be_read_once_is_refused(content):
    with pytest.raises(ValueError):
        parse_oxum(content)
