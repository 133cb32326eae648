"""The record of one signature beside the PDF: `sign-off/<n>-<role>.json`, canonical JSON (RFC 8785).

It says how long the PDF was with that signature and what its SHA-256 was, so that a signature that is cut off
later, which no reader of the PDF can see, is missed.
"""

import re
from collections.abc import Mapping
from dataclasses import dataclass
from datetime import datetime
from typing import Literal, get_args

from assayfolio.canonical import Json, canonical_bytes, sha256_hex
from assayfolio.evidence.signing.refusals import SigningRefusedError
from assayfolio.evidence.signing.statement import Statement, rfc3339
from assayfolio.evidence.strict_json import NotCanonicalError, parse_canonical

FORMAT = "assayfolio-sign-off/1"
Level = Literal["B-B", "B-T", "B-LT"]

_KEYS = frozenset(
    {
        "format",
        "number",
        "field",
        "role",
        "person",
        "meaning",
        "time",
        "seal",
        "certificate",
        "level",
        "unsigned",
        "pdf",
    }
)
_NAME = re.compile(r"([1-9][0-9]{0,3})-([a-z][a-z0-9-]{0,39})\.json")
_DIGEST = re.compile(r"[0-9a-f]{64}")
_TIME = re.compile(r"\d{4}-\d\d-\d\dT\d\d:\d\d:\d\d[+-]\d\d:\d\d")


@dataclass(frozen=True, slots=True)
class FileFacts:
    """Length in bytes and SHA-256 of a file."""

    length: int
    sha256: str


@dataclass(frozen=True, slots=True)
class SignOffRecord:
    """One signature. `certificate` is its SHA-256; `unsigned` the report before any, `pdf` with this one."""

    number: int
    statement: Statement
    certificate: str
    level: Level
    unsigned: FileFacts
    pdf: FileFacts

    @property
    def name(self) -> str:
        """The record's file name."""
        return f"{self.number}-{self.statement.field}.json"


def file_facts(content: bytes) -> FileFacts:
    """Length and digest of `content`."""
    return FileFacts(len(content), sha256_hex(content))


def record_bytes(record: SignOffRecord) -> bytes:
    """The record as it is written."""
    stated = record.statement
    value: dict[str, Json] = {
        "format": FORMAT,
        "number": record.number,
        "field": stated.field,
        "role": stated.role,
        "person": stated.person,
        "meaning": stated.meaning,
        "time": rfc3339(stated.time),
        "seal": stated.seal,
        "certificate": record.certificate,
        "level": record.level,
        "unsigned": _file_value(record.unsigned),
        "pdf": _file_value(record.pdf),
    }
    return canonical_bytes(value)


def _file_value(facts: FileFacts) -> Json:
    return {"bytes": facts.length, "sha256": facts.sha256}


def read_record(name: str, content: bytes) -> SignOffRecord:
    """The record in the file `name`. Raises ValueError with the reason for anything else."""
    try:
        value = parse_canonical(content)
    except NotCanonicalError as error:
        raise ValueError(f"it is not canonical JSON: {error}") from error
    if not isinstance(value, Mapping) or set(value) != _KEYS or value["format"] != FORMAT:
        raise ValueError("it does not have the keys of a sign-off record")
    texts = {key: _text(value[key], key) for key in ("field", "role", "person", "meaning", "seal", "time")}
    level, number, certificate = value["level"], value["number"], _text(value["certificate"], "certificate")
    if level not in get_args(Level):
        raise ValueError(f"{level!r} is no level of a signature")
    if not isinstance(number, int) or isinstance(number, bool):
        raise ValueError("its number is no whole number")  # noqa: TRY004 - one kind of error for a bad record
    if not _DIGEST.fullmatch(certificate):
        raise ValueError("its certificate is not named by a SHA-256")
    record = SignOffRecord(
        number=number,
        statement=_statement(texts),
        certificate=certificate,
        level="B-B" if level == "B-B" else "B-T" if level == "B-T" else "B-LT",
        unsigned=_file(value["unsigned"]),
        pdf=_file(value["pdf"]),
    )
    if not _NAME.fullmatch(name) or record.name != name:
        raise ValueError(f"by its content its name would be {record.name}")
    return record


def _text(value: Json, key: str) -> str:
    if isinstance(value, str):
        return value
    raise ValueError(f"its {key} is no text")


def _statement(texts: Mapping[str, str]) -> Statement:
    if not _TIME.fullmatch(texts["time"]):
        raise ValueError("its time is not written by RFC 3339 with an offset")
    try:
        return Statement(
            field=texts["field"],
            role=texts["role"],
            person=texts["person"],
            meaning=texts["meaning"],
            time=datetime.fromisoformat(texts["time"]),
            seal=texts["seal"],
        )
    except SigningRefusedError as error:
        raise ValueError(str(error)) from error


def _file(value: Json) -> FileFacts:
    if not isinstance(value, Mapping) or set(value) != {"bytes", "sha256"}:
        raise ValueError("it does not give a file by bytes and sha256")
    length, digest = value["bytes"], value["sha256"]
    if not isinstance(length, int) or isinstance(length, bool) or length < 0:
        raise ValueError("the length of a file is no whole number")
    if not isinstance(digest, str) or not _DIGEST.fullmatch(digest):
        raise ValueError("the digest of a file is no SHA-256")
    return FileFacts(length, digest)
