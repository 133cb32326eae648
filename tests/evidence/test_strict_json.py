"""Reading canonical JSON many lines at once says of each line what reading it alone says."""

import json

import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.canonical import canonical_bytes
from assayfolio.evidence.strict_json import NotCanonicalError, parse_canonical, parse_canonical_lines

VALUES = st.recursive(
    st.none()
    | st.booleans()
    | st.integers(-(2**54), 2**54)
    | st.floats(allow_nan=False)
    | st.text(max_size=8),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=5), inner, max_size=3),
    max_leaves=6,
)
OBJECTS = st.dictionaries(st.text(max_size=5), VALUES, max_size=4)

ODD = (
    b"",
    b"{}",
    b"[]",
    b"1",
    b'{"a":1.0}',
    b'{"a":1e2}',
    b'{"a":-0}',
    b'{"a":[1,2.5]}',
    b'{"a":[-1e1]}',
    b'{"a":1,"a":1}',
    b'{"b":1,"a":1}',
    b'{"a": 1}',
    b'{"a":9007199254740992}',
    b'{"a":123456789012345678901234567890}',
    b'{"a":"\\u0041"}',
    b'{"a":"\\/"}',
    b'{"a":"\x7f"}',
    b'{"a":"\\u001f\\n"}',
    b'{"a":"\\u001F"}',
    b'{"a":1}{"b":1}',
    b'{"a":NaN}',
    b'{"a":tru}',
    b"\xff",
    '{"ä":1}'.encode(),
    b"[" * 3000,
)


def alone(line):
    try:
        return parse_canonical(line)
    except NotCanonicalError as error:
        return str(error)


def together(lines):
    return [str(one) if isinstance(one, NotCanonicalError) else one for one in parse_canonical_lines(lines)]


def spelt(value):
    """A value in JSON, canonical or not quite."""
    return json.dumps(value, ensure_ascii=False, separators=(",", ":")).encode("utf-8", "surrogatepass")


@given(st.lists(OBJECTS.map(spelt), max_size=5))
def test_lines_read_together_are_what_they_are_alone(lines):
    assert together(lines) == [alone(line) for line in lines]


@given(
    st.lists(st.dictionaries(st.sampled_from("abc"), st.integers(0, 99) | st.sampled_from("xy")), min_size=1),
    st.data(),
)
def test_an_altered_byte_among_canonical_lines_is_judged_as_it_is_alone(values, data):
    lines = [canonical_bytes(value) for value in values]
    at = data.draw(st.integers(0, len(lines) - 1))
    place = data.draw(st.integers(0, len(lines[at]) - 1))
    byte = data.draw(st.integers(32, 126))
    lines[at] = lines[at][:place] + bytes([byte]) + lines[at][place + 1 :]
    assert together(lines) == [alone(line) for line in lines]


@pytest.mark.parametrize("odd", ODD)
def test_an_odd_line_is_judged_as_it_is_alone(odd):
    lines = [b'{"a":1}', odd, b'{"b":"x"}']
    assert together(lines) == [alone(line) for line in lines]


def test_canonical_lines_give_their_values():
    values = [{"a": index, "b": ["x", None, True]} for index in range(600)]
    assert parse_canonical_lines([canonical_bytes(value) for value in values]) == values
