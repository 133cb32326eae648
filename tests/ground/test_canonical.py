"""The same value always becomes the same bytes, those that RFC 8785 prescribes."""

import json
import struct
from collections.abc import Mapping
from types import MappingProxyType

import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from assayfolio.canonical import Json, canonical_bytes, canonical_digest, sha256_hex

NUMBERS = [  # appendix B of RFC 8785, written down from memory: bits of the double, its text
    ("0000000000000000", "0"),
    ("8000000000000000", "0"),
    ("0000000000000001", "5e-324"),
    ("8000000000000001", "-5e-324"),
    ("7fefffffffffffff", "1.7976931348623157e+308"),
    ("ffefffffffffffff", "-1.7976931348623157e+308"),
    ("4340000000000000", "9007199254740992"),
    ("c340000000000000", "-9007199254740992"),
    ("4430000000000000", "295147905179352830000"),
    ("44b52d02c7e14af5", "9.999999999999997e+22"),
    ("44b52d02c7e14af6", "1e+23"),
    ("44b52d02c7e14af7", "1.0000000000000001e+23"),
    ("444b1ae4d6e2ef4e", "999999999999999700000"),
    ("444b1ae4d6e2ef4f", "999999999999999900000"),
    ("444b1ae4d6e2ef50", "1e+21"),
    ("3eb0c6f7a0b5ed8c", "9.999999999999997e-7"),
    ("3eb0c6f7a0b5ed8d", "0.000001"),
    ("41b3de4355555553", "333333333.3333332"),
    ("41b3de4355555554", "333333333.33333325"),
    ("41b3de4355555555", "333333333.3333333"),
    ("41b3de4355555556", "333333333.3333334"),
    ("41b3de4355555557", "333333333.33333343"),
    ("becbf647612f3696", "-0.0000033333333333333333"),
    ("43143ff3c1cb0959", "1424953923781206.2"),
]

values = st.recursive(
    st.none()
    | st.booleans()
    | st.integers(-(2**53) + 1, 2**53 - 1)
    | st.floats(allow_nan=False, allow_infinity=False)
    | st.text(st.characters(exclude_categories=["Cs"]), max_size=8),
    lambda inner: (
        st.lists(inner, max_size=4)
        | st.dictionaries(st.text(st.characters(exclude_categories=["Cs"]), max_size=5), inner, max_size=4)
    ),
    max_leaves=12,
)


@pytest.mark.parametrize(("bits", "text"), NUMBERS)
def test_a_double_is_spelt_as_the_standard_prescribes(bits: str, text: str) -> None:
    (value,) = struct.unpack(">d", bytes.fromhex(bits))
    assert canonical_bytes(value) == text.encode()


def test_keys_are_in_the_order_of_their_utf_16_units() -> None:
    value: Json = {"\u20ac": 1, "\r": 2, "\ufb33": 3, "1": 4, "\U0001f600": 5, "\u0080": 6, "\u00f6": 7}
    keys = list(json.loads(canonical_bytes(value)))
    assert keys == ["\r", "1", "\u0080", "\u00f6", "\u20ac", "\U0001f600", "\ufb33"]


def test_text_is_written_in_utf_8_and_only_what_must_be_is_escaped() -> None:
    text = "\u20ac$\u000f\u000aA'\u0042\u0022\u005c\\\"/"
    assert canonical_bytes([text]) == '["\u20ac$\\u000f\\nA\'B\\"\\\\\\\\\\"/"]'.encode()


def test_no_blank_stands_between_the_parts() -> None:
    assert canonical_bytes({"b": [1, 2.5, None], "a": {"x": True, "w": ()}}) == (
        b'{"a":{"w":[],"x":true},"b":[1,2.5,null]}'
    )


def read_back(written: bytes) -> Json:
    """The value in `written`; large whole numbers were doubles and become doubles again."""

    def number(text: str) -> int | float:
        return int(text) if abs(int(text)) < 2**53 else float(text)

    value: Json = json.loads(written, parse_int=number)
    return value


@given(value=values)
@example(value=2.0**60)
def test_what_is_written_reads_back_and_writes_again_the_same(value: Json) -> None:
    written = canonical_bytes(value)
    assert read_back(written) == value
    assert canonical_bytes(read_back(written)) == written


@given(value=st.dictionaries(st.text("abc\u00e9", max_size=3), st.integers(0, 9), max_size=6))
def test_the_order_in_which_keys_were_added_does_not_matter(value: dict[str, int]) -> None:
    backwards: Mapping[str, int] = dict(reversed(value.items()))
    assert canonical_bytes(backwards) == canonical_bytes(value)
    assert canonical_digest(backwards) == canonical_digest(value)


@pytest.mark.parametrize(
    "value",
    [float("nan"), float("inf"), -float("inf"), 2**53, -(2**53), [1, [float("nan")]], {"n": 10**30}],
    ids=["NaN", "inf", "-inf", "2**53", "-2**53", "nested NaN", "nested integer"],
)
def test_what_the_standard_cannot_hold_is_refused(value: Json) -> None:
    with pytest.raises(ValueError):
        canonical_bytes(value)


def test_half_of_a_surrogate_pair_is_refused() -> None:
    with pytest.raises(ValueError):
        canonical_bytes({"text": "\ud800"})


def test_a_mapping_that_is_no_dict_is_refused() -> None:
    with pytest.raises(ValueError):
        canonical_bytes(MappingProxyType({"b": 1, "a": 2}))


def test_the_digest_is_that_of_the_bytes() -> None:
    # FIPS 180-4 example for the message "abc", written down from memory.
    assert sha256_hex(b"abc") == "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"
    assert canonical_digest({"a": 1}) == sha256_hex(b'{"a":1}')
