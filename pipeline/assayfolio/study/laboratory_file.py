"""Reading the laboratory's settings (`lab.yaml`) from bytes: all faults of the file in one pass."""

import re
from pathlib import PurePosixPath

from assayfolio.study.faults import Faults, listed, shown
from assayfolio.study.fields import (
    Fields,
    Reader,
    UnreadableError,
    Value,
    choice,
    distinct,
    label,
    line_of_text,
    list_of,
    mapping_of,
    matching,
    truth,
)
from assayfolio.study.laboratory import (
    LABORATORY_REQUIREMENTS,
    PROFILES,
    RETENTION_KEYS,
    SEPARATION_KEYS,
    SIGNATURE_KEYS,
    WITNESS_KINDS,
    Laboratory,
    Profile,
    Retention,
    Separation,
    SignatureSettings,
    Witness,
    WitnessKind,
)
from assayfolio.study.numbers import whole_number
from assayfolio.study.profiles import PROFILE_SETTINGS
from assayfolio.study.root import root_fields
from assayfolio.study.vocabulary import (
    LABORATORY_KEYS,
    LONGEST_NOTE,
    LONGEST_PATH,
    PAPERS,
    REQUIREMENTS,
    Paper,
)

MOST_WAIT_SECONDS = 600
MOST_YEARS_KEPT = 100
DEFAULT_ACCENT = "#0f5b66"
DEFAULT_WAIT_SECONDS = 10
MOST_LOCK_MINUTES = 7 * 24 * 60
DEFAULT_LOCK_MINUTES = 15
_WORDS = (*REQUIREMENTS, *LABORATORY_REQUIREMENTS)
_REQUIREMENT_LIST = f"a list of {listed(_WORDS)}"
_colour = matching(re.compile(r"#[0-9A-Fa-f]{6}", re.ASCII), 'a colour in quotation marks, such as "#0f5b66"')
_paper: Reader[Paper] = choice(PAPERS)
_profile: Reader[Profile] = choice(PROFILES)
_target = line_of_text(LONGEST_PATH)
_address = matching(
    re.compile(r"https?://[!-~]{1,240}", re.ASCII), "an address such as https://time.example.org/stamp"
)
_digest = matching(re.compile(r"[0-9a-f]{64}", re.ASCII), "a SHA-256: 64 digits and letters from a to f")
_WITNESSES = "a list of entries such as `- file: /mnt/witness/heads.jsonl`"


def read_laboratory(content: bytes, file: str) -> Laboratory:
    """The laboratory's settings in `content`; `file` is its name in messages.

    With a `profile`, the settings that it fixes have its values, and `require` holds what it requires too.
    Raises StudyError with every fault of the file, each with line and column; a setting that contradicts the
    profile, and `require: [witness]` without witnesses, are among them.
    """
    faults = Faults(file)
    fields = root_fields(content, LABORATORY_KEYS, faults)
    laboratory = None if fields is None else _laboratory(fields)
    faults.raise_if_any("the laboratory's settings")
    assert laboratory is not None, "settings without faults are complete"
    return laboratory


def _laboratory(fields: Fields) -> Laboratory | None:
    name = fields.required("laboratory", label)
    wait = fields.optional("wait-seconds", whole_number(0, MOST_WAIT_SECONDS))
    address = fields.optional("address", list_of(label, "a list of lines")) or ()
    note = fields.optional("note", line_of_text(LONGEST_NOTE))
    accent = fields.optional("accent", _colour) or DEFAULT_ACCENT
    paper = fields.optional("paper", _paper) or "A4"
    profile = fields.optional("profile", _profile)
    require = _with_profile(
        profile, fields.optional("require", distinct(list_of(choice(_WORDS), _REQUIREMENT_LIST))) or ()
    )
    one_person = _setting(fields, "one-person", profile, otherwise=False)
    log_reading = _setting(fields, "log-reading", profile, otherwise=False)
    review = _setting(fields, "review-before-approval", profile, otherwise=True)
    separation = _separation(fields, profile)
    witnesses = fields.optional("witnesses", list_of(_witness, _WITNESSES)) or ()
    retention = _retention(fields)
    signatures = _signatures(fields)
    _report_repeated_witnesses(fields, witnesses)
    _report_missing_witness(fields, require, profile)
    if name is None:
        return None
    return Laboratory(
        name=name,
        address=address,
        note=note,
        accent=accent,
        paper=paper,
        require=require,
        wait_seconds=DEFAULT_WAIT_SECONDS if wait is None else wait,
        profile=profile,
        one_person=one_person,
        log_reading=log_reading,
        review_before_approval=review,
        separation=separation,
        witnesses=witnesses,
        retention=retention,
        signatures=signatures,
    )


def _retention(fields: Fields) -> Retention | None:
    inner = fields.optional("retention", mapping_of(RETENTION_KEYS))
    if inner is None:
        return None
    name = inner.required("class", label)
    years = inner.required("years", whole_number(1, MOST_YEARS_KEPT))
    return None if name is None or years is None else Retention(name, years)


def _with_profile(profile: Profile | None, own: tuple[str, ...]) -> tuple[str, ...]:
    required = () if profile is None else PROFILE_SETTINGS[profile].require
    return (*required, *(word for word in own if word not in required))


def _setting(fields: Fields, key: str, profile: Profile | None, *, otherwise: bool) -> bool:
    """What `key` says, or what the profile fixes, or `otherwise`; a contradiction is reported."""
    said = fields.optional(key, truth)
    fixed = None if profile is None else PROFILE_SETTINGS[profile].fixed[fields.named(key)]
    if fixed is None:
        return otherwise if said is None else said
    value = fields.value(key)
    if value is not None and said is not None and said != fixed:
        right = str(fixed).lower()
        value.report(f"is {str(said).lower()}", f"{right}, as the profile `{profile}` has it")
    return fixed


def _separation(fields: Fields, profile: Profile | None) -> Separation:
    inner = fields.optional("separation", mapping_of(SEPARATION_KEYS))
    if inner is None:
        return Separation()
    return Separation(
        reviewer_is_not_runner=_setting(inner, "reviewer-is-not-runner", profile, otherwise=True),
        approver_is_not_author=_setting(inner, "approver-is-not-author", profile, otherwise=True),
    )


def _signatures(fields: Fields) -> SignatureSettings:
    inner = fields.optional("signatures", mapping_of(SIGNATURE_KEYS))
    if inner is None:
        return SignatureSettings()
    stamp = inner.optional("time-stamp", _address)
    minutes = inner.optional("lock-minutes", whole_number(1, MOST_LOCK_MINUTES))
    for key in ("time-stamp-certificate", "long-term"):
        value = inner.value(key)
        if value is not None and "time-stamp" not in inner:
            value.report("stands without `time-stamp`", "the address of the time-stamp authority beside it")
    if stamp is not None and "time-stamp-certificate" not in inner:
        advice = "add the SHA-256 of the certificate by which its stamps are believed"
        inner.faults.add(inner.place, "the key `time-stamp-certificate` is missing", advice)
    return SignatureSettings(
        time_stamp=stamp,
        time_stamp_certificate=inner.optional("time-stamp-certificate", _digest),
        long_term=inner.optional("long-term", truth) or False,
        lock_minutes=DEFAULT_LOCK_MINUTES if minutes is None else minutes,
        policy=inner.optional("policy", label),
    )


def _witness(value: Value) -> Witness:
    fields = Fields.of(value, WITNESS_KINDS)
    named = [kind for kind in WITNESS_KINDS if kind in fields]
    if len(named) != 1:
        raise value.unreadable(
            "names no single place", f"one of the keys {listed(WITNESS_KINDS)} in each entry"
        )
    kind: WitnessKind = named[0]
    target = fields.required(kind, _address if kind == "time-stamp" else _outside_path)
    if target is None:
        raise UnreadableError
    return Witness(kind, target)


def _outside_path(value: Value) -> str:
    expected = "an absolute path outside the workspace, such as /mnt/witness/heads.jsonl"
    text = _target(value)
    path = PurePosixPath(text)
    if not path.is_absolute() or ".." in path.parts or len(path.parts) < 2:
        raise value.unreadable(f"is {shown(text)}", expected)
    return text


def _report_repeated_witnesses(fields: Fields, witnesses: tuple[Witness, ...]) -> None:
    value = fields.value("witnesses")
    if value is None:
        return
    for place, (item, witness) in enumerate(zip(value.items(), witnesses, strict=False)):
        if witness in witnesses[:place]:
            item.report(f"names {shown(witness.target)} twice", "each place once")


def _report_missing_witness(fields: Fields, require: tuple[str, ...], profile: Profile | None) -> None:
    if "witness" not in require or "witnesses" in fields or fields.unreadable("witnesses"):
        return
    why = f"the profile `{profile}` requires one" if profile else "`require` asks for one"
    place = fields.place_of("profile" if profile else "require")
    advice = "add `witnesses:` with a place outside the workspace"
    fields.faults.add(place, f"no witness of the audit trail is named, and {why}", advice)
