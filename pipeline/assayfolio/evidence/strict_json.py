"""Reading canonical JSON (RFC 8785): one value has one spelling, so any altered byte shows."""

import json
import re
from collections.abc import Sequence
from typing import Any, Never

import orjson

from assayfolio.canonical import Json, canonical_bytes

_LARGEST = 2**53 - 1


class NotCanonicalError(ValueError):
    """The bytes are not the canonical form of any value; the message says how they differ."""


def _integer(text: str) -> int:
    if len(text) < 16:
        return int(text)
    # The limit also keeps the parser from the long conversion of a long number.
    if len(text) > 17 or abs(int(text)) > _LARGEST:
        raise ValueError(f"the integer {text[:20]} is beyond 2**53 - 1")
    return int(text)


def _no_constant(text: str) -> Never:
    raise ValueError(f"{text} is no JSON number")


def _no_twin_keys(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    found: dict[str, Any] = {}
    for key, value in pairs:
        if key in found:
            raise ValueError(f"the key {json.dumps(key)} stands twice")
        found[key] = value
    return found


_reader = json.JSONDecoder(parse_int=_integer, parse_constant=_no_constant)
_strict_reader = json.JSONDecoder(
    parse_int=_integer, parse_constant=_no_constant, object_pairs_hook=_no_twin_keys
)
# Numbers with a fraction or an exponent, which the quick way leaves to the thorough one; three searches with
# a fixed beginning are five times as quick as one that allows all of them.
_FRACTIONS = tuple(re.compile(begin + rb"-?\d+[.eE]") for begin in (b'":', rb"\[", b","))
_QUICK = orjson.OPT_SORT_KEYS | orjson.OPT_STRICT_INTEGER


def parse_json(content: bytes) -> Json:
    """Any JSON in UTF-8 whose objects name each key once. Raises NotCanonicalError with the reason."""
    try:
        return _plain(_strict_reader.decode(content.decode("utf-8")))
    except UnicodeDecodeError as error:
        raise NotCanonicalError(f"byte {error.start + 1} is not UTF-8") from None
    except json.JSONDecodeError as error:
        raise NotCanonicalError(f"it is not JSON at character {error.pos + 1}") from None
    except (ValueError, RecursionError) as error:
        reason = "it is nested too deeply" if isinstance(error, RecursionError) else str(error)
        raise NotCanonicalError(reason) from None


def parse_canonical(content: bytes) -> Json:
    """The value whose canonical JSON is exactly `content`. Raises NotCanonicalError with the reason."""
    value = parse_json(content)
    if _canonical(value) != content:
        raise NotCanonicalError(_difference(content))
    return value


def parse_canonical_lines(lines: Sequence[bytes]) -> list[Json | NotCanonicalError]:
    """Each line's value, or why it is not canonical; the same as `parse_canonical` on each, but quicker."""
    found: list[Json | NotCanonicalError] = []
    for start in range(0, len(lines), 256):
        block = lines[start : start + 256]
        quick = _quick_block(block)
        found.extend(quick if quick is not None else [_parsed_or_reason(line) for line in block])
    return found


def _quick_block(block: Sequence[bytes]) -> list[Json] | None:
    """The values of a block, if all of it is plainly canonical; None leaves it to the thorough way.

    Each line is parsed on its own, so comparing the block at once is exact: of two JSON objects that begin
    at one place in one text, neither can be longer than the other.
    """
    joined = b",".join(block)
    if not joined.isascii() or any(fraction.search(joined) for fraction in _FRACTIONS):
        return None
    try:
        values: list[Json] = [orjson.loads(line) for line in block]
        same = orjson.dumps(values, option=_QUICK) == b"[" + joined + b"]"
    except (orjson.JSONDecodeError, orjson.JSONEncodeError):
        return None
    return values if same and all(type(value) is dict for value in values) else None


def _parsed_or_reason(line: bytes) -> Json | NotCanonicalError:
    try:
        return parse_canonical(line)
    except NotCanonicalError as error:
        return error


def _plain(value: Any) -> Json:
    """Give the parser's result its type."""
    result: Json = value
    return result


def _canonical(value: Json) -> bytes | None:
    try:
        return canonical_bytes(value)
    except (ValueError, RecursionError):
        return None


def _difference(content: bytes) -> str:
    if content.endswith(b"\r"):
        return "it ends with a carriage return"
    if content != content.strip():
        return "blanks stand around it"
    return "it is not in canonical form (order of keys, blanks, or the spelling of a text or number)"
