"""Canonical JSON (RFC 8785) and SHA-256: the one way in which values become bytes to be hashed."""

import hashlib
from collections.abc import Mapping, Sequence
from typing import TypeAlias

import rfc8785

Json: TypeAlias = "bool | int | float | str | Sequence[Json] | Mapping[str, Json] | None"


def canonical_bytes(value: Json) -> bytes:
    """`value` as canonical JSON by RFC 8785.

    Raises ValueError for what that standard cannot hold: NaN, infinities, integers beyond 2**53 - 1.
    """
    return rfc8785.dumps(value)


def sha256_hex(content: bytes) -> str:
    """The SHA-256 of `content` as 64 lower-case hexadecimal digits."""
    return hashlib.sha256(content).hexdigest()


def canonical_digest(value: Json) -> str:
    """The SHA-256 of the canonical bytes of `value`."""
    return sha256_hex(canonical_bytes(value))
