"""Canonical JSON (RFC 8785) and SHA-256: the one way in which values become bytes to be hashed."""

import hashlib
from collections.abc import Mapping, Sequence
from typing import TypeAlias

import rfc8785

Json: TypeAlias = bool | int | float | str | Sequence["Json"] | Mapping[str, "Json"] | None


def canonical_bytes(value: Json) -> bytes:
    """`value` as canonical JSON by RFC 8785.

    Objects are dicts, arrays are lists or tuples. A double of 2**53 and more is written without a decimal
    point, so that a reader has to take large whole numbers for doubles.
    Raises ValueError for what that standard cannot hold: NaN, infinities, integers beyond 2**53 - 1, half of
    a surrogate pair, and for any other kind of value.
    """
    return rfc8785.dumps(value)


def sha256_hex(content: bytes) -> str:
    """The SHA-256 of `content` as 64 lower-case hexadecimal digits."""
    return hashlib.sha256(content).hexdigest()


def canonical_digest(value: Json) -> str:
    """The SHA-256 of the canonical bytes of `value`."""
    return sha256_hex(canonical_bytes(value))
